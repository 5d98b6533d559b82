"""`luffmark` alone: the window, on the store named or the user's own."""

from __future__ import annotations

import argparse

from app.commands.context import Context


def run(context: Context, args: argparse.Namespace) -> int:
    """Open the window; the first page where there is no store yet. Ends when it is closed."""
    from app.start import run_window

    there = context.store_given or context.store_path.exists()
    by = getattr(args, "by", "") or ""
    return run_window(context.store_path if there else None, context.passphrase(), by)
