"""The values of one gas sample: site, pH or H+, one pressure unit for the whole gas."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QVBoxLayout, QWidget

from app.forms.answer_row import AnswerRow
from app.forms.cells import Card, Cell
from app.forms.number_field import NumberField
from app.look.theme import Theme
from app.telling.phrases import channel_name
from core.record.channels import CHANNELS, SITES

_STEPS = {"ph": 0.01, "lactate": 0.1}
_STARTS = {"ph": 7.40, "h": 40.0, "paco2": 40.0, "pao2": 60.0, "hco3": 24.0, "be": 0.0, "lactate": 1.0,
           "sao2": 90.0, "gas_fio2": 28.0}  # fmt: skip
KEYS = ("ph", "paco2", "pao2", "hco3", "be", "lactate", "sao2", "gas_fio2")
_SECOND_ROW = ("be", "lactate", "sao2", "gas_fio2")
_H_LIMITS = (10.0, 316.0)
_PER_UNIT = {"mmHg": (1.0, 1.0), "kPa": (7.5, 0.1)}
"""How much smaller a first value is, and one step."""


class GasValues(QWidget):
    """`edited` when anything was typed or chosen. Units stand in the names, so that no number is read in another
    unit than it is typed in."""

    edited = Signal()

    def __init__(self, gas_unit: str, theme: Theme, *, flat: bool = False) -> None:
        super().__init__()
        self._usual_unit, self._theme = gas_unit, theme
        sites = {
            "arterial": self.tr("arterial"),
            "capillary": self.tr("capillary"),
            "venous": self.tr("venous"),
        }
        self.site = AnswerRow(channel_name("site"), [(s, sites[s]) for s in SITES], theme)
        self.acid_unit = AnswerRow(self.tr("Acidity as"), [("pH", "pH"), ("H+", "H+ nmol/L")], theme)
        self.pressure_unit = AnswerRow(self.tr("Pressures in"), [("mmHg", "mmHg"), ("kPa", "kPa")], theme)
        self.fields: dict[str, NumberField] = {}
        self.cells: dict[str, Cell] = {}
        self._lay_out(flat)
        self.site.chosen.connect(self.edited)
        self.acid_unit.chosen.connect(self._units_chosen)
        self.pressure_unit.chosen.connect(self._units_chosen)
        self._name_units()

    def _lay_out(self, flat: bool) -> None:
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(self._theme.px(8))
        sample, values = Card(self._theme), Card(self._theme)
        for card in (sample, values):
            if flat:  # it stands inside a card already
                card.setProperty("card", False)
                card.column.setContentsMargins(0, 0, 0, 0)
            column.addWidget(card)
        for name, row in (
            (channel_name("site"), self.site),
            (self.tr("Acidity as"), self.acid_unit),
            (self.tr("Pressures in"), self.pressure_unit),
        ):
            sample.add(Cell(name, row, self._theme, width=0, noted=False))
        for key in KEYS:
            values.add(self._number(key))

    def _number(self, key: str) -> QWidget:
        unit = "%" if key == "gas_fio2" else CHANNELS[key].unit
        name = channel_name(key) if key == "ph" else f"{channel_name(key)}, {unit}"
        limits = (21.0, 100.0) if key == "gas_fio2" else None
        step = _STEPS.get(key, 1.0)
        field = NumberField(key, name, self._theme, step=step, starts_at=_STARTS[key], limits=limits)
        field.edited.connect(self.edited)
        self.fields[key] = field
        self.cells[key] = Cell(name, field, self._theme, width=186, noted=key in _SECOND_ROW)
        return self.cells[key]

    def _units_chosen(self) -> None:
        self._name_units()
        self.edited.emit()

    def _name_units(self) -> None:
        if not self.pressure_unit.key:
            self.pressure_unit.choose(self._usual_unit)
        if not self.acid_unit.key:
            self.acid_unit.choose("pH")
        unit = self.pressure_unit.key
        scale, step = _PER_UNIT[unit]
        for key in ("paco2", "pao2"):
            low, high = CHANNELS[key].hard or (0.0, 999.0)
            self._name(key, f"{channel_name(key)}, {unit}")
            self.fields[key].box.set_steps(step, (low / scale, high / scale), _STARTS[key] / scale)
        if self.acid_unit.key == "H+":
            self._name("ph", self.tr("H+, nmol/L"))
            self.fields["ph"].box.set_steps(1.0, _H_LIMITS, _STARTS["h"])
        else:
            self._name("ph", "pH")
            self.fields["ph"].box.set_steps(0.01, CHANNELS["ph"].hard, _STARTS["ph"])

    def _name(self, key: str, name: str) -> None:
        self.cells[key].name.setText(name)
        self.fields[key].rename(name)

    def typed(self) -> dict[str, str]:
        """What was typed, by channel, each with its unit written at it; empty while nothing is."""
        found = {key: field.text for key, field in self.fields.items() if field.text}
        if not found:
            return {}
        if "ph" in found and self.acid_unit.key == "H+":
            found["ph"] += "nmol/L"
        for key in ("paco2", "pao2"):
            if key in found:
                found[key] += self.pressure_unit.key
        if "gas_fio2" in found and not _is_fraction(found["gas_fio2"]):
            found["gas_fio2"] += "%"
        return {"site": self.site.key, **found}

    def lacks(self) -> str:
        """What is missing: a venous gas taken for an arterial one would mislead."""
        if self.typed() and not self.site.key:
            return self.tr("Say where the sample is from: arterial, capillary or venous.")
        return ""


def _is_fraction(text: str) -> bool:
    """Whether an FiO2 was typed as a fraction, 0.35.

    >>> _is_fraction("0,35"), _is_fraction("35"), _is_fraction("x")
    (True, False, False)
    """
    try:
        return float(text.replace(",", ".")) <= 1.0
    except ValueError:
        return False
