"""Gives the episode view what it shows: the selected episode's record, figures, course and panels."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from PySide6.QtCore import QCoreApplication, QObject, Signal

from app.episode.on_screen import EpisodeOnScreen
from app.episode.panels import PanelSet, family_of, from_json, shipped
from app.operations import panel as panel_operations
from app.operations.outcome import Outcome
from app.session.model import SessionModel
from app.session.state import Changed, What
from app.ward.feed import WardFeed
from app.ward.moves import label_told_apart
from core.record.hindsight import Hindsight
from core.record.message import RecordError


class EpisodeFeed(QObject):
    """Follows the ward's figures, the selection and the kept panels."""

    refreshed = Signal(object)
    """`EpisodeOnScreen`."""
    gone = Signal()
    """Nothing of the selected episode stands at the moment that is looked at."""

    def __init__(self, model: SessionModel, ward: WardFeed, gas_unit: str, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._model, self._ward, self._gas_unit = model, ward, gas_unit
        self._kept: dict[str, PanelSet] = {}
        self._sets: dict[str, PanelSet] = {}
        self._later: Mapping[str, tuple[Hindsight, ...]] = {}
        model.changed.connect(self._model_changed)
        ward.refreshed.connect(self._ward_refreshed)

    def set_gas_unit(self, gas_unit: str) -> None:
        """Show gas pressures in another unit."""
        self._gas_unit = gas_unit
        self.show_selection()

    def mark_later(self, found: Mapping[str, tuple[Hindsight, ...]]) -> None:
        """Mark what came later than the moment that is looked at; {} where the window is live."""
        if found or self._later:
            self._later = found
            self.show_selection()

    def family(self) -> str:
        """Which family of panels the selected episode uses."""
        answer = self._ward.answers.get(self._model.session.selection or "")
        indication = answer.figures.profile.get("indication") if answer is not None else None
        return family_of(str(indication) if indication else None)

    def indication(self) -> str:
        """The indication of the selected episode, or ""."""
        answer = self._ward.answers.get(self._model.session.selection or "")
        return str(answer.figures.profile.get("indication") or "") if answer is not None else ""

    @property
    def has_own(self) -> bool:
        """Whether panels are kept for the selected episode's indication alone."""
        return self.indication() in self._kept

    @property
    def scope(self) -> str:
        """For whom the panels shown are kept: the indication with its own, else its kind."""
        return self.indication() if self.has_own else self.family()

    def has_kept(self, scope: str) -> bool:
        """Whether panels are kept for an indication or a kind."""
        return scope in self._kept

    @property
    def sets(self) -> Mapping[str, PanelSet]:
        """Sets of panels that were saved under a name."""
        return self._sets

    def panels(self) -> PanelSet:
        """The panels of the selected episode: those kept for its indication, else for its kind, else shipped."""
        kept = self._kept.get(self.indication()) or self._kept.get(self.family())
        return kept or shipped(self.family(), shipped_titles())

    def show_selection(self) -> None:
        """Tell what the selected episode is now."""
        key = self._model.session.selection
        on_ward = self._ward.on_ward(key) if key is not None else None
        if key is not None and on_ward is None and self._ward.is_ready:
            self.gone.emit()
        if key is not None and on_ward is not None:
            record, session = self._ward.answers[key].record, self._model.session
            called = label_told_apart(self._ward.answers, key, session.moment(), session.zone)
            self.refreshed.emit(
                EpisodeOnScreen(
                    record,
                    replace(on_ward.figures, label=called),  # its page and map may not be taken for the other's
                    on_ward.course,
                    self._ward.policy,
                    self.panels(),
                    self._gas_unit,
                    session.is_live,
                    self._later.get(key, ()),
                )
            )

    def _model_changed(self, changed: Changed) -> None:
        if changed.touches(What.STORE, What.LAYOUT):
            self._model.ask(panel_operations.load, None, done=self._loaded, subject="panels")
        if changed.touches(What.SELECTION):
            self.show_selection()

    def _ward_refreshed(self, _content: object) -> None:
        self.show_selection()

    def _loaded(self, outcome: Outcome[Mapping[str, str]]) -> None:
        self._kept, self._sets = {}, {}
        for name, text in outcome.value.items():
            room, _, key = name.partition(".")
            if room not in ("panels", "panelset"):
                continue
            try:
                (self._kept if room == "panels" else self._sets)[key] = from_json(text)
            except RecordError:
                continue  # a kept set of a newer program: the shipped panels stand in, nothing is lost
        self.show_selection()


def shipped_titles() -> dict[str, str]:
    """The names of the shipped panels in the reader's language."""
    translate = QCoreApplication.translate
    return {
        "gas": translate("panels", "Blood gas"),
        "oxygen": translate("panels", "Oxygen"),
        "breathing": translate("panels", "Breathing"),
        "both": translate("panels", "Oxygen and breathing"),
        "leak": translate("panels", "Leak and tidal volume"),
    }
