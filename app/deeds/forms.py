"""Forms that log for the selected patient. They record by the strip's operations; undo takes them back alike."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from app.deeds.doer import Doer
from app.keeping.keeper import Keeping
from app.operations.recording import Recorded
from app.strip.log_strip import LogStrip
from app.window.shell import Shell

if TYPE_CHECKING:
    from app.dialogs.drafted import DraftedDialog
    from app.forms.entry_form import EntryForm
    from app.forms.previewed_form import PreviewedForm
    from app.keeping.form_drafts import LostForm


class FormDeeds(Doer):
    """Opens forms; the menu Log builds on it."""

    lost: LostForm | None = None
    """A form that was being filled in when a program ended."""
    form: PreviewedForm | DraftedDialog | None = None
    """The form that was opened last."""

    def __init__(self, window: Shell, keeping: Keeping) -> None:
        super().__init__(window)
        self._keeping = keeping

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

    def do_facts_form(self) -> None:
        """Facts that change later: the bed, how far support goes, targets, who answers."""
        from app.forms.facts_form import FactsForm

        self._open(FactsForm)

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
        self.show_form(form, answer.record.key)

    def show_form(self, form: PreviewedForm | DraftedDialog, episode: str = "") -> None:
        """Open a form; what is typed into it outlives a crash."""
        drafts = self._keeping.drafts
        if drafts is not None:
            drafts.forms.follow(form, episode)
        form.open()
        self.form = form

    def keep_lost(self, lost: LostForm) -> None:
        """Have a form at hand that a program which ended was filling in."""
        self.lost = lost

    def open_lost(self) -> None:
        """Open the form that a program which ended was filling in, with what was typed."""
        lost, self.lost = self.lost, None
        feed, drafts = self.window.feed, self._keeping.drafts
        if lost is None or feed is None or drafts is None:
            return
        if lost.episode and lost.episode not in feed.answers:
            self.lost = lost
            self.window.say(self.tr("The patient of that form is not on the ward's page: it is kept."))
            return
        if lost.episode:
            self.model.select(lost.episode)
        opener = self.openers().get(lost.kind)
        before, self.form = self.form, None
        if opener is not None:
            opener()
        if self.form is None:
            self.form = before
            return
        self.form.put(lost.typed)
        drafts.forms.keep()
        drafts.forms.forget(lost)

    def openers(self) -> dict[str, Callable[[], None]]:
        """What opens each kind of form."""
        return {"SettingsForm": self.do_settings_form, "GasForm": self.do_gas_form, "VitalsForm": self.do_vitals_form,
                "EndForm": self.do_end_episode, "FactsForm": self.do_facts_form}  # fmt: skip

    def _form_recorded(self, recorded: Recorded) -> None:
        self.strip.take(recorded)
