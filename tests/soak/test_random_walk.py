"""Random walks through the window: keys, mouse, menus, dialogs, locks, other programs, stores that come and go.

Run with `python -m pytest -m soak tests/soak/test_random_walk.py`. `LUFF_WALKS`, `LUFF_WALK_STEPS` and
`LUFF_WALK_FROM` say how many, how long and from which seed. A walk that fails says how to walk it again.
"""

from __future__ import annotations

import os

import pytest

from tests.support.random_walk import retold, walk

pytestmark = [pytest.mark.soak, pytest.mark.timeout(3600)]
FIRST = int(os.environ.get("LUFF_WALK_FROM", "1"))
SEEDS = range(FIRST, FIRST + int(os.environ.get("LUFF_WALKS", "6")))
STEPS = int(os.environ.get("LUFF_WALK_STEPS", "300"))


HOW = {
    "usual": (),
    "garbage collected all the time": ("--harsh",),
    "slow": ("--slow",),
    "both": ("--harsh", "--slow"),
}


@pytest.mark.parametrize("how", HOW.values(), ids=HOW.keys())
@pytest.mark.parametrize("seed", SEEDS)
def test_nothing_goes_wrong_whatever_is_done(seed: int, how: tuple[str, ...]) -> None:
    walked = walk(seed, STEPS, *how)
    assert walked.code == 0, retold(walked, seed, STEPS, *how)
