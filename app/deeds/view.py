"""Looking: explanations, tables, look, text size, units."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtWidgets import QApplication

from app.deeds.doer import Doer
from app.ward.lane_words import open_flags
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import DueFigure, FlagFigure, GasFigure, LeverFigure

if TYPE_CHECKING:
    from app.explain.explanation import Explanation
    from app.explain.fact import Fact


class ViewDeeds(Doer):
    """Serves the menu View."""

    def do_explain(self) -> None:
        """Explain what has the focus; without one, the strongest thing that the page shows."""
        fact = self._focused_fact()
        found = fact.explanation if fact is not None else self._of_page()
        if found is not None:
            self.explain(found)
        elif fact is not None:
            self.window.say(self.tr("This line says all there is to it."))
        else:
            self.window.say(self.tr("Nothing is selected here that could be explained."))

    def do_show_figures(self) -> None:
        """Every computed figure of the selected episode, unfolded; folded again where it is."""
        self.window.show_page("episode")
        self.pages.episode.side.toggle_figures()

    def explain(self, explanation: Explanation) -> None:
        """Show an explanation."""
        from app.explain.dialog import ExplainDialog

        ExplainDialog(explanation, self.window.theme, self.window).open()

    def explain_figure(self, figure: object) -> None:
        """Show how a figure came about."""
        found = self.of_payload(figure)
        if found is not None:
            self.explain(found)

    def _focused_fact(self) -> Fact | None:
        from app.explain.fact import Fact

        widget = QApplication.focusWidget()
        while widget is not None and not isinstance(widget, Fact):
            widget = widget.parentWidget()
        return widget

    def _of_page(self) -> Explanation | None:
        """What is selected on the page; a page where nothing can be selected explains nothing of another."""
        found = {
            "episode": self._of_charts,
            "map": self._of_map,
            "ward": self._of_lane,
            "compare": self._of_compared,
            "statistics": self.pages.statistics.explained if self.pages.name == "statistics" else None,
        }.get(self.pages.name)
        return found() if found is not None else None

    def _of_charts(self) -> Explanation | None:
        """The gas or the verdict under the crosshair, else the state now."""
        view = self.pages.episode
        pointed: object = view.gas_pointed_at() or view.response_pointed_at()
        if pointed is not None:
            return self.of_payload(pointed)
        return next((f.explanation for f in view.side.facts() if f.explanation is not None), None)

    def _of_map(self) -> Explanation | None:
        gas = self.pages.map.map.chosen
        return self.of_payload(gas.payload.gas) if gas is not None else None

    def _of_lane(self) -> Explanation | None:
        item = self.pages.ward.lanes.selected_item
        if item is not None:
            return self.of_payload(item.payload)
        return self._of_episode(self.pages.ward.lanes.selected_key)

    def _of_compared(self) -> Explanation | None:
        return self._of_episode(self.pages.compare.current())

    def _of_episode(self, key: str | None) -> Explanation | None:
        """The strongest flag of an episode, else its newest verdict, else its newest gas."""
        answer = self.window.feed.answers.get(key or "") if self.window.feed is not None else None
        if answer is None:
            return None
        f = answer.figures
        return self.of_payload(next(iter((*open_flags(f), *reversed(f.responses), *reversed(f.gases))), None))

    def of_payload(self, payload: object) -> Explanation | None:
        """The explanation of a figure."""
        from app.explain.findings import Explainer

        feed = self.window.feed
        policy = feed.policy if feed is not None else self.model.session.policy
        explainer = Explainer(policy, self.window.reader)
        if isinstance(payload, FlagFigure):
            return explainer.flag(payload)
        if isinstance(payload, ResponseFigure):
            return explainer.response(payload)
        if isinstance(payload, GasFigure):
            return explainer.gas(payload)
        if isinstance(payload, LeverFigure):
            return explainer.lever(payload)
        return explainer.due(payload) if isinstance(payload, DueFigure) else None

    def do_table(self) -> None:
        """The page's chart as a table and in words."""
        from app.dialogs.table import TableDialog
        from app.window.tables_of_pages import table_of_page

        table = table_of_page(self.window)
        if table is not None:
            TableDialog(table, self.window.theme, self.window).open()

    def do_dark(self) -> None:
        """Dark look, or light again."""
        self.window.prefer(theme="light" if self.window.preferences.theme == "dark" else "dark")

    def do_text_larger(self) -> None:
        """One step larger."""
        self.window.prefer(text_scale=self.window.preferences.with_scale_step(1).text_scale)

    def do_text_smaller(self) -> None:
        """One step smaller."""
        self.window.prefer(text_scale=self.window.preferences.with_scale_step(-1).text_scale)

    def do_pressure_unit(self) -> None:
        """kPa, or mmHg again."""
        self.window.prefer(gas_unit="mmHg" if self.window.preferences.gas_unit == "kPa" else "kPa")
