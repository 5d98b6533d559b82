"""`luffmark channels [WORD]`: what a line, a file or a mapping may name, with unit, limits or choices."""

from __future__ import annotations

import argparse
from collections.abc import Mapping

from app.commands.context import Context
from core.record.channels import CHANNELS, channel
from storage.export.data_dictionary import rows

_OF = {"profile": "facts of the patient", "setting": "settings", "vital": "vital signs", "gas": "blood gas",
       "device": "from the device", "event": "events"}  # fmt: skip


def run(context: Context, args: argparse.Namespace) -> int:
    """Print the channels by group; with a word, those whose key, name or choices hold it."""
    found = [r for r in rows() if _holds(r, args.word.casefold())]
    if not found:
        channel(args.word)  # refuses, with the channels that are near
    lines: list[str] = []
    for group, title in _OF.items():
        members = [r for r in found if r["group"] == group]
        if members:
            lines += ["", f"{title}:", *(f"  {_line(r)}" for r in members)]
    context.answer("\n".join(lines[1:]), {"channels": found})
    return 0


def _holds(row: Mapping[str, str], word: str) -> bool:
    words = (row["channel"], row["channel"].replace("_", " "), row["name"].casefold(), row["choices"].casefold(),
             *CHANNELS[row["channel"]].short)  # fmt: skip
    return any(word in w for w in words)


def _line(row: Mapping[str, str]) -> str:
    limits = f"{float(row['hard_low']):g} to {float(row['hard_high']):g} {row['unit']}" if row["hard_low"] else ""
    others = [u.name for u in CHANNELS[row["channel"]].units[1:]]
    limits += f", or in {' or '.join(others)}" if others else ""
    kinds = {
        "text": "words",
        "instant": "a time, ISO 8601 with offset in a file",
        "mark": "it happened; words if any",
    }
    takes = limits or row["choices"] or kinds[row["kind"]]
    return f"{row['channel']:22}{row['name']}: {takes}".rstrip()
