"""The side column's heading: what a relapse, a sum since the start, failing oxygen and a mask off look like there."""

from dataclasses import replace

import pytest
from PySide6.QtWidgets import QLabel

from app.episode.side import SideColumn
from app.look.formats import plain
from app.look.theme import LIGHT
from app.session.readers import reader_at
from app.words import Reader
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from core.record.instant import HOUR
from core.record.message import Message
from tests.support.sample_ward import sample_ward

READER = Reader("Europe/London", "mmHg")


def bed(label: str) -> EpisodeFigures:
    return next(f for f in sample_ward() if f.label == label)


@pytest.fixture
def told(qtbot):
    """The texts of the facts that stand before the flags, a list for each."""

    def texts(figures: EpisodeFigures) -> list[list[str]]:
        column = SideColumn(LIGHT)
        qtbot.addWidget(column)
        column.show_figures(figures, shipped_policy(), reader_at("Europe/London", "mmHg", figures.as_of))
        card = column.facts()[0].parentWidget()
        facts = [f for f in column.facts() if f.parentWidget() is card]
        return [[plain(label.text()) for label in f.findChildren(QLabel)] for f in facts]

    return texts


def titles(texts: list[list[str]]) -> list[str]:
    return [t[0] for t in texts]


def test_a_lost_gain_stands_with_the_verdict(told):
    assert "gain lost, still better" in titles(told(bed("Bed 5")))


@pytest.mark.parametrize(("label", "against"), [("Bed 4", "worse"), ("Bed 2", "better")])
def test_the_sum_since_the_start_is_a_fact_of_its_own(told, label, against):
    found = titles(told(bed(label)))
    assert found.index(f"since the start: {against}") == found.index("no clear change") + 1


def test_a_verdict_stands_with_the_value_that_decided_it(told):
    fact = next(f for f in told(bed("Bed 6")) if f[0] == "better")
    assert any("PaCO2" in line and "down beyond measurement error" in line for line in fact), fact
    assert not any("within measurement error" in line for line in fact), fact


def test_what_a_score_lacks_is_said_once(qtbot):
    f = bed("Bay A 1")
    why = {"points": Message("score.inputs_missing", {"missing": "gcs"})}
    short = replace(f, scores={"hacor": replace(f.scores["hacor"], missing=("gcs",), reasons=why)})
    column = SideColumn(LIGHT)
    qtbot.addWidget(column)
    column.show_figures(short, shipped_policy(), READER)
    fact = next(f for f in column.facts() if f.findChildren(QLabel) and f.findChildren(QLabel)[0].text() == "HACOR")
    assert " ".join(label.text() for label in fact.findChildren(QLabel)).count("missing: ") == 1


def test_hypoxaemia_comes_first_and_nothing_never_acidotic_is_resolved(told):
    assert titles(told(bed("Bay A 1")))[0] == "Hypoxaemic: P/F 107 mmHg; not acidotic"
    assert titles(told(bed("Bay B 5")))[0] == "not acidotic"
    assert titles(told(bed("Bed 3")))[0] == "P/F 273 mmHg; not acidotic"


def test_off_the_mask_comes_before_the_settings_it_had(told):
    f = bed("Bed 4")
    off = replace(f, now=replace(f.now, off_mask_since=f.as_of))
    last = told(off)[-1]
    assert last[0] == "Mask off since 05:30"
    assert any(line.startswith("before it came off: BPAP-ST") for line in last)


def test_a_doubtful_gas_says_so_with_its_reason(told):
    f = bed("Bed 4")
    odd = replace(f.gases[-1], doubt=True, implausible=Message("gas.implausible", {}))
    first = told(replace(f, gases=(*f.gases[:-1], odd)))[0]
    assert first[:2] == ["doubtful: severe", "Its values hardly belong together."]
    confirmed = told(replace(f, gases=(*f.gases[:-1], replace(f.gases[-1], doubt=True))))[0]
    assert confirmed[:2] == ["severe", "Doubtful: outside usual limits, confirmed."]


def test_a_gas_of_another_day_carries_its_date(told):
    f = bed("Bed 4")
    assert not any("2026" in line for line in told(f)[0])
    f = replace(f, as_of=f.as_of + 20 * HOUR)
    assert any(line.startswith("28-Mar-2026 04:18, ") for line in told(f)[0])


def test_a_silence_is_said_where_no_hours_are_known_either(told):
    f = bed("Bed 4")
    silent = replace(f.support, silent_since=f.as_of - 13 * HOUR, hours_presumed=None, hours_on_mask=None)
    assert any(
        line.startswith("nothing logged since 27-Mar-2026 16:30") for line in told(replace(f, support=silent))[-1]
    )


def test_no_heading_of_the_column_is_cut(qtbot):
    column = SideColumn(LIGHT)
    qtbot.addWidget(column)
    column.show_figures(bed("Bed 4"), shipped_policy(), READER)
    column.resize(column.width(), 600)
    column.show()
    heads = [x for x in column.findChildren(QLabel) if x.property("role") == "emphasis"]
    assert any(x.text().startswith("What could act") for x in heads)
    for label in heads:
        right = label.mapTo(column.viewport(), label.rect().topRight()).x()
        assert right < column.viewport().width(), label.text()


def test_the_column_grows_with_the_page_within_bounds(qtbot):
    column = SideColumn(LIGHT)
    qtbot.addWidget(column)
    usual = column.width()
    column.fit_page(1280)
    assert column.width() == usual
    column.fit_page(1920)
    assert usual < column.width() < 430
    column.fit_page(3840)
    assert column.width() == 430


def score_lines(qtbot, figures: EpisodeFigures, name: str) -> list[str]:
    column = SideColumn(LIGHT)
    qtbot.addWidget(column)
    column.show_figures(figures, shipped_policy(), reader_at("Europe/London", "mmHg", figures.as_of))
    texts = [[plain(label.text()) for label in f.findChildren(QLabel)] for f in column.facts()]
    return next(t for t in texts if t[0].startswith(name))


def test_a_news2_by_scale_1_under_a_range_for_risk_says_so_on_its_card(qtbot):
    lines = " ".join(score_lines(qtbot, bed("Bed 4"), "NEWS2"))
    assert "SpO2 scale 1 (the target is 88-92 %: scale 2 needs a clinician's record)" in lines


def test_a_score_outside_its_population_says_why_and_once(qtbot):
    lines = " ".join(score_lines(qtbot, bed("Bed 4"), "HACOR"))
    assert lines.count("outside its population") == 1
    assert "acute hypercapnia" in lines
