"""`luffmark backup FILE`: a consistent copy while others go on working."""

from __future__ import annotations

import argparse
import sys
from typing import Any

from app.commands.context import Context
from app.operations import backup as operations
from app.words import sentence


def run(context: Context, args: argparse.Namespace) -> int:
    """Write the backup; an existing file is never overwritten."""
    with context.open(check=False) as store:
        made = operations.write(store, context.by, context.now(), args.file).value
    key_file = None if made.key_file is None else str(made.key_file)
    value: dict[str, Any] = {
        "backup": str(made.path),
        "key_file": key_file,
        "bytes": made.size,
        "head": made.printed_head,
    }
    both = f" It opens only with its key file: keep {made.key_file} beside it." if key_file else ""
    if not made.damage:
        context.answer(f"Backup {made.path}, {made.size:,} bytes, head {made.printed_head}.{both}", value)
        return 0
    value |= {"damage": [sentence(m, context.reader()) for m in made.damage]}
    context.answer(f"Backup {made.path} holds the damage of the store. Keep it, and every backup made before.{both}",
                   value)  # fmt: skip
    print(f"luffmark: {sentence(made.damage[0], context.reader())} restore refuses this copy, salvage reads it.",
          file=sys.stderr)  # fmt: skip
    return 1
