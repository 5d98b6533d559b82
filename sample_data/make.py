"""`python -m sample_data.make [FOLDER]` writes the night's files again, byte for byte the same."""

from __future__ import annotations

import json
import sys
from dataclasses import asdict
from datetime import timedelta
from pathlib import Path

from sample_data import night_folder
from sample_data.cohort import SimulatedEpisode
from sample_data.night_shift import INVENTED, Bed, simulate_night
from sample_data.write_csv import device_text, notes_text


def night_files() -> dict[str, str]:
    """Every file of the night by name."""
    night = simulate_night()
    made = {"notes.csv": notes_text(night)}
    made |= {f"device-{bed.key}.csv": device_text(bed, episode) for bed, episode in night}
    made["truth.json"] = (
        json.dumps({"about": INVENTED, "episodes": [_truth(b, e) for b, e in night]}, indent=1) + "\n"
    )
    return made


def _truth(bed: Bed, episode: SimulatedEpisode) -> dict[str, object]:
    facts = asdict(episode.truth)
    for name in ("responded_at", "gain_lost_at", "failed_at", "leak_from"):
        if facts[name] is not None:
            facts[name] = (bed.started + timedelta(minutes=facts[name])).isoformat(timespec="seconds")
    return {
        "episode": bed.key,
        "kind": bed.kind,
        "started_at": bed.started.isoformat(timespec="seconds"),
        **facts,
    }


def main(arguments: list[str]) -> int:
    """Write the files; returns 0."""
    folder = Path(arguments[0]) if arguments else night_folder()
    folder.mkdir(parents=True, exist_ok=True)
    for name, text in night_files().items():
        (folder / name).write_bytes(text.encode("utf-8"))
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
