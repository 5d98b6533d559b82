"""Settings, gases and spans of time in a few words, for lanes, ribbon, strip and readout alike."""

from __future__ import annotations

from collections.abc import Mapping
from math import isnan
from typing import Final

from PySide6.QtCore import QCoreApplication

from app.look.formats import fraction, gas_pressure, quantity, trimmed
from app.look.theme import GasState, Verdict, verdict_of
from app.telling.drawn import drawn_short
from app.telling.support_course import Stretch
from app.words.short_forms import paco2_as_reported, ph_as_reported, two_levels
from app.words.template import quantity_name
from core.judgement.shapes import GasFigure
from core.record.channels import CHANNELS
from core.record.settings import Settings

translate = QCoreApplication.translate
MODE_SHORT: Final = {"high-flow nasal": "HFN"}


def channel_name(key: str) -> str:
    """A channel's name in the reader's language."""
    return translate("channel", CHANNELS[key].name) if key in CHANNELS else key


def computed_name(key: str) -> str:
    """The name of a computed channel; clinical abbreviations stay as the trade writes them."""
    names = {
        "pf": "P/F",
        "pressure_support": translate("phrases", "Pressure support"),
        "hco3_calculated": translate("phrases", "Bicarbonate, calculated"),
        "sbe": translate("phrases", "Standard base excess"),
    }
    return names.get(key) or channel_name(key)


def known(value: float | str | None) -> bool:
    """Whether a setting has a value."""
    return value is not None and not (isinstance(value, float) and isnan(value))


def settings_word(s: Settings) -> str:
    """The pressures in the fewest letters: 20/6, CPAP 10, HFN 40 L/min, off."""
    if s.is_off:
        return translate("phrases", "off")
    if s.is_cpap:
        return f"CPAP {trimmed(s.low_pressure)}" if known(s.low_pressure) else "CPAP"
    if s.is_bilevel and known(s.ipap):
        return f"{trimmed(s.ipap)}/{trimmed(s.epap)}" if known(s.epap) else f"IPAP {trimmed(s.ipap)}"
    if s.mode == "high-flow nasal":
        return f"HFN {trimmed(s.o2_flow)} L/min" if known(s.o2_flow) else "HFN"
    return s.mode or ""


def oxygen_word(s: Settings) -> str:
    """The oxygen in the fewest letters: 35 %, or the flow with FiO2 not known."""
    if known(s.fio2):
        return fraction(s.fio2)
    if known(s.o2_flow):
        return translate("phrases", "{flow} L/min, FiO2 not known").format(flow=trimmed(s.o2_flow))
    return translate("phrases", "FiO2 not known")


def settings_line(s: Settings) -> str:
    """All settings in force, on one line."""
    parts = [s.mode or translate("phrases", "mode not recorded")]
    if s.is_bilevel and known(s.ipap):
        support = s.pressure_support if known(s.pressure_support) else None
        parts.append(two_levels(s.ipap, trimmed(s.epap) if known(s.epap) else "", support))
    elif s.is_cpap and known(s.low_pressure):
        parts.append(f"{trimmed(s.low_pressure)} cmH2O")
    if not s.is_off:
        parts.append(f"FiO2 {oxygen_word(s)}" if known(s.fio2) else oxygen_word(s))
    if known(s.rate_set) and s.is_bilevel:
        parts.append(translate("phrases", "backup rate {rate}/min").format(rate=trimmed(s.rate_set)))
    if known(s.ti) and s.is_bilevel:
        parts.append(f"Ti {trimmed(s.ti)} s")
    return ", ".join(parts)


def change_word(stretch: Stretch) -> str:
    """What a change set, short: 20/6, 35 %, or the name of the setting."""
    changed = stretch.changed
    parts = []
    if changed.keys() & {"ipap", "epap", "cpap", "mode"}:
        parts.append(settings_word(stretch.settings))
    if changed.keys() & {"fio2", "o2_flow"}:
        s = stretch.settings
        parts.append(fraction(s.fio2) if known(s.fio2) else f"{trimmed(s.o2_flow)} L/min" if known(s.o2_flow) else "")
    if not parts:
        key = next(iter(changed), "")
        parts.append(f"{channel_name(key)} {quantity(key, getattr(stretch.settings, key))}" if key else "")
    return " ".join(p for p in parts if p)


def change_sentence(changed: Mapping[str, float | str | None], settings: Settings) -> str:
    """What a change set, from what to what, with units."""
    parts = []
    for key, before in changed.items():
        after = getattr(settings, key)
        name = channel_name(key)
        if not known(after):
            parts.append(translate("phrases", "{name} no longer known").format(name=name))
        elif known(before):
            text = translate("phrases", "{name} {before} to {after}")
            parts.append(text.format(name=name, before=_bare(key, before), after=quantity(key, after)))
        else:
            parts.append(f"{name} {quantity(key, after)}")
    return ", ".join(parts)


def step_words(channel: str, before: float | str | None, after: float | str | None) -> str:
    """One change as it stands inside a sentence: backup rate 14 to 16/min."""
    name = quantity_name(channel)
    if not known(after):
        return translate("phrases", "{name} no longer known").format(name=name)
    if not known(before) or before == after:
        return f"{name} {quantity(channel, after)}"
    text = translate("phrases", "{name} {before} to {after}")
    return text.format(name=name, before=_bare(channel, before), after=quantity(channel, after))


def _bare(key: str, value: float | str | None) -> str:
    """A value whose unit stands behind the one it is paired with."""
    text = quantity(key, value)
    return text if isinstance(value, str) else text.partition(" ")[0].removesuffix("/min")


def gas_words(gas: GasFigure, gas_unit: str) -> str:
    """A gas in one line: pH, pressures, P/F."""
    parts = []
    if ph := ph_as_reported(gas):
        parts.append(f"pH {ph}")
    if paco2 := paco2_as_reported(gas, gas_unit):
        parts.append(f"PaCO2 {paco2}")
    if gas.pao2_mmHg is not None:
        parts.append(f"PaO2 {gas_pressure(gas.pao2_mmHg, gas_unit)}")
    if gas.pf_mmHg is not None:
        parts.append(f"P/F {gas_pressure(gas.pf_mmHg, gas_unit)}")
    return ", ".join(parts)


def gas_name(gas: GasFigure) -> str:
    """The kind of gas, and what makes it another than the usual one."""
    names = {
        "arterial": translate("phrases", "arterial gas"),
        "capillary": translate("phrases", "capillary gas"),
        "venous": translate("phrases", "venous gas"),
    }
    text = names.get(gas.site, gas.site)
    if gas.site_assumed:
        text += translate("phrases", " (site not said)")
    return ", ".join(part for part in (text, drawn_short(gas)) if part)


def state_of(text: str | None) -> GasState:
    """The state of a gas as the look knows it."""
    return GasState(text) if text in ("severe", "acidotic", "resolved") else GasState.UNKNOWN


def verdict_or_none(text: str | None) -> Verdict | None:
    """The verdict as the look knows it."""
    return None if text is None else verdict_of(text)


def support_now(
    mode: str | None, ipap: float | None, epap: float | None, fio2: float | None, o2_flow: float | None
) -> str:
    """Settings as figures give them, short: BPAP-ST 20/6, 35 %."""
    parts = [MODE_SHORT.get(mode or "", mode or "")]
    if ipap is not None and epap is not None:
        parts.append(f"{trimmed(ipap)}/{trimmed(epap)}")
    elif epap is not None:
        parts.append(trimmed(epap))
    oxygen = fraction(fio2) if fio2 is not None else f"{trimmed(o2_flow)} L/min O2" if o2_flow is not None else ""
    return ", ".join(p for p in (" ".join(p for p in parts if p), oxygen) if p)
