"""A flag that a late entry undid is not said to be undone by a correction: nobody corrected anything."""

from __future__ import annotations

import re
from pathlib import Path

import app
from app.policy.replay_words import _ended
from app.telling.undone import undone_word
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.figures.replay import ReplayedFlag
from core.judgement.shapes import FlagFigure
from tests.support.log import moment

BY_A_CORRECTION = re.compile(r"""["'][^"']*\bby a correction""")


def test_no_text_says_that_a_correction_undid_a_flag() -> None:
    sources = Path(str(app.__file__)).parent.rglob("*.py")
    assert [p.name for p in sources if BY_A_CORRECTION.search(p.read_text("utf-8"))] == []


def test_lines_and_replay_say_what_may_have_undone_it() -> None:
    gone = FlagFigure(
        "gas_overdue@0", "gas_overdue", "timing", "concern", 0, (), "common practice", "common practice", "",
        ended_at=moment("05:00"), state="no longer met", undone_by_correction=True,
    )  # fmt: skip
    assert FigureLines(Reader()).flag_head(gone).endswith(f", {undone_word()}")
    replayed = ReplayedFlag("A", "x@0", "gas_overdue", "timing", "concern", 0, 0, moment("05:00"), True)
    assert _ended(replayed, Reader()).endswith(f"({undone_word()})")
