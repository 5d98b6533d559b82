"""A change of settings by form: what is in force stands in the fields, what differs is recorded."""

from __future__ import annotations

from math import isnan

from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from app.forms.cells import WIDTH, Cell, QuietChooser
from app.forms.entry_form import EntryForm, worded
from app.forms.number_field import NumberField
from app.look.formats import trimmed
from app.strip.preview_words import own_rate, with_readings
from app.telling.phrases import channel_name, known
from core.judgement.setting_change import CO2, changed, effects
from core.record.channels import BILEVEL_MODES, CHANNELS, INTERFACES, MODES
from core.record.settings import Settings

_STEPS = {"ipap": 1.0, "epap": 1.0, "cpap": 1.0, "fio2": 1.0, "o2_flow": 1.0, "rate_set": 1.0, "ti": 0.1}
_UNITS = {"fio2": "%"}
_USUAL = {"ipap": 12.0, "epap": 5.0, "cpap": 8.0, "fio2": 28.0, "o2_flow": 2.0, "rate_set": 14.0, "ti": 1.0}
"""Where the first press of a button goes from while nothing is in force; inside the usual limits, no advice."""
_PRESSURES = ("ipap", "epap", "cpap")


class SettingsForm(EntryForm):
    """Shows pressure support before and after, and what the change can act on."""

    def build(self) -> None:
        self.set_name(self.tr("Log a settings change"))
        self.mode, self.interface = QuietChooser(), QuietChooser()
        self.fields: dict[str, NumberField] = {}
        self.cells: dict[str, Cell] = {}
        self._shown: dict[str, str] = {}
        self.support = QLabel()
        self.support.setProperty("role", "title")
        self.acts = QLabel()
        self.acts.setProperty("role", "caption")
        self.acts.setWordWrap(True)
        self._build_pressures()
        self._build_rest()
        self._take_in_force()
        self.time.textEdited.connect(self._moment_typed)
        self.fit(830, 600)
        self.first = self.fields["cpap" if self.before.is_cpap else "ipap"].box

    def _build_pressures(self) -> None:
        card = self.card("", self.tr("Records only: the ventilator is not changed."))
        self.mode.addItem(self.tr("not recorded"), "")
        for mode in MODES:
            self.mode.addItem(mode, mode)
        self.mode.activated.connect(self.edited)
        card.add(self._cell("mode", channel_name("mode"), self.mode))
        card.add(self._cell("interface", channel_name("interface"), self.interface))
        card.add_line(QWidget())
        for key in ("ipap", "epap"):
            card.add(self._number(key))
        inside = QWidget()
        column = QVBoxLayout(inside)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.support)
        column.addWidget(self.acts)
        self.support.setAccessibleName(self.tr("Pressure support"))
        card.add(self._cell("support", self.tr("Pressure support"), inside))
        card.add(self._number("cpap"))

    def _build_rest(self) -> None:
        card = self.card()
        for key in ("fio2", "o2_flow", "rate_set", "ti"):
            card.add(self._number(key, width=174))

    def _cell(self, key: str, name: str, field: QWidget) -> Cell:
        self.cells[key] = Cell(name, field, self.theme, noted=key != "support")
        return self.cells[key]

    def _number(self, key: str, width: int = WIDTH) -> Cell:
        c = CHANNELS[key]
        name = f"{channel_name(key)}, {_UNITS.get(key, c.unit)}"
        limits = (21.0, 100.0) if key == "fio2" else None
        field = NumberField(key, name, self.theme, step=_STEPS[key], starts_at=_USUAL[key], limits=limits)
        field.edited.connect(self.edited)
        self.fields[key], self.cells[key] = field, Cell(name, field, self.theme, width=width)
        return self.cells[key]

    # what is in force

    def _moment_typed(self) -> None:
        """Another moment has other settings in force; what was typed stays."""
        typed = {key: f.text for key, f in self.fields.items() if f.text != self._shown[key]}
        chosen = {name: box.currentData() for name, box in self._boxes().items() if self._differs(name)}
        self._take_in_force()
        for key, text in typed.items():
            self.fields[key].set_text(text)
        for name, data in chosen.items():
            self._boxes()[name].setCurrentIndex(self._boxes()[name].findData(data))
        self.edited()

    def _boxes(self) -> dict[str, QuietChooser]:
        return {"mode": self.mode, "interface": self.interface}

    def _take_in_force(self) -> None:
        before = self.before = self.in_force()
        for key, field in self.fields.items():
            value = getattr(before, key)
            text = "" if isnan(value) else trimmed(value * 100 if key == "fio2" else value)
            self._shown[key] = text
            field.set_text(text)
        self.mode.setCurrentIndex(max(self.mode.findData(before.mode or ""), 0))
        worn = [before.interface] if before.interface and before.interface not in INTERFACES else []
        self.interface.clear()
        self.interface.addItem(self.tr("not recorded"), "")
        for choice in (*worn, *INTERFACES):
            self.interface.addItem(choice, choice)
        self.interface.setCurrentIndex(max(self.interface.findData(before.interface or ""), 0))
        if not self.interface.property("joined"):
            self.interface.activated.connect(self.edited)
            self.interface.setProperty("joined", True)

    def _differs(self, name: str) -> bool:
        chosen = self._boxes()[name].currentData()
        return bool(chosen) and chosen != (getattr(self.before, name) or "")

    def _takes(self, key: str) -> bool:
        """Whether the mode has that setting at all."""
        mode = str(self.mode.currentData())
        if mode in BILEVEL_MODES:
            return key != "cpap"
        if mode == "CPAP":
            return key in ("cpap", "fio2", "o2_flow")
        if mode == "high-flow nasal":
            return key in ("fio2", "o2_flow")
        return mode != "off"

    # the line

    def _changes(self) -> dict[str, str]:
        return {
            key: f.text for key, f in self.fields.items()
            if self._takes(key) and f.text and f.text != self._shown[key]
        }  # fmt: skip

    def typed(self) -> dict[str, str]:
        """Only what differs from what is in force: the rest is not typed, and may change before it is put back."""
        own = {"time", *(f"fields.{key}" for key in self._changes()), *(n for n in self._boxes() if self._differs(n))}
        return {name: text for name, text in super().typed().items() if name in own}

    def items(self) -> str:
        parts = {name: str(box.currentData()) for name, box in self._boxes().items() if self._differs(name)}
        return worded(parts | self._changes())

    def lacks(self) -> str:
        mode, before = self.mode.currentData(), self.before
        if not mode:
            return ""
        pressures = ("ipap", "epap") if mode in BILEVEL_MODES else ("cpap",) if mode == "CPAP" else ()
        touched = self._differs("mode") or any(p in self._changes() for p in _PRESSURES)
        missing = [channel_name(p) for p in pressures if not self.fields[p].text and isnan(getattr(before, p))]
        if touched and missing:
            return self.tr("{mode} needs {missing}.").format(mode=mode, missing=", ".join(missing))
        return ""

    # beside the preview

    def show_extra(self) -> None:
        """Each changed value names what it was; pressure support before and after."""
        changes = self._changes()
        for key, field in self.fields.items():
            takes = self._takes(key)
            field.setEnabled(takes)
            self.cells[key].setVisible(takes)
            was = self._shown[key]
            if key in changes:
                self.cells[key].tell(self.tr("was {value}").format(value=was or "?"), strong=True)
            else:
                self.cells[key].tell(self._unknown_word(key) if takes and not was else "")
        for name in self._boxes():
            was = getattr(self.before, name) or self.tr("not recorded")
            differs = self._differs(name)
            self.cells[name].tell(self.tr("was {value}").format(value=was) if differs else "", strong=differs)
        self.cells["support"].setVisible(self._takes("ipap"))
        after = self._after()
        self.support.setText(_support_words(self.before.pressure_support, after.pressure_support))
        self.support.setAccessibleName(self.tr("Pressure support {text}").format(text=self.support.text()))
        self.acts.setText(self._acts_words(after))

    def _unknown_word(self, key: str) -> str:
        if key == "fio2" and known(self.before.o2_flow):
            return self.tr("not known")
        return self.tr("not recorded")

    def _after(self) -> Settings:
        return with_readings(self.before, self.preview.line.readings) if self.preview else self.before

    def _acts_words(self, after: Settings) -> str:
        if self.preview is None:
            return ""
        at = self.moment()
        acts = effects(changed(at, self.before, after), self.before, after, own_rate(self.patient.record, at))
        names = [self.tr("CO2") if e == CO2 else self.tr("oxygen") for e in acts]
        if not names:
            return self.tr("acts on neither CO2 nor oxygen")
        return self.tr("can act on {what}").format(what=self.tr(" and ").join(names))


def _support_words(before: float, after: float) -> str:
    """13 to 16 cmH2O; one figure where nothing changes.

    >>> _support_words(13, 16), _support_words(13, 13)
    ('13 \N{RIGHTWARDS ARROW} 16 cmH2O', '13 cmH2O')
    """
    if isnan(after):
        return "\N{EN DASH}"
    if isnan(before) or before == after:
        return f"{trimmed(after)} cmH2O"
    return f"{trimmed(before)} \N{RIGHTWARDS ARROW} {trimmed(after)} cmH2O"
