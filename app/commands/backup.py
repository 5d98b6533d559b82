"""`luffmark backup FILE`: a consistent copy while others go on working."""

from __future__ import annotations

import argparse

from app.commands.context import Context
from app.operations import backup as operations


def run(context: Context, args: argparse.Namespace) -> int:
    """Write the backup; an existing file is never overwritten."""
    with context.open() as store:
        made = operations.write(store, context.by, context.now(), args.file).value
    value = {"backup": str(made.path), "bytes": made.size, "head": made.printed_head}
    context.answer(f"Backup {made.path}, {made.size:,} bytes, head {made.printed_head}.", value)
    return 0
