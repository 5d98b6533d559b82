"""`luffmark log EPISODE "LINE"`: one line, as typed in the window."""

from __future__ import annotations

import argparse
import sys
from math import isnan

from app.commands.context import Context
from app.look.formats import plain, quantity, trimmed, wall
from app.operations import entry as operations
from app.operations import flag as flags
from app.words import Reader, sentence
from app.words.template import quantity_name
from core.record.channels import Group, Kind
from core.record.reading import Reading


def run(context: Context, args: argparse.Namespace) -> int:
    """Record the line and say what was recorded. A line that asks something is refused until --yes."""
    request = operations.LineRequest(
        args.episode, args.line, context.local_zone(), args.yes, args.new, context.gas_unit, args.at
    )
    reader = context.reader()
    opened = context.open_or_create() if args.new else context.open()
    with opened as store:
        now = context.now()
        shown = operations.preview(store, context.by, now, request).value
        if shown.questions and not args.yes:
            print(f"luffmark: not recorded. {_asked(shown, reader)} Answer yes with --yes.", file=sys.stderr)
            return 1
        recorded = operations.log_line(store, context.by, now, request)
        flags.keep_transitions(store, context.by, now, [shown.episode])
    value = {
        "episode": shown.episode, "at": wall_iso(shown.line.at, reader.zone), "ids": list(recorded.value.ids),
        "recorded": [{"channel": r.channel.key, "value": r.value, "unit": r.channel.unit}
                     for r in shown.line.readings],
        "notes": [sentence(n, reader) for n in shown.line.notes], "head": recorded.head,
    }  # fmt: skip
    context.answer(described(shown, reader), value)
    return 0


def _asked(shown: operations.Preview, reader: Reader) -> str:
    return plain(" ".join(sentence(q, reader) for q in shown.questions))


def wall_iso(at: int, zone: str) -> str:
    """The moment as ISO 8601 with the zone's offset."""
    from core.record.local_time import zoned_iso

    return zoned_iso(at, zone)


def described(shown: operations.Preview, reader: Reader) -> str:
    """What a line records, with units, and pressure support before and after."""
    parts = [reading_text(r, reader) for r in shown.line.readings]
    whom = shown.label if shown.label == shown.episode else f"{shown.label} ({shown.episode})"
    text = f"{whom}, {wall(shown.line.at, reader.zone)}: " + ", ".join(parts) + "."
    before, after = shown.line.support_before, shown.line.support_after
    if before != after and not isnan(after):
        was = "" if isnan(before) else f" (was {trimmed(before)})"
        text += f" Pressure support {trimmed(after)} cmH2O{was}."
    return " ".join([text, *(sentence(n, reader) for n in shown.line.notes)])


def reading_text(reading: Reading, reader: Reader) -> str:
    """One reading as it will be kept, a gas pressure in the unit it was typed in."""
    channel = reading.channel
    if channel.kind is Kind.MARK:
        return f"{channel.name}: {quantity(channel.key, reading.words)}" if reading.words else channel.name
    if channel.kind is Kind.INSTANT:
        return f"{channel.name} {wall(int(reading.number or 0), reader.zone)}"
    name = _opening(quantity_name(channel.key))
    if channel.group is Group.GAS and channel.unit != "fraction" and reading.number is not None:
        unit = reading.raw_unit if reading.raw_unit != "pH" else ""
        return f"{name} {reading.raw.replace(',', '.')} {unit}".rstrip()  # the precision as typed
    return f"{name} {quantity(channel.key, reading.value, reader.gas_unit)}"


def _opening(name: str) -> str:
    return name if name.startswith("pH") else name[0].upper() + name[1:]
