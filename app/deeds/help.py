"""Help, the list of actions, About."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.deeds.doer import Doer

if TYPE_CHECKING:
    from app.keeping.problem_report import Open


class HelpDeeds(Doer):
    """Serves the menu Help."""

    def do_help(self) -> None:
        """Keys, the strip's words, what the shapes mean."""
        from app.window.help_dialog import HelpDialog

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

    def do_report_problem(self) -> None:
        """A report to be read, then saved or copied."""
        from app.dialogs.problem_report import ProblemReportDialog
        from app.keeping.log_file import default_folder
        from app.keeping.problem_report import report

        window = self.window
        size = (window.width(), window.height())
        text = report(window.preferences, self._open_store(), default_folder(), size)
        ProblemReportDialog(text, window.theme, window).open()

    def _open_store(self) -> Open | None:
        """What is told of the open store."""
        from app.keeping.problem_report import Open

        window = self.window
        if window.model is None or window.feed is None or window.pages is None:
            return None
        session = window.model.session
        return Open(len(window.feed.answers), session.head, session.read_only, session.is_demo, not session.is_live,
                    window.pages.name, tuple(n.key for n in session.notices))  # fmt: skip

    def do_about(self) -> None:
        """What this is, and its cautions."""
        from app.window.about import AboutDialog

        AboutDialog(self.window.theme, self.window).open()
