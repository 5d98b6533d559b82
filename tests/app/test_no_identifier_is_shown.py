"""No identifier of the program reaches a person: no word with an underscore in anything told of many nights."""

import re
from collections.abc import Iterator

import pytest
from PySide6.QtWidgets import QLabel

from app import demo
from app.episode.side import SideColumn
from app.explain.explanation import Explanation
from app.explain.figures import explain_score, explanations_of, score_in
from app.explain.findings import Explainer
from app.figures.plain import episode_text
from app.handover.plain import handover_text
from app.look.formats import plain
from app.look.theme import LIGHT
from app.map.words import summary
from app.operations import entry
from app.operations import handover as handovers
from app.operations.figures import EpisodeRequest, of_episode
from app.session.readers import reader_at
from app.sheet.content import sheet_content
from app.telling.support_course import course_of
from app.ward.lane_words import LaneWords, OnWard
from app.words import Reader
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from core.record.episode import Episode
from core.record.instant import HOUR, parse
from sample_data.cohort import SCENARIOS, simulate_many
from storage.store import Store
from tests.support.night_check import END, night
from tests.support.sample_ward import sample_night
from tests.support.simulated import as_episode, instant

IDENTIFIER = re.compile(r"[^\W_]+_\w+")
AN_EARLY_GAS = parse("2026-03-28T03:00:00Z")
Told = tuple[Episode, EpisodeFigures]


def seen_at(episode: Episode, at: int) -> Told:
    return episode, episode_figures(episode, at, shipped_policy())


def many() -> Iterator[Told]:
    """The sample night by the hour and a half, simulated nights at four moments each."""
    for episode in night().values():
        yield from (seen_at(episode, END - k * HOUR) for k in (0, 2, 4, 6, 8))
    for kind in SCENARIOS:
        for simulated in simulate_many(kind, (5,)):
            yield from (seen_at(as_episode(simulated), instant(m)) for m in (40, 130, 330, 590))


@pytest.fixture(scope="module")
def with_early_gas(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Store]:
    """The sample night with a gas 17 min after a change, worse than the best before: a gain lost, nothing clear."""
    with Store.open(sample_night(tmp_path_factory.mktemp("night"))) as store:
        line = entry.LineRequest("N-0327-09", "ph 7.28 paco2 70 pao2 62", demo.ZONE, confirmed=True)
        entry.log_line(store, "AB", AN_EARLY_GAS, line)
        yield store


def texts(episode: Episode, f: EpisodeFigures) -> Iterator[str]:
    reader = reader_at(demo.ZONE, "mmHg", f.as_of)
    yield episode_text(f, reader)
    yield summary(f, reader)
    lane = LaneWords(reader, f.as_of).lane(OnWard(f, course_of(episode, f.as_of)), first=True, apart="from 22:45")
    yield from (lane.title, lane.subtitle, lane.state_word, *lane.state_shorter, lane.verdict_word, lane.flag_word)
    yield from (lane.due_word, lane.sentence, *(i.sentence for i in lane.items), *(i.word for i in lane.items))
    yield from (told.as_text() for told in explained(f, reader))


def explained(f: EpisodeFigures, reader: Reader) -> Iterator[Explanation]:
    explainer = Explainer(shipped_policy(), reader)
    yield from map(explainer.flag, f.flags)
    yield from map(explainer.response, f.responses)
    yield from map(explainer.gas, f.gases)
    yield from map(explainer.due, f.due)
    yield from map(explainer.lever, f.levers)
    yield explainer.idle_levers(f.levers)
    yield from (explain_score(key, score_in(f, key), reader, f.as_of) for key in f.scores)
    yield from explanations_of(f, reader).values()


def test_nothing_told_of_many_nights_holds_an_identifier() -> None:
    told = 0
    for episode, f in many():
        for text in texts(episode, f):
            told += 1
            assert not IDENTIFIER.search(text), (f.label, f.as_of, IDENTIFIER.search(text), text)
    assert told > 5000


def test_nor_what_is_told_after_an_early_gas(with_early_gas: Store, qtbot) -> None:
    answer = of_episode(with_early_gas, "AB", AN_EARLY_GAS, EpisodeRequest("N-0327-09", AN_EARLY_GAS)).value
    column = SideColumn(LIGHT)
    qtbot.addWidget(column)
    column.show_figures(answer.figures, shipped_policy(), reader_at(demo.ZONE, "mmHg", AN_EARLY_GAS))
    shown = [plain(label.text()) for label in column.findChildren(QLabel)]
    assert any("gain lost, no clear change" in text for text in shown), "the case is no longer the case"
    for text in (*shown, *texts(answer.record, answer.figures)):
        assert not IDENTIFIER.search(text), text


def test_nor_a_handover(with_early_gas: Store) -> None:
    for hours in (0, 2):
        end = demo.demo_now() - hours * HOUR
        request = handovers.HandoverRequest(end - 8 * HOUR, end)
        made = handovers.prepare(with_early_gas, "AB", end, request).value
        text = handover_text(sheet_content(made, Reader(demo.ZONE)))
        assert len(text) > 10_000
        assert not IDENTIFIER.search(text), IDENTIFIER.search(text)
