"""How quiet a quiet patient is: flags per stable episode-hour of the sample night, as they would have been raised."""

from collections import Counter

import pytest

from core.figures.replay import PastEpisode, ReplayedFlag, replay_episode
from core.judgement.flags import TIERS
from core.judgement.policy import shipped_policy
from core.record.instant import HOUR
from tests.support.night_check import END, device_samples, night, truth


def news(flags: list[ReplayedFlag]) -> list[ReplayedFlag]:
    """The flags that a person sees come up: no other of their group, as strong or stronger, stands already."""

    def stands(other: ReplayedFlag, flag: ReplayedFlag) -> bool:
        earlier = (other.raised_at, TIERS.index(other.tier), other.marker) < (
            flag.raised_at, TIERS.index(flag.tier), flag.marker)  # fmt: skip
        as_strong = TIERS.index(other.tier) <= TIERS.index(flag.tier)
        lasts = other.ended_at is None or other.ended_at > flag.raised_at
        return other.group == flag.group and earlier and as_strong and lasts

    return [f for f in flags if not any(stands(other, f) for other in flags)]


@pytest.mark.bench
def test_flags_per_stable_episode_hour(capsys):
    policy, tiers, seen, markers, hours = shipped_policy(), Counter(), Counter(), Counter(), 0.0
    for key, known in truth().items():
        if known["failed"]:
            continue
        episode = night()[key]
        entries = sorted((s.entry for s in episode.standing), key=lambda e: (e.recorded_at, e.seq))
        flags = list(replay_episode(PastEpisode(key, tuple(entries), tuple(device_samples(key))), policy))
        hours += (END - (episode.first_at or END)) / HOUR
        tiers.update(f.tier for f in flags)
        seen.update(f.tier for f in news(flags))
        markers.update(f.marker for f in flags)
    with capsys.disabled():
        print(f"\n{hours:.0f} stable episode-hours")
        for tier, count in tiers.most_common():
            came_up = seen[tier]
            print(f"  {tier}: {count} flags, {count / hours:.2f} an hour; {came_up} came up in their group, "
                  f"{came_up / hours:.2f} an hour, one in {hours / max(came_up, 1):.1f} h")  # fmt: skip
        print("  " + ", ".join(f"{m} {n}" for m, n in markers.most_common(12)))
    assert tiers["escalate"] == 0
    assert seen["concern"] / hours <= 0.25  # one in four hours for each bed, at most
