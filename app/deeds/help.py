"""Help, the list of actions, About."""

from __future__ import annotations

from app.deeds.doer import Doer


class HelpDeeds(Doer):
    """Serves the menu Help."""

    def do_help(self) -> None:
        """Keys, the strip's words, what the shapes mean."""
        from app.help_dialog import HelpDialog

        HelpDialog(self.window.theme, self.window).open()

    def do_find_action(self) -> None:
        """Search the actions; do the one that is chosen."""
        from app.dialogs.action_finder import ActionFinder

        finder = ActionFinder(self.window.actions_by_key, self.window.theme, self.window)
        finder.exec()
        chosen = finder.chosen
        finder.deleteLater()
        if chosen is not None:
            chosen.trigger()

    def do_about(self) -> None:
        """What this is, and its cautions."""
        from app.about import AboutDialog

        AboutDialog(self.window.theme, self.window).open()
