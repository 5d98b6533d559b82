"""A blood gas by form: pH or H+, one pressure unit for the whole gas, and a check that it agrees with itself."""

from __future__ import annotations

from html import escape
from math import isnan

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QWidget

from app.formats import fraction
from app.forms.answer_row import AnswerRow
from app.forms.cells import Cell
from app.forms.entry_form import EntryForm, worded
from app.forms.gas_check import GasCheck, check_of
from app.forms.number_field import NumberField
from app.phrases import channel_name
from app.words import sentence
from core.record.channels import CHANNELS, SITES

_STEPS = {"ph": 0.01, "hco3": 1.0, "be": 1.0, "lactate": 0.1, "sao2": 1.0, "gas_fio2": 1.0}
_STARTS = {"ph": 7.40, "h": 40.0, "paco2": 40.0, "pao2": 60.0, "hco3": 24.0, "be": 0.0, "lactate": 1.0,
           "sao2": 90.0, "gas_fio2": 28.0}  # fmt: skip
_SECOND_ROW = ("be", "lactate", "sao2", "gas_fio2")
_H_LIMITS = (10.0, 316.0)
_PER_UNIT = {"mmHg": (1.0, 1.0), "kPa": (7.5, 0.1)}
"""How much smaller the first value is, and one step."""


class GasForm(EntryForm):
    """One sample. Its site must be said: a venous gas taken for an arterial one would mislead."""

    def build(self) -> None:
        self.set_name(self.tr("Blood gas"))
        self.time.setAccessibleName(self.tr("When the sample was taken: now, 14:20, or 20m ago"))
        self.time.setToolTip(self.time.accessibleName())
        sites = {
            "arterial": self.tr("arterial"),
            "capillary": self.tr("capillary"),
            "venous": self.tr("venous"),
        }
        self.site = AnswerRow(channel_name("site"), [(s, sites[s]) for s in SITES], self.theme)
        self.acid_unit = AnswerRow(self.tr("Acidity as"), [("pH", "pH"), ("H+", "H+ nmol/L")], self.theme)
        self.pressure_unit = AnswerRow(
            self.tr("Pressures in"), [("mmHg", "mmHg"), ("kPa", "kPa")], self.theme
        )
        self.acid_unit.choose("pH")
        self.pressure_unit.choose(self.gas_unit)
        self.fields: dict[str, NumberField] = {}
        self.cells: dict[str, Cell] = {}
        self.check = QLabel()
        self.check.setTextFormat(Qt.TextFormat.RichText)
        self.check.setWordWrap(True)
        self._build_cards()
        for row in (self.site, self.acid_unit, self.pressure_unit):
            row.chosen.connect(self.edited)
        self.acid_unit.chosen.connect(self._units_chosen)
        self.pressure_unit.chosen.connect(self._units_chosen)
        self._units_chosen()
        self.fit(880, 700)
        self.first = self.site.buttons["arterial"]

    def _build_cards(self) -> None:
        sample = self.card()
        for name, row in (
            (channel_name("site"), self.site),
            (self.tr("Acidity as"), self.acid_unit),
            (self.tr("Pressures in"), self.pressure_unit),
        ):
            sample.add(Cell(name, row, self.theme, width=0, noted=False))
        values = self.card()
        for key in ("ph", "paco2", "pao2", "hco3", "be", "lactate", "sao2", "gas_fio2"):
            values.add(self._number(key))
        agreement = self.card(self.tr("Does it agree with itself?"))
        agreement.add_line(self.check)

    def _number(self, key: str) -> QWidget:
        unit = "%" if key == "gas_fio2" else CHANNELS[key].unit
        name = channel_name(key) if key == "ph" else f"{channel_name(key)}, {unit}"
        limits = (21.0, 100.0) if key == "gas_fio2" else None
        field = NumberField(
            key, name, self.theme, step=_STEPS.get(key, 1.0), starts_at=_STARTS[key], limits=limits
        )
        field.edited.connect(self.edited)
        self.fields[key], self.cells[key] = (
            field,
            Cell(name, field, self.theme, width=186, noted=key in _SECOND_ROW),
        )
        return self.cells[key]

    def _units_chosen(self) -> None:
        """The units stand in the names, so that no number is read in another unit than it is typed in."""
        if not self.pressure_unit.key:
            self.pressure_unit.choose(self.gas_unit)
        if not self.acid_unit.key:
            self.acid_unit.choose("pH")
        unit, is_h = self.pressure_unit.key, self.acid_unit.key == "H+"
        scale, step = _PER_UNIT[unit]
        for key in ("paco2", "pao2"):
            self._rename(key, f"{channel_name(key)}, {unit}", _STARTS[key] / scale, step, scale)
        ph = self.fields["ph"].box
        self._name("ph", self.tr("H+, nmol/L") if is_h else "pH")
        if is_h:
            ph.set_steps(1.0, _H_LIMITS, _STARTS["h"])
        else:
            ph.set_steps(0.01, CHANNELS["ph"].hard, _STARTS["ph"])
        self.edited()

    def _rename(self, key: str, name: str, start: float, step: float, scale: float) -> None:
        low, high = CHANNELS[key].hard or (0.0, 999.0)
        self._name(key, name)
        self.fields[key].box.set_steps(step, (low / scale, high / scale), start)

    def _name(self, key: str, name: str) -> None:
        self.cells[key].name.setText(name)
        self.fields[key].rename(name)

    # the line

    def items(self) -> str:
        f, unit = self.fields, self.pressure_unit.key
        typed = {key: field.text for key, field in f.items()}
        if not any(typed.values()):
            return ""
        if typed["ph"] and self.acid_unit.key == "H+":
            typed["ph"] += "nmol/L"
        for key in ("paco2", "pao2"):
            typed[key] += unit if typed[key] else ""
        if typed["gas_fio2"]:
            typed["gas_fio2"] += "" if _is_fraction(typed["gas_fio2"]) else "%"
        return worded({"site": self.site.key, **typed})

    def lacks(self) -> str:
        if self.items() and not self.site.key:
            return self.tr("Say where the sample is from: arterial, capillary or venous.")
        return ""

    # the check

    def show_extra(self) -> None:
        """Calculated bicarbonate, whether the reported one belongs to it, and what usually explains it if not."""
        setting = self.in_force().fio2
        told = (
            self.tr("set: not known")
            if isnan(setting)
            else self.tr("set {value}").format(value=fraction(setting))
        )
        self.cells["gas_fio2"].tell(told)
        if self.preview is None:
            self.check.setText(escape(self.tr("Type pH and PaCO2: the bicarbonate they make is shown here.")))
        else:
            check = check_of(self.preview.line.readings, setting, self.model.session.policy)
            self.check.setText(self._check_html(check))
        self.check.setAccessibleName(self.check_plain())

    def _check_html(self, check: GasCheck) -> str:
        reader, quiet = self.reader(), self.theme.colours.ink_quiet
        if not check.facts:
            return escape(self.tr("Type pH and PaCO2: the bicarbonate they make is shown here."))
        told = escape(" ".join(sentence(m, reader) for m in check.facts))
        if check.agrees is None:
            return told
        if check.agrees:
            return f"<b>{escape(self.tr('Agrees.'))}</b> {told}"
        why = escape(" ".join(sentence(m, reader) for m in check.explanations))
        verdict = escape(self.tr("These values do not belong together."))
        return f"<b>{verdict}</b> {told} <span style='color:{quiet}'>{why}</span>"

    def check_plain(self) -> str:
        """The check in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        return QTextDocumentFragment.fromHtml(self.check.text()).toPlainText()


def _is_fraction(text: str) -> bool:
    """Whether an FiO2 was typed as a fraction, 0.35.

    >>> _is_fraction("0,35"), _is_fraction("35"), _is_fraction("x")
    (True, False, False)
    """
    try:
        return float(text.replace(",", ".")) <= 1.0
    except ValueError:
        return False
