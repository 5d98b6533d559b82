"""Values of computed figures and of what they were made from, with their units, as one reader reads them."""

from __future__ import annotations

from typing import Final

from app.look import formats
from app.words import Reader
from app.words.template import quantity_name
from core.figures.catalogue import CATALOGUE
from core.record.channels import CHANNELS

_UNIT_DECIMALS: Final = {
    "pH": 2, "mmol/L": 1, "nmol/L": 1, "mL": 0, "mL/kg": 1, "L/min": 1, "cmH2O": 1, "kg": 1, "%": 0, "/min/L": 0,
}  # fmt: skip
_BARE_DECIMALS: Final = {
    "sf": 0, "rox": 2, "rox_hr": 2, "mrox": 2, "oxygenation_index": 1, "oxygen_saturation_index": 1,
    "ventilatory_ratio": 1,
}  # fmt: skip
_PRESSURES: Final = frozenset({"pf", "wished_paco2", "alveolar_po2"})
_INPUTS: Final = {
    "pbw": ("predicted body weight", "kg", 1),
    "base_pbw": ("base of the weight, by sex", "kg", 1),
    "paw_mean": ("mean airway pressure", "cmH2O", 1),
    "dead_space": ("dead space, assumed", "mL", 0),
    "wished_paco2": ("wished PaCO2", "mmHg", 0),
    "vte": ("tidal volume", "mL", 0),
    "mv": ("minute ventilation", "L/min", 1),
    "pf": ("P/F", "mmHg", 0),
    "sf": ("S/F", "", 0),
    "hco3": ("bicarbonate, calculated", "mmol/L", 1),
    "on_oxygen": ("on oxygen", "", 0),
    "pulmonary_ards": ("pulmonary ARDS", "", 0),
    "cardiogenic_oedema": ("cardiogenic pulmonary oedema", "", 0),
}  # fmt: skip


def input_name(key: str, reader: Reader) -> str:
    """What an input is called, with a large first letter.

    >>> input_name("paw_mean", Reader()), input_name("ph", Reader()), input_name("rr", Reader())
    ('Mean airway pressure', 'pH', 'Respiratory rate')
    """
    name = reader.translate(_INPUTS[key][0] if key in _INPUTS else quantity_name(key))
    return name if name.startswith("pH") else name[:1].upper() + name[1:]


def input_text(key: str, value: float | str | None, reader: Reader) -> str:
    """An input with its unit. Pressures of gases that enter a formula in mmHg say so beside kPa.

    >>> input_text("paco2", 60.0, Reader(gas_unit="kPa")), input_text("vte", 308.8, Reader())
    ('8.0 kPa (60 mmHg)', '309 mL')
    >>> input_text("rr", None, Reader())
    'not known'
    """
    if value is None:
        return reader.translate("not known")
    if isinstance(value, str):
        return reader.translate(formats.quantity(key, value))
    if key in _PRESSURES or key in ("paco2", "pao2", "usual_paco2"):
        return pressure_text(value, reader)
    if key in _INPUTS:
        _, unit, decimals = _INPUTS[key]
        return formats.with_unit(formats.fixed(value, decimals), unit)
    return formats.quantity(key, value, reader.gas_unit)


def pressure_text(mmhg: float, reader: Reader) -> str:
    """A gas pressure in the reader's unit, and as it enters a formula."""
    own = formats.gas_pressure(mmhg, reader.gas_unit)
    return own if reader.gas_unit == "mmHg" else f"{own} ({formats.gas_pressure(mmhg)})"


def value_text(key: str, value: float | str, reader: Reader) -> str:
    """A computed figure with its unit, by its line in the catalogue.

    >>> value_text("vt_per_kg", 5.84, Reader()), value_text("pf", 200.5, Reader())
    ('5.8 mL/kg', '201 mmHg')
    >>> value_text("usual_paco2_estimate", 60.0, Reader(gas_unit="kPa")), value_text("berlin_band", "mild", Reader())
    ('8.0 kPa', 'mild')
    """
    if isinstance(value, str):
        return reader.translate(value)
    unit = CATALOGUE[key].unit
    if unit == "mmHg":
        return formats.gas_pressure(value, reader.gas_unit)
    if unit == "h":
        return formats.hours(value)
    if unit == "min":
        return formats.minutes(value)
    decimals = _UNIT_DECIMALS.get(unit, _BARE_DECIMALS.get(key, 1))
    text = formats.fixed(value, decimals)
    if key in ("sbe", "sbe_siggaard", "hco3_difference"):
        text = formats.signed(value, decimals)
    return formats.with_unit(text, "" if unit == "pH" else unit)


def slope_text(key: str, per_h: float, reader: Reader) -> str:
    """A slope per hour of a channel or a computed quantity, with sign and unit.

    >>> slope_text("pf", -4.3, Reader()), slope_text("rr", 1.62, Reader()), slope_text("rox", -0.351, Reader())
    ('−4 mmHg per h', '+1.6/min per h', '−0.35 per h')
    """
    return reader.translate("{amount} per h").format(amount=_per_hour(key, per_h, reader))


def slope_band(key: str, low: float, high: float, reader: Reader) -> str:
    """The interval of a slope per hour.

    >>> slope_band("rr", 0.0, 4.0, Reader())
    '0.0 to +4.0/min per h'
    """
    between = span_text(_per_hour(key, low, reader), _per_hour(key, high, reader), reader)
    return reader.translate("{amount} per h").format(amount=between)


def span_text(low: str, high: str, reader: Reader) -> str:
    """From one value to another; a unit that both share is said once.

    >>> span_text("82 mmHg", "106 mmHg", Reader()), span_text("7.17", "7.21", Reader())
    ('82 to 106 mmHg', '7.17 to 7.21')
    """
    unit = low.lstrip("+-0123456789." + formats.MINUS)
    short = low.removesuffix(unit) if unit and high.endswith(unit) else low
    return reader.translate("{low} to {high}").format(low=short, high=high)


def _per_hour(key: str, value: float, reader: Reader) -> str:
    if key == "pf":
        return formats.gas_pressure(value, reader.gas_unit, sign=True)
    decimals, unit = _slope_form(key)
    return formats.with_unit(formats.signed(value, decimals), unit)


def _slope_form(key: str) -> tuple[int, str]:
    """Decimals and unit: a slope needs one decimal more than whole counts have."""
    if key in ("sf", "rox"):
        return _BARE_DECIMALS[key], ""
    if key == "vte_per_kg":
        return 2, "mL/kg"
    return max(1, CHANNELS[key].decimals), formats.shown_unit(key)
