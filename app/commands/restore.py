"""`luffmark restore FILE`: a new store of a backup, checked before it is called done."""

from __future__ import annotations

import argparse

from app.commands.context import Context
from app.operations import backup as operations


def run(context: Context, args: argparse.Namespace) -> int:
    """Make the store named by --store (or the default one) of a backup; it must not exist yet."""
    context.store_path.parent.mkdir(parents=True, exist_ok=True)
    operations.restore(args.file, context.store_path)
    value = {"store": str(context.store_path), "backup": str(args.file)}
    context.answer(f"Store {context.store_path} made from {args.file}. Check it: luffmark verify", value)
    return 0
