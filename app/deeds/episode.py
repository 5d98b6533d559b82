"""The episode in hand: opening it, going through the others, its panels, moments on its clock."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.deeds.doer import Doer
from app.episode.feed import shipped_titles
from app.episode.panels import PanelSet, shipped, to_json
from app.operations import panel as panel_operations
from app.operations.outcome import Outcome

if TYPE_CHECKING:
    from app.chart.stack import PanelStack
    from app.window.shell import Shell


class EpisodeDeeds(Doer):
    """Serves the menu Episode."""

    def __init__(self, window: Shell) -> None:
        super().__init__(window)
        self._before: dict[str, list[PanelSet]] = {}
        """What was kept before, for each indication or kind, since the window was opened."""

    def do_show_episode(self) -> None:
        """Ribbon, panels, flags, due items and levers of the selected episode."""
        self.window.show_page("episode")

    def do_show_map(self) -> None:
        """The gases of the selected episode on the acid-base map."""
        self.window.show_page("map")

    def do_next_episode(self) -> None:
        """The next in the ward's order."""
        self._step(1)

    def do_previous_episode(self) -> None:
        """The one before it."""
        self._step(-1)

    def _step(self, by: int) -> None:
        keys = self.pages.ward.shown_keys()
        key = self.model.session.selection
        if keys:  # one that a filter hides has no neighbour: the first is next
            self.model.select(keys[(keys.index(key) + by) % len(keys)] if key in keys else keys[0])

    def do_panels(self) -> None:
        """Add, name, fill, order and remove panels."""
        from app.dialogs.panel_editor import PanelEditor

        feed = self.window.episode_feed
        if feed is not None:
            self._editor = PanelEditor(
                feed.panels(), feed.family(), self.window.theme, self.window,
                sets=feed.sets, indication=feed.indication(), own=feed.has_own,
                gas_unit=self.window.preferences.gas_unit, before=self._before.get(feed.scope, ()),
            )  # fmt: skip
            self._editor.kept.connect(self.keep_panels)
            self._editor.set_kept.connect(self.keep_set)
            self._editor.open()

    def keep_panels(self, panels: PanelSet | None) -> None:
        """Keep the user's panels; None goes back to the shipped ones. Undo comes back to those before."""
        feed, scope = self.window.episode_feed, self._editor.sets.scope
        if feed is None:
            return
        if scope == feed.scope:
            self._before.setdefault(scope, []).append(feed.panels())
        if panels is None and scope != feed.family() and feed.has_kept(feed.family()):
            panels = shipped(feed.family(), shipped_titles())  # forgetting its own would bring back its kind's
        self._keep(f"panels.{scope}", panels)

    def keep_set(self, name: str, panels: PanelSet | None) -> None:
        """Keep a set of panels under a name; None forgets it."""
        self._keep(f"panelset.{name}", panels)

    def _keep(self, name: str, panels: PanelSet | None) -> None:
        layout = panel_operations.Layout(name, None if panels is None else to_json(panels))
        self.model.ask(panel_operations.keep, layout, done=self._panels_kept)

    def _panels_kept(self, outcome: Outcome[panel_operations.Layout]) -> None:  # noqa: ARG002
        self.model.look_for_changes()

    def do_go_start(self) -> None:
        """Show the start of support."""
        self._charts().go_home()

    def do_go_now(self) -> None:
        """Show the newest hours."""
        self._charts().go_now()

    def do_next_anchor(self) -> None:
        """Crosshair on the next change."""
        self._charts()
        self.pages.episode.go_to_anchor(1)

    def do_previous_anchor(self) -> None:
        """Crosshair on the change before."""
        self._charts()
        self.pages.episode.go_to_anchor(-1)

    def _charts(self) -> PanelStack:
        """The charts of the episode, on show. Showing the page draws it anew, so it is left where it stands."""
        if self.pages.name != "episode":
            self.window.show_page("episode")
        return self.pages.episode.stack
