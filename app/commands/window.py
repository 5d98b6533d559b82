"""`luffmark` alone: the window, on the store named, else the one opened last, else the user's own."""

from __future__ import annotations

import argparse
from pathlib import Path

from app.commands.context import Context


def run(context: Context, args: argparse.Namespace) -> int:
    """Open the window; the first page where there is no store yet. Ends when it is closed."""
    from app.window.start import run_window

    by = getattr(args, "by", "") or ""
    return run_window(_store(context), context.passphrase(), by)


def _store(context: Context) -> Path | None:
    """Which store: after a restore that is the new one, not the damaged one that still lies in the usual place."""
    from app.keeping import preferences as kept

    if context.store_given:
        return context.store_path
    recent = [Path(path) for path in kept.load(kept.default_path()).recent_stores]
    return next((path for path in (*recent, context.store_path) if path.is_file()), None)
