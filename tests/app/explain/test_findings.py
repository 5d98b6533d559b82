"""Every figure explains itself: inputs with times, the source, how sure. The policy's own limits stand there."""

from dataclasses import replace

from app.explain.findings import Explainer
from app.telling.certainty import sure_words
from app.words import Reader
from core.judgement.policy import shipped_policy
from tests.support.invented_ward import ZONE, failing

EXPLAINER = Explainer(shipped_policy(), Reader(ZONE, "mmHg"))
FIGURES = failing().figures


def test_a_flag():
    found = EXPLAINER.flag(FIGURES.flags[0])
    assert found.source == "Confalonieri, ERJ 2005;25:348"
    assert "confirmed" in found.as_text()
    assert "28-Mar-2026 04:20" in found.as_text()


def test_a_flag_says_on_which_side_of_its_limit_it_is_met():
    flag = replace(FIGURES.flags[0], marker="ph_below_720_on_support")
    assert "The marker's limits in this policy: pH below 7.20." in EXPLAINER.flag(flag).rules


def test_a_flag_names_the_policy_that_raised_it():
    flag = FIGURES.flags[0]
    own = EXPLAINER.flag(replace(flag, policy=shipped_policy().hash)).notes[-1]
    assert own == f"By the policy Shipped policy, version 1 ({shipped_policy().hash[:8]})."
    assert EXPLAINER.flag(replace(flag, policy="63be9ad0" + "0" * 56)).notes[-1].startswith("By another policy than")


def test_a_verdict_names_its_noise_with_the_source():
    found = EXPLAINER.response(FIGURES.responses[-1])
    text = found.as_text()
    assert "worse" in found.title
    assert "pH 0.033" in text
    assert "Thorson" in text
    assert ("Baseline gas", "pH 7.24, PaCO2 71 mmHg", "00:40") in found.inputs
    assert any(name == "Gas judged" and "PaCO2 +6 mmHg" in value for name, value, _ in found.inputs)


def test_a_gas_shows_formulas_and_inputs():
    found = EXPLAINER.gas(FIGURES.gases[-1])
    names = {name for name, _, _ in found.inputs}
    assert {"pH", "PaCO2", "PaO2", "FiO2", "P/F"} <= names
    assert "P/F = PaO2 / FiO2" in found.rules
    assert all(when == "04:20" for _, _, when in found.inputs)


def test_a_score_says_what_is_missing_and_that_it_is_outside_its_population():
    found = EXPLAINER.score("hacor", FIGURES.scores["hacor"])
    assert any("never as normal" in n for n in found.notes)
    assert "outside the population" in found.population
    assert found.formula
    assert found.source.startswith("Duan")
    assert ("pH", "7.22, 4 points", "28-Mar-2026 04:20") in found.inputs


def test_due_items_and_levers():
    due = EXPLAINER.due(FIGURES.due[0])
    assert any("04:50" in r and "05:20" in r for r in due.rules)
    assert any("qualified person" in n for n in EXPLAINER.lever(FIGURES.levers[0]).notes)


def test_doubtful_sources_say_so():
    assert "confirm locally" in sure_words("from memory")
    assert "no source" in sure_words("common practice")
