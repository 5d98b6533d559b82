"""A short random walk through the window: the long ones are in tests/soak."""

from tests.support.random_walk import retold, walk

SEED, STEPS = 5, 60


def test_a_short_random_walk_ends_well() -> None:
    walked = walk(SEED, STEPS)
    assert walked.code == 0, retold(walked, SEED, STEPS)
    assert f"{STEPS} steps" in walked.said
