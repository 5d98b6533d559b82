"""`luffmark export --out FILE`: what stands, as a log file that intake takes."""

from __future__ import annotations

import argparse

from app.commands.context import Context
from app.operations import export as operations


def run(context: Context, args: argparse.Namespace) -> int:
    """Write the file; an existing one is never overwritten."""
    with context.open(read_only=True) as store:
        request = operations.ExportRequest(args.out, tuple(args.episode))
        rows = operations.write(store, context.by, context.now(), request).value
    context.answer(f"{args.out}: {rows:,} rows.", {"file": str(args.out), "rows": rows})
    return 0
