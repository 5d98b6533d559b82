"""`luffmark correct EPISODE [ENTRY] ...`: correct, withdraw or move an entry, or list those that count."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Mapping

from app.commands.context import Context
from app.look.formats import plain, quantity, wall
from app.operations import correction, intake
from app.operations import episode as episodes
from app.operations import flag as flags
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.words import Reader, sentence
from core.record.channels import CHANNELS, Kind
from core.record.entries import Action, Entry, NewEntry
from core.record.episode import Episode
from core.record.local_time import zoned_iso
from core.record.message import Message, refuse
from storage.store import Store

SHORT_ID = 8


def run(context: Context, args: argparse.Namespace) -> int:
    """Supersede one entry with a reason, or list the episode's entries."""
    if args.leave_out is not None or args.move_by is not None:
        from app.commands import device_span

        return device_span.run(context, args)
    reader = context.reader()
    wanted = sum((args.value is not None or args.at is not None, args.withdraw, args.move_to is not None))
    if args.entry is not None and wanted != 1:
        print("luffmark: say what is right: --value (with --unit) and/or --at, or --withdraw, or --move-to EPISODE",
              file=sys.stderr)  # fmt: skip
        return 2
    with context.open(read_only=args.entry is None) as store:
        record = episodes.load(store, args.episode)
        if args.entry is None:
            return _list(context, record, reader, intake.origins(store, context.by, context.now(), record.key).value)
        entry_id = _whole_id(record, args.entry)
        old = next(s.entry for s in record.standing if s.entry.id == entry_id)
        asked = _questions(context, store, args, entry_id)
        if asked and not args.yes and args.reason.strip():
            told = plain(" ".join(sentence(m, reader) for m in asked))
            print(f"luffmark: not recorded. {told} Answer yes with --yes.", file=sys.stderr)
            return 1
        outcome = _supersede(context, store, args, entry_id)
        touched = {args.episode, outcome.value.episode}
        flags.keep_transitions(store, context.by, context.now(), sorted(touched))
    made = outcome.value
    value = {"episode": made.episode, "ids": list(made.ids), "head": outcome.head, "old": _facts(old, reader),
             "new": None if args.withdraw else _facts(made.entries[0], reader)}  # fmt: skip
    context.answer(_done(old, made, reader), value)
    return 0


def _done(old: Entry, made: Recorded, reader: Reader) -> str:
    """What stood and what stands now, each with its moment where that changed."""
    new = made.entries[0]
    name, was, then = CHANNELS[old.channel].name, _value(old, reader), wall(old.at, reader.zone)
    if new.action is Action.WITHDRAW:
        return f"Withdrawn in {old.episode}: {name} {was} of {then}."
    if new.action is Action.MOVE:
        return f"Moved from {old.episode} to {made.episode}: {name} {was} of {then}."
    is_now, at = _value(new, reader), wall(new.at, reader.zone)
    if new.at == old.at:
        return f"Corrected in {made.episode}: {name} of {then}, {was} to {is_now}."
    return f"Corrected in {made.episode}: {name} {was} of {then} to {is_now} of {at}."


def _facts(e: NewEntry, reader: Reader) -> dict[str, object]:
    return {"at": zoned_iso(e.at, reader.zone), "channel": e.channel, "unit": CHANNELS[e.channel].unit,
            "value": e.number if e.words is None else e.words}  # fmt: skip


def _supersede(context: Context, store: Store, args: argparse.Namespace, entry_id: str) -> Outcome[Recorded]:
    now, who = context.now(), context.by
    if args.withdraw:
        withdrawal = correction.WithdrawalRequest(args.episode, entry_id, args.reason)
        return correction.withdraw(store, who, now, withdrawal)
    if args.move_to is not None:
        move = correction.MoveRequest(args.episode, entry_id, args.move_to, args.reason)
        return correction.move(store, who, now, move)
    return correction.correct(store, who, now, _right(args, entry_id))


def _right(args: argparse.Namespace, entry_id: str) -> correction.CorrectionRequest:
    return correction.CorrectionRequest(args.episode, entry_id, args.reason, args.value, args.unit, args.at, args.yes)


def _questions(context: Context, store: Store, args: argparse.Namespace, entry_id: str) -> tuple[Message, ...]:
    """What the right value or time raises; a withdrawal and a move raise nothing."""
    if args.value is None and args.at is None:
        return ()
    request = _right(args, entry_id)
    return correction.correction_questions(store, context.by, context.now(), request).value


def _whole_id(record: Episode, start: str) -> str:
    """The one entry whose id begins so.

    Raises:
        RecordError: `correction.unknown_entry`, `correction.many_entries`.
    """
    found = [s.entry.id for s in record.standing if s.entry.id.startswith(start)]
    if len(found) > 1:
        raise refuse("correction.many_entries", entry=start, count=len(found), accepted="more letters of the id")
    if not found:
        raise refuse("correction.unknown_entry", entry=start, accepted=f"luffmark correct {record.key} lists them")
    return found[0]


def _list(context: Context, record: Episode, reader: Reader, files: Mapping[str, str]) -> int:
    entries = [s.entry for s in record.standing]
    rows = [f"{e.id[:SHORT_ID]}  {wall(e.at, reader.zone)}  {CHANNELS[e.channel].name}  {_value(e, reader)}  "
            + ", ".join(x for x in (e.by, files.get(e.id, "")) if x) for e in entries]  # fmt: skip
    value = {"episode": record.key, "entries": [
        {"id": e.id, "at": zoned_iso(e.at, reader.zone), "channel": e.channel, "value": e.number if e.words is None
         else e.words, "unit": CHANNELS[e.channel].unit, "by": e.by, "file": files.get(e.id)}
        for e in entries]}  # fmt: skip
    context.answer("\n".join(rows) or "No entries.", value)
    return 0


def _value(e: NewEntry, reader: Reader) -> str:
    if CHANNELS[e.channel].kind is Kind.INSTANT and e.number is not None:
        return wall(int(e.number), reader.zone)
    if e.number is None and e.words is None:
        return ""
    return quantity(e.channel, e.words if e.number is None else e.number, reader.gas_unit)
