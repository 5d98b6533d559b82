"""`luffmark archive list|write|remove|retention`: what becomes of episodes that have ended."""

from __future__ import annotations

import argparse
from pathlib import Path

from app.commands.context import Context
from app.look.formats import counted, day
from app.operations import archive as operations
from app.words import sentence
from core.record.instant import iso
from core.record.message import refuse
from storage.backup_rotation import YEAR


def run(context: Context, args: argparse.Namespace) -> int:
    """Do it. Removing asks for a ward lead where people sign in."""
    if args.what == "list":
        return _list(context)
    with context.open() as store:
        who, now = context.by, context.now()
        if args.what == "write":
            path, *episodes = args.subjects or [""]
            request = operations.ArchiveRequest(Path(path), tuple(episodes))
            made = operations.write(store, who, now, request).value
            parts = (counted(len(made.episodes), "episode", "episodes"), counted(made.entries, "entry", "entries"),
                     counted(made.samples, "device sample", "device samples"))  # fmt: skip
            text = f"{path}: {', '.join(parts)}."
        elif args.what == "retention":
            days = args.subjects[0] if args.subjects else ""
            if not days.isdigit():
                raise refuse("archive.bad_retention", value=days, accepted=36_525)
            operations.set_retention(store, who, now, int(days))
            text = f"Ended episodes are kept for {days} days at least."
        else:
            removed = operations.remove(store, who, now, tuple(args.subjects)).value
            gone = day(now + YEAR, context.local_zone())
            lines = [sentence(m, context.reader()) for m in operations.told(removed)]
            text = "\n".join([*lines, f"The last backup that holds them expires by {gone}."])
    context.answer(text, {"done": args.what, "subjects": args.subjects})
    return 0


def _list(context: Context) -> int:
    with context.open(read_only=True) as store:
        found = operations.listed(store, context.by, context.now(), None).value
    zone = context.local_zone()
    kept = f"kept for {found.days} days" if found.days is not None else "no retention time is set"
    lines = [f"Ended episodes: {len(found.episodes)}, {kept}."]
    for e in found.episodes:
        until = f", may be removed from {day(e.removable_from, zone)}" if e.removable_from is not None else ""
        lines.append(f"  {e.episode}  ended {day(e.ended_at, zone)}{until}")
    value = {"retention_days": found.days, "episodes": [
        {"episode": e.episode, "ended_at": iso(e.ended_at),
         "removable_from": iso(e.removable_from) if e.removable_from is not None else None}
        for e in found.episodes]}  # fmt: skip
    context.answer("\n".join(lines), value)
    return 0
