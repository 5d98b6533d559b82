"""Paired pH and PaCO2 of eight subjects, taken in by a mapping: their correlation within subjects is -0.507.

Source: Bland JM, Altman DG. Calculating correlation coefficients with repeated observations: part 1, correlation
within subjects. BMJ 1995;310:446 (r = -0.51, P = 0.001); data as shipped with pingouin (`rm_corr`, 47 rows, unchanged
in `paired_gases_1995.csv`), which prints r = -0.507. The data have no times: the test adds invented ones.

pH is intramural there: two values lie below 6.5, which no arterial blood can have, and are refused by their lines.
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QApplication

from app.cli import main
from core.record.instant import MINUTE, iso, parse
from storage.intake.batch import take_in
from storage.intake.findings import Intake
from storage.intake.mapping import Mapping, open_questions
from storage.intake.proposals import propose
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.store import Store

SOURCE = Path(__file__).parent / "paired_gases_1995.csv"
START = parse("2026-03-01T00:00:00Z")
NOW = parse("2026-03-28T02:00:00Z")


def table(folder: Path) -> Path:
    rows = list(csv.reader(SOURCE.read_text().splitlines()))
    assert len(rows) == 48
    timed = [["At", *rows[0]], *([iso(START + n * MINUTE), *row] for n, row in enumerate(rows[1:]))]
    path = folder / "gases.csv"
    path.write_text("\n".join(map(",".join, timed)) + "\n")
    return path


def mapping_of(path: Path) -> Mapping:
    proposal = propose(open_table(path))
    assert proposal.mapping.episode_column == "Subject"
    mapping = proposal.mapping.with_column("PacO2", "paco2", "")
    asked = open_questions(mapping, episode_given=False, has_offsets=True)
    assert [m.key for m in asked] == ["mapping.unit"], "the unit of a pressure is asked"
    return mapping.with_column("PacO2", "paco2", "kPa")


def within_subjects(subject: np.ndarray, x: np.ndarray, y: np.ndarray) -> float:
    """Correlation of deviations from each subject's mean: what analysis of covariance gives (Bland and Altman)."""
    for s in np.unique(subject):
        x = np.where(subject == s, x - x[subject == s].mean(), x)
        y = np.where(subject == s, y - y[subject == s].mean(), y)
    return float((x * y).sum() / np.sqrt((x * x).sum() * (y * y).sum()))


@pytest.fixture
def intake(tmp_path: Path) -> Intake:
    path = table(tmp_path)
    return read_table(path, mapping_of(path), now=NOW)


def test_values_past_a_hard_limit_are_refused_and_every_other_is_taken(intake: Intake) -> None:
    assert [(r.line, r.column, r.value) for r in intake.refusals] == [(4, "pH", "6.43"), (5, "pH", "6.33")]
    assert len([d for d in intake.entries if d.entry.channel == "ph"]) == 45
    assert len([d for d in intake.entries if d.entry.channel == "paco2"]) == 47
    assert intake.episodes == tuple("12345678")


def test_correlation_within_subjects(intake: Intake) -> None:
    read = {(d.entry.episode, d.entry.at, d.entry.channel): float(d.entry.raw) for d in intake.entries}
    refused = {START + (r.line - 2) * MINUTE: float(r.value) for r in intake.refusals}
    keys = [(episode, at) for episode, at, channel in read if channel == "paco2"]
    ph = np.array([read.get((e, at, "ph"), refused.get(at, np.nan)) for e, at in keys])
    paco2 = np.array([read[(e, at, "paco2")] for e, at in keys])
    subject = np.array([int(e) for e, _ in keys])
    assert within_subjects(subject, ph, paco2) == pytest.approx(-0.507, abs=0.0005)


def test_they_can_be_plotted(intake: Intake, tmp_path: Path, qapp: QApplication) -> None:
    path, picture = tmp_path / "ward.luffmark", tmp_path / "subject-3.png"
    with Store.create(path, now=NOW) as store:
        take_in(store, intake, by="AB", now=NOW, without_refused=True)
        gases = store.episode("3").gases
    assert len(gases) == 9
    assert all(g.ph > 6.5 and g.paco2 > 20 for g in gases)
    moments = ("--as-of", iso(START + 60 * MINUTE))
    assert main(["--store", str(path), "picture", "3", "--out", str(picture), *moments]) == 0
    image = QImage(str(picture))
    assert len({image.pixel(x, y) for x in range(0, image.width(), 3) for y in range(0, image.height(), 3)}) > 20
