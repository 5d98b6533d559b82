"""Forms that log for the selected patient. They record by the strip's operations; undo takes them back alike."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.deeds.doer import Doer
from app.log_strip import LogStrip
from app.operations.recording import Recorded

if TYPE_CHECKING:
    from app.forms.entry_form import EntryForm


class FormDeeds(Doer):
    """Opens forms; the menu Log builds on it."""

    @property
    def strip(self) -> LogStrip:
        """The strip; there only where a store is open."""
        if self.window.strip is None:
            raise RuntimeError("no store is open: this action is greyed then")
        return self.window.strip

    def do_settings_form(self) -> None:
        """Settings in force, to be changed."""
        from app.forms.settings_form import SettingsForm

        self._open(SettingsForm)

    def do_gas_form(self) -> None:
        """A blood gas."""
        from app.forms.gas_form import GasForm

        self._open(GasForm)

    def do_vitals_form(self) -> None:
        """Vital signs."""
        from app.forms.vitals_form import VitalsForm

        self._open(VitalsForm)

    def do_end_episode(self) -> None:
        """The end of support, with its reason."""
        from app.forms.end_form import EndForm

        self._open(EndForm)

    def _open(self, kind: type[EntryForm]) -> None:
        from app.forms.entry_form import Patient

        feed, key = self.window.feed, self.model.session.selection
        answer = feed.answers.get(key or "") if feed is not None else None
        if answer is None:
            return
        patient = Patient(answer.record, self.strip.whom.text())
        form = kind(patient, self.model, self.window.preferences.gas_unit, self.window.theme, self.window)
        form.recorded.connect(self._form_recorded)
        form.open()

    def _form_recorded(self, recorded: Recorded) -> None:
        self.strip.take(recorded)
