"""`luffmark correct EPISODE [ENTRY] ...`: correct, withdraw or move an entry, or list those that count.

A value of a gas takes the rest of its gas along, unless `--only`.
"""

from __future__ import annotations

import argparse
import sys
from collections.abc import Mapping, Sequence

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
from core.record.line_time import moment_near
from core.record.local_time import zoned_iso
from core.record.message import refuse
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
        request = _request(args, entry_id, _typed_value(context, args.value, record, entry_id))
        asked = correction.correction_questions(store, context.by, context.now(), request).value
        if asked and not args.yes and args.reason.strip():
            told = plain(" ".join(sentence(m, reader) for m in asked))
            print(f"luffmark: not recorded. {told} Answer yes with --yes.", file=sys.stderr)
            return 1
        outcome = _supersede(context, store, request)
        touched = {args.episode, outcome.value.episode}
        flags.keep_transitions(store, context.by, context.now(), sorted(touched))
    made = outcome.value
    by_id = {s.entry.id: s.entry for s in record.standing}
    pairs = sorted(((by_id[e.replaces], e) for e in made.entries), key=lambda pair: pair[0].id != entry_id)
    facts = [{"old": _facts(old, reader), "new": None if args.withdraw else _facts(new, reader)}
             for old, new in pairs]  # fmt: skip
    value = {"episode": made.episode, "ids": list(made.ids), "head": outcome.head, **facts[0], "with": facts[1:]}
    context.answer(_done(pairs, made, reader), value)
    return 0


def _done(pairs: Sequence[tuple[Entry, NewEntry]], made: Recorded, reader: Reader) -> str:
    """What stood and what stands now, each with its moment where that changed; the rest of a gas by its values."""
    old, new = pairs[0]
    then, is_then = wall(old.at, reader.zone), wall(new.at, reader.zone)
    name = CHANNELS[old.channel].name
    told = ", ".join(f"{CHANNELS[e.channel].name} {_value(e, reader)}".rstrip() for e, _ in pairs)
    if new.action is Action.WITHDRAW:
        return f"Withdrawn in {old.episode}: {told} of {then}."
    if new.action is Action.MOVE:
        return f"Moved from {old.episode} to {made.episode}: {told} of {then}."
    if new.at == old.at:
        return f"Corrected in {made.episode}: {name} of {then}, {_value(old, reader)} to {_value(new, reader)}."
    if len(pairs) == 1:
        return (f"Corrected in {made.episode}: {name} {_value(old, reader)} of {then} to {_value(new, reader)} of "
                f"{is_then}.")  # fmt: skip
    right = ", ".join(f"{CHANNELS[e.channel].name} {_value(e, reader)}".rstrip() for _, e in pairs)
    return f"Corrected in {made.episode}: {told} of {then} to {right} of {is_then}."


def _facts(e: NewEntry, reader: Reader) -> dict[str, object]:
    return {"at": zoned_iso(e.at, reader.zone), "channel": e.channel, "unit": CHANNELS[e.channel].unit,
            "value": e.number if e.words is None else e.words}  # fmt: skip


def _supersede(context: Context, store: Store, request: correction.Request) -> Outcome[Recorded]:
    now, who = context.now(), context.by
    if isinstance(request, correction.WithdrawalRequest):
        return correction.withdraw(store, who, now, request)
    if isinstance(request, correction.MoveRequest):
        return correction.move(store, who, now, request)
    return correction.correct(store, who, now, request)


def _typed_value(context: Context, text: str | None, record: Episode, entry_id: str) -> str | None:
    """The value as typed; a moment by the wall's clock as ISO 8601.

    Raises:
        RecordError: `line.time_form`, `time.*`: what is wrong with a moment.
    """
    old = next(s.entry for s in record.standing if s.entry.id == entry_id)
    if not text or CHANNELS[old.channel].kind is not Kind.INSTANT or old.number is None:
        return text
    zone = context.local_zone()
    return zoned_iso(moment_near(text, int(old.number), context.now(), zone), zone)


def _request(args: argparse.Namespace, entry_id: str, value: str | None) -> correction.Request:
    more = {"confirmed": args.yes, "alone": args.only}
    if args.withdraw:
        return correction.WithdrawalRequest(args.episode, entry_id, args.reason, **more)
    if args.move_to is not None:
        return correction.MoveRequest(args.episode, entry_id, args.move_to, args.reason, **more)
    return correction.CorrectionRequest(args.episode, entry_id, args.reason, value, args.unit, args.at, **more)


def _whole_id(record: Episode, start: str) -> str:
    """The one entry whose id begins so.

    Raises:
        RecordError: `correction.unknown_entry`, `correction.many_entries`.
    """
    found = [s.entry.id for s in record.standing if s.entry.id.startswith(start)]
    if len(found) > 1:
        raise refuse("correction.many_entries", entry=start, count=len(found), accepted="more letters of the id")
    if not found:
        raise refuse(
            "correction.unknown_entry", entry=start, accepted=f"an id that 'luffmark correct {record.key}' lists"
        )
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
