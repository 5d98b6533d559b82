"""`luffmark restore FILE`: a new store of a backup, checked before it is called done."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app.commands.context import Context
from app.look.formats import as_typed
from app.operations import backup as operations
from app.words import sentence
from core.record.instant import iso

if TYPE_CHECKING:
    from storage.restore_report import Newer, NewerEntry


def run(context: Context, args: argparse.Namespace) -> int:
    """Make the store named by --store (or the default one) of a backup; it must not exist yet."""
    passphrase = context.passphrase()
    context.store_path.parent.mkdir(parents=True, exist_ok=True)
    _prove(context, args.file, passphrase)
    request = operations.RestoreRequest(args.file, context.store_path, passphrase, args.against, proven=True)
    made = operations.restore(None, context.by, context.now(), request).value
    lines = [f"Store {context.store_path} made from {args.file}. Check it: luffmark verify"]
    if made.unchecked is not None:
        lines.append(sentence(made.unchecked))
    lines += newer_lines(made)
    value = {"store": str(context.store_path), "backup": str(args.file), "head": made.printed_head or None,
             "checked": made.unchecked is None,
             "newer_in_old": None if made.newer is None else newer_json(made.newer)}  # fmt: skip
    context.answer("\n".join(lines), value)
    return 0


def _prove(context: Context, backup: Path, passphrase: str | None) -> None:
    """Where people sign in, who restores gives a PIN. A backup that stays closed cannot say who its people are."""
    from storage.looking_into import looked_into

    if not operations.is_encrypted_and_closed(backup, passphrase):
        with looked_into(backup, passphrase, context.store_path) as source:
            context.prove(source)


def newer_lines(made: operations.Restored) -> list[str]:
    """What the old store holds beyond the backup, in words."""
    if made.not_compared is not None:
        return [f"It could not be compared with the old store: {sentence(made.not_compared)}"]
    if made.newer is None:
        return []
    lines = [] if made.same else ["The old store does not continue this backup: their chains differ."]
    if made.newer.damaged:
        lines.append("The old store is damaged and was read as far as it can be: there may be more.")
    if not made.newer.batches:
        return [*lines, "The old store holds nothing beyond this backup."]
    lines.append(f"The old store holds {made.newer.batches} later recording(s), which the new one lacks:")
    for e in made.newer.episodes:
        last = f", last recorded {iso(e.last_recorded)}" if e.last_recorded else ""
        lines.append(f"  {e.episode}: {e.entries} logged, {e.samples} device samples{last}")
        lines += [f"    {entry_line(t)}" for t in e.told]
    if made.newer.others:
        lines.append(f"  and {made.newer.others} documents, policies or sign-ins")
    return lines


def entry_line(entry: NewerEntry) -> str:
    """One entry as it was typed."""
    action = "" if entry.action == "assert" else f" ({entry.action})"
    value = " ".join(part for part in (as_typed(entry.raw, entry.raw_unit), entry.note) if part)
    return f"{iso(entry.at)} {entry.channel} {value}{action}, {entry.by}"


def newer_json(newer: Newer) -> dict[str, Any]:
    """The same, stable for programs."""
    return {"batches": newer.batches, "others": newer.others, "head": newer.head, "damaged": newer.damaged,
            "episodes": [{"episode": e.episode, "entries": e.entries, "samples": e.samples,
                          "last_recorded_at": iso(e.last_recorded) if e.last_recorded else None,
                          "logged": [{"at": iso(t.at), "channel": t.channel, "value": t.raw, "unit": t.raw_unit,
                                      "note": t.note, "by": t.by, "action": t.action} for t in e.told]}
                         for e in newer.episodes]}  # fmt: skip
