"""Tables that are damaged at random read the same the quick way and the slow one: cell by cell, error by error."""

from __future__ import annotations

import random
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from storage.intake import number_columns, table_rows, table_text
from storage.intake.findings import Intake
from storage.intake.mapping import ColumnUse, LongUse, Mapping, TimeUse
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from tests.storage.conftest import NOW

COLUMNS = (ColumnUse("leak", "leak", "L/min"), ColumnUse("vte", "vte", "mL"), ColumnUse("temp", "temp", "degC"),
           ColumnUse("ipap", "ipap", "cmH2O"), ColumnUse("pH", "ph", "pH"))  # fmt: skip
WIDE = Mapping("w", (), COLUMNS, TimeUse("time", order="iso", zone="Europe/Oslo"), decimal=".", written_by="device",
               leak_definition="total", episode_column="who")  # fmt: skip
LONG = Mapping("l", (), (), WIDE.time, LongUse("what", "value", "unit", {"leak": "leak", "vte": "vte", "x": ""}),
               decimal=".", written_by="device", leak_definition="total", episode_column="who")  # fmt: skip
SPICE = (
    "", "-", " ", "n/a", "x", "1e3", "24,5", "999999", "0007", "7.", ".5", "+3", "2026-02-30 01:00:00", '"24"',
    "\t", "2031-01-01 00:00:00", "E2", "\u00e9", "=1", "12.3456789012", "2026-03-28T01:00:00Z", "03:00",
)  # fmt: skip


def wide_row(n: int) -> list[str]:
    at = f"2026-03-27 {n // 60 % 20:02d}:{n % 60:02d}:{n * 7 % 60:02d}"
    return [at, "E1", str(20 + n % 9), f"{430 + n}", f"36.{n % 10}", str(16 + n // 100), f"7.3{n % 10}"]


def long_row(n: int) -> list[str]:
    return [wide_row(n)[0], "E1", ("leak", "vte", "x")[n % 3], str(100 + n), ("L/min", "mL", "")[n % 3]]


def damaged(head: str, row: Callable[[int], list[str]], dice: random.Random) -> str:
    """A table of some hundred rows with a few cells, rows and marks spoilt."""
    rows = [row(n) for n in range(dice.randint(260, 420))]
    for _ in range(dice.randint(0, 12)):
        cells = rows[dice.randrange(len(rows))]
        what = dice.randrange(6)
        if what == 0:
            cells.append(dice.choice(SPICE))
        elif what == 1 and len(cells) > 1:
            cells.pop()
        else:
            cells[dice.randrange(len(cells))] = dice.choice(SPICE)
    if dice.random() < 0.3:
        rows.insert(dice.randrange(len(rows)), [])
    if dice.random() < 0.3:
        dice.shuffle(rows)
    return head + "\n" + "".join(",".join(cells) + "\n" for cells in rows)


def outcome(intake: Intake) -> tuple[Any, ...]:
    """All that reading a file gave."""
    samples = sorted((s.episode, s.channel, s.decimals, s.t.tolist(), np.nan_to_num(s.v, nan=-1).tolist())
                     for s in intake.samples)  # fmt: skip
    entries = [(d.entry.episode, d.entry.channel, d.entry.at, d.entry.raw, d.entry.raw_unit) for d in intake.entries]
    told = [[(f.line, f.column, f.value, f.message.key) for f in found] for found in (intake.refusals, intake.doubts)]
    return intake.whole, intake.refused_rows, told, entries, samples


def slowly(monkeypatch: pytest.MonkeyPatch) -> None:
    """No block is cut at once, no time is read at once, and every text is read by itself."""
    monkeypatch.setattr(table_text, "cut_fields", lambda *_: None)
    none = lambda _f, _d, _c, rows, _u: (np.zeros(rows.size, np.int64), np.zeros(rows.size, np.bool_))  # noqa: E731
    monkeypatch.setattr(table_rows, "read_times", none)
    monkeypatch.setattr(number_columns, "_FEW", 1 << 40)


@pytest.mark.parametrize("kind", ["wide", "long"])
@pytest.mark.parametrize("seed", range(12))
def test_the_quick_way_is_the_slow_way(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, kind: str, seed: int) -> None:
    dice = random.Random(seed)
    head, row, mapping = ("time,who,leak,vte,temp,ipap,pH", wide_row, WIDE)
    if kind == "long":
        head, row, mapping = ("time,who,what,value,unit", long_row, LONG)
    path = tmp_path / "a.csv"
    path.write_text(damaged(head, row, dice), "utf-8")
    quick = outcome(read_table(path, mapping, now=NOW, answers=Answers()))
    assert quick[4], "some of it is read"
    with monkeypatch.context() as slow:
        slowly(slow)
        assert outcome(read_table(path, mapping, now=NOW, answers=Answers())) == quick
