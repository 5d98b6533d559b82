"""`luffmark handovers [ID --out FILE]`: the closed handovers, and one of them as it was printed."""

from __future__ import annotations

import argparse
import sys

from app.commands.context import Context
from app.keeping.whole_file import claim, write_whole
from app.look.formats import wall
from app.operations import handover as operations
from core.record.local_time import zoned_iso


def run(context: Context, args: argparse.Namespace) -> int:
    """List them; with an id write its bytes, unchanged."""
    zone = context.local_zone()
    with context.open(read_only=True) as store:
        if args.id is None:
            found = operations.closed_list(store, context.by, context.now(), None).value
            value = [{"id": d.id, "name": d.name, "by": d.by, "recorded_at": zoned_iso(d.recorded_at, zone),
                      "size": d.size, "sha256": d.sha, "seq": d.seq} for d in found]  # fmt: skip
            lines = (f"{d.id}  {wall(d.recorded_at, zone)}  {d.name}" for d in found)
            context.answer("\n".join(lines) or "No handover was closed yet.", {"handovers": value})
            return 0
        if args.out is None:
            print("luffmark: handovers ID needs --out FILE.pdf", file=sys.stderr)
            return 2
        claim(args.out, replace=args.replace)
        data = operations.closed(store, context.by, context.now(), args.id).value
    write_whole(args.out, data)
    told = {"file": str(args.out), "id": args.id, "size": len(data)}
    context.answer(f"{args.out}: {len(data):,} bytes, as printed.", told)
    return 0
