"""`luffmark screens --out FOLDER`: every screen of the window as a picture."""

from __future__ import annotations

import argparse

from app.commands.context import Context


def run(context: Context, args: argparse.Namespace) -> int:
    """Draw them off-screen, from the sample shift unless --store names another."""
    from app.look.off_screen import gui_application

    with gui_application():
        from app.window.screens import draw_all

        store = context.store_path if context.store_given else None
        made = draw_all(args.out, store, passphrase=context.passphrase())
    context.answer("\n".join(str(p) for p in made), {"pictures": [str(p) for p in made]})
    return 0
