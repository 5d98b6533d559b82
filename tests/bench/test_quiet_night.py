"""How quiet a quiet patient is: flags per stable episode-hour of the sample night, as they would have been raised."""

from collections import Counter

import pytest

from core.figures.replay import PastEpisode, replay_episode
from core.judgement.policy import shipped_policy
from core.record.instant import HOUR
from tests.support.night_check import END, device_samples, night, truth


@pytest.mark.bench
def test_flags_per_stable_episode_hour(capsys):
    policy, tiers, markers, hours = shipped_policy(), Counter(), Counter(), 0.0
    for key, known in truth().items():
        if known["failed"]:
            continue
        episode = night()[key]
        entries = sorted((s.entry for s in episode.standing), key=lambda e: (e.recorded_at, e.seq))
        flags = list(replay_episode(PastEpisode(key, tuple(entries), tuple(device_samples(key))), policy))
        hours += (END - (episode.first_at or END)) / HOUR
        tiers.update(f.tier for f in flags)
        markers.update(f.marker for f in flags)
    with capsys.disabled():
        print(f"\n{hours:.0f} stable episode-hours")
        for tier, count in tiers.most_common():
            print(f"  {tier}: {count} flags, {count / hours:.2f} an hour, one in {hours / count:.1f} h")
        print("  " + ", ".join(f"{m} {n}" for m, n in markers.most_common(12)))
    assert tiers["escalate"] == 0
