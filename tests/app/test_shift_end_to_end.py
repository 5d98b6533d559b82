"""The main job from outside: the sample shift's files go in by command, and what the simulation knows comes out.

The simulation shares no code with the judgement; its truths stand in `sample_data/night/truth.json`.
"""

import json

import pytest

import sample_data
from app.cli import main


@pytest.fixture(scope="module")
def store(tmp_path_factory):
    path = tmp_path_factory.mktemp("shift") / "ward.luff"
    files = [str(f) for f in sample_data.files()]
    assert main(["--store", str(path), "--by", "AB", "intake", *files]) == 0
    return path


@pytest.fixture
def figures(store, capsys):
    capsys.readouterr()
    assert main(["--store", str(store), "--json", "figures", "--as-of", sample_data.DEMO_CLOCK]) == 0
    return {e["episode"]: e for e in json.loads(capsys.readouterr().out)["episodes"]}


@pytest.fixture(scope="module")
def truths():
    told = json.loads((sample_data.night_folder() / "truth.json").read_text("utf-8"))["episodes"]
    return {t["episode"]: t for t in told}


def standing(episode, tier=None):
    return {f["marker"] for f in episode["flags"] if f["ended_at"] is None and tier in (None, f["tier"])}


def test_every_episode_comes_out(figures, truths):
    assert figures.keys() == truths.keys()


def test_those_who_fail_escalate_and_nobody_else_does(figures, truths):
    failed = {e for e, t in truths.items() if t["failed"]}
    assert {e for e, f in figures.items() if standing(f, "escalate")} == failed
    assert len(failed) == 2


def test_the_first_to_be_seen_are_those_who_fail(figures, truths):
    assert all(truths[e]["failed"] for e in list(figures)[:2])


def test_those_who_responded_are_better_by_a_gas(figures, truths):
    kinds = {"prompt_responder", "slow_responder", "obesity_hypoventilation", "kpa_ward", "pulmonary_oedema"}
    for e, truth in truths.items():
        if truth["responded"] and not truth["failed"] and truth["kind"] in kinds:
            verdicts = {g["verdict"] for r in figures[e]["responses"] for g in r["gases"]}
            since = {g["since_start"]["verdict"] for r in figures[e]["responses"] for g in r["gases"]}
            assert "better" in verdicts | since, e


def test_what_each_episode_is_there_to_show_is_shown(figures, truths):
    by_kind = {t["kind"]: figures[e] for e, t in truths.items()}
    assert standing(by_kind["large_leak"]) & {"leak_over_limit", "leak_large"}
    overdue = {d["what"] for d in by_kind["overdue_gas"]["due"] if d["state"] == "overdue"}
    assert "repeat_gas" in overdue  # the last gas was not better: one gas serves it and the change
    assert by_kind["hypoxaemic_failure"]["ratios"]["pf"]["slope_mmHg_per_h"] < 0
    assert by_kind["already_running"]["support"]["since"] is None
    assert by_kind["already_running"]["support"]["since_reason"]["key"] == "support.start_not_recorded"
    assert by_kind["kpa_ward"]["support"]["fio2"] is None
    assert by_kind["kpa_ward"]["gases"][0]["paco2_text"].endswith("kPa")
    assert by_kind["pulmonary_oedema"]["support"]["mode"] == "CPAP"
    assert by_kind["weaning"]["support"]["hours_on_mask"] < 8


def test_a_repeated_intake_takes_nothing_twice(store, capsys):
    assert main(["--store", str(store), "--json", "intake", *(str(f) for f in sample_data.files())]) == 0
    capsys.readouterr()
    assert main(["--store", str(store), "verify"]) == 0


def test_the_handover_names_every_patient(store, tmp_path):
    from pypdf import PdfReader

    out = tmp_path / "handover.pdf"
    span = ["--from", "2026-03-27T19:30:00+00:00", "--to", sample_data.DEMO_CLOCK]
    assert main(["--store", str(store), "handover", *span, "--out", str(out)]) == 0
    pages = [" ".join(page.extract_text().split()) for page in PdfReader(out).pages]
    assert len(pages) == 13
    for label in ("Bed 4", "Bay A 1", "Emergency 3"):
        assert label in pages[0]
        assert any(label in page for page in pages[1:])
    assert all("never replaces clinical judgement" in page for page in pages)
