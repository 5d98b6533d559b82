"""`luffmark correct EPISODE --leave-out|--move-by ... --span FROM TO`: device samples that do not count, or that were
taken at another time."""

from __future__ import annotations

import argparse
import sys

from app.commands.context import Context
from app.operations import device_span as operations
from app.operations import flag as flags


def run(context: Context, args: argparse.Namespace) -> int:
    """Record it; the samples stay in the ledger."""
    if args.span is None or args.entry is not None:
        print("luffmark: say which device samples: --span FROM TO, and no entry", file=sys.stderr)
        return 2
    names, _, moved = (args.leave_out or args.move_by).partition(":")
    minutes = _minutes(moved) if args.move_by is not None else 0.0
    if minutes is None or (args.leave_out is not None and moved):
        print("luffmark: say by how many minutes: --move-by leak,vte:-60", file=sys.stderr)
        return 2
    channels = tuple(name.strip() for name in names.split(",") if name.strip())
    start, end = args.span
    request = operations.SpanRequest(args.episode, channels, start, end, args.reason, minutes)
    with context.open() as store:
        count = operations.counted(store, context.by, context.now(), request).value
        outcome = operations.record(store, context.by, context.now(), request)
        flags.keep_transitions(store, context.by, context.now(), [args.episode])
    done = f"moved by {minutes:g} min" if minutes else "left out"
    value = {"episode": args.episode, "ids": list(outcome.value.ids), "head": outcome.head, "samples": count,
             "channels": list(channels), "minutes": minutes or None}  # fmt: skip
    context.answer(f"{count} samples of {', '.join(channels)} in {args.episode} were {done}.", value)
    return 0


def _minutes(text: str) -> float | None:
    """How many minutes; None where that is no number, or nothing."""
    try:
        return float(text) or None
    except ValueError:
        return None
