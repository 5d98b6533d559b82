"""`luffmark demo`: the window on the sample shift, in a throw-away store, at a pretended moment."""

from __future__ import annotations

import argparse

from app.commands.context import Context


def run(context: Context, args: argparse.Namespace) -> int:
    """Open it; what is entered is gone when the window closes."""
    from app.window.start import run_demo

    return run_demo()
