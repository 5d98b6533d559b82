"""What gets written down: vital signs as counted, gases as the analyser prints them, what devices show."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from sample_data.case import Case
from sample_data.device import port_flow, shown_tidal_ml
from sample_data.dice import Dice
from sample_data.gas_exchange import hco3_of
from sample_data.oxygen import alveolar_po2
from sample_data.saturation import Values
from sample_data.script import Act, Inputs, Setting
from sample_data.simulation import Trajectory

KPA = 7.50062
PACO2_CV = 0.03
PH_PER_PACO2, PH_ANALYSER_SD = 0.36, 0.005
PAO2_CV = 0.05
"""What a repeat gas varies by without any change: SD of pH 0.012, of PaCO2 3 %, of PaO2 5 % (Thorson, Chest
1983;84:14, six gases in 50 min). pH and PaCO2 vary together, so that bicarbonate stays nearly still."""
LEAST_GRADIENT = 4.0
DEVICE = "device"
EVERY_MIN = {"leak": 1, "vte": 1, "rr_total": 1, "spo2": 1, "mv": 5, "pip": 5, "spont_percent": 5, "hr": 5}
UNITS = {
    "leak": "L/min", "vte": "mL", "rr_total": "/min", "spo2": "%", "mv": "L/min", "pip": "cmH2O",
    "spont_percent": "%", "hr": "/min",
}  # fmt: skip
SETTING_UNITS = {
    "ipap": "cmH2O", "epap": "cmH2O", "cpap": "cmH2O", "o2_flow": "L/min", "rate_set": "/min", "ti": "s",
    "fio2": "%",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a log: minute from the start of support, and the text of each cell."""

    minute: int
    channel: str
    value: str
    unit: str = ""
    by: str = ""
    note: str = ""


def typed_rows(case: Case, true: Trajectory) -> Iterator[Row]:
    """All that people typed after the profile, by time."""
    script, dice = case.script, Dice(case.kind, case.seed, "bedside")
    for act in script.in_order():
        at = act.minute - script.first
        values: list[tuple[str, str, str]] = []
        if act.what == "gas":
            values = _gas(case, true, at, dict(act.values), dice)
        elif act.what == "vitals":
            values = _vitals(case, true, at, dice)
        elif act.what in ("settings", "event"):
            values = [_plain(act, name, value) for name, value in act.values]
        if act.minute < script.logged_from:
            continue  # drawn all the same, so that the log's start does not change what comes after
        for channel, value, unit in values:
            yield Row(act.minute, channel, value, unit, act.by)


def _plain(act: Act, name: str, value: Setting) -> tuple[str, str, str]:
    if act.what == "event" or isinstance(value, str):
        return name, str(value), ""
    if name == "fio2":
        return name, f"{100 * value:.0f}", "%"
    return name, f"{value:g}", SETTING_UNITS.get(name, "")


def _gas(case: Case, true: Trajectory, at: int, wanted: dict[str, Setting], dice: Dice) -> list[tuple[str, str, str]]:
    paco2_true, pao2_true = float(true.paco2[at]), float(true.pao2[at])
    # PaCO2 wanders and takes pH with it; a little of pH is the analyser's own.
    drift = dice.about(0, PACO2_CV, -0.09, 0.09)
    paco2 = paco2_true * (1.0 + drift)
    ph = round(float(true.ph[at]) - PH_PER_PACO2 * drift + dice.about(0, PH_ANALYSER_SD, -0.015, 0.015), 2)
    pao2 = pao2_true * (1.0 + dice.about(0, PAO2_CV, -0.15, 0.15))
    # However it varies, blood holds less oxygen than the lung it comes from.
    pao2 = min(pao2, float(alveolar_po2(true.fio2[at], np.array(paco2))) - LEAST_GRADIENT)
    sao2 = 100 * float(true.saturation[at]) + dice.about(0, 0.5, -1.5, 1.5)
    capillary = wanted["site"] == "capillary"
    if capillary:
        pao2 -= 6.0  # capillary oxygen reads low in hypoxaemic COPD
    if case.script.pressure_unit == "kPa":
        paco2_text, pao2_text, unit = f"{paco2 / KPA:.1f}", f"{pao2 / KPA:.1f}", "kPa"
        paco2 = float(paco2_text) * KPA
    else:
        paco2_text, pao2_text, unit = f"{paco2:.0f}", f"{pao2:.0f}", "mmHg"
        paco2 = float(paco2_text)
    bicarbonate = float(hco3_of(np.array(ph), np.array(paco2)))
    excess = bicarbonate - 24.8 + 16.2 * (ph - 7.40)
    rows = [
        ("site", str(wanted["site"]), ""), ("ph", f"{ph:.2f}", ""), ("paco2", paco2_text, unit),
        ("pao2", pao2_text, unit), ("hco3", f"{bicarbonate:.1f}", "mmol/L"), ("be", f"{excess:.1f}", "mmol/L"),
        ("lactate", f"{max(0.4, float(true.lactate[at]) + dice.about(0, 0.1, -0.3, 0.3)):.1f}", "mmol/L"),
    ]  # fmt: skip
    if not capillary:
        rows.append(("sao2", f"{min(sao2, 99.8):.1f}", "%"))
    return rows


def _vitals(case: Case, true: Trajectory, at: int, dice: Dice) -> list[tuple[str, str, str]]:
    p = case.patient
    gcs = int(np.floor(float(true.gcs[at]) + dice.between(0.2, 0.8)))
    gcs = min(max(gcs, 3), 15)
    rate = max(6, round(float(true.rate[at]) + dice.about(0, 1.3, -3, 3)))
    stress = _stress(true)[at]
    sbp = p.sbp + 14 * (float(stress) - 1.0) + dice.about(0, 5, -12, 12)
    breathless = 10.0 * float(np.clip(0.05 + 0.45 * true.unmet[at] + 0.024 * (true.rate[at] - 15.0), 0.0, 1.0))
    temp = p.temp + dice.about(0, 0.12, -0.3, 0.3)
    worst = (
        "marked" if breathless > 6.5 else "moderate" if breathless > 4.2 else "mild" if breathless > 2.2 else "none"
    )
    acvpu = "alert" if gcs >= 15 else "confusion" if gcs >= 13 else "voice" if gcs >= 10 else "pain"
    return [
        ("rr", f"{rate}", "/min"), ("gcs", f"{gcs}", ""), ("acvpu", acvpu, ""), ("sbp", f"{sbp:.0f}", "mmHg"),
        ("dbp", f"{0.45 * sbp + 14 + dice.about(0, 3, -7, 7):.0f}", "mmHg"), ("temp", f"{temp:.1f}", "degC"),
        ("hr", f"{_heart(case, true)[at] + dice.about(0, 2, -5, 5):.0f}", "/min"),
        ("dyspnoea", f"{breathless:.0f}", ""), ("accessory_muscle_use", worst, ""),
    ]  # fmt: skip


def _stress(true: Trajectory) -> Values:
    """1 as the patient came, less as breathing gets easier."""
    raw = 0.6 * true.unmet + 0.025 * true.rate + 0.15 * true.illness + 3.0 * np.maximum(0.92 - true.saturation, 0.0)
    return np.asarray((raw + true.fatigue) / float(raw[5]))


def _heart(case: Case, true: Trajectory) -> Values:
    resting = 75.0 + 8.0 * max(case.patient.temp - 37.0, 0.0)
    return resting + (case.patient.hr - resting) * np.clip(2.2 * _stress(true) - 1.2, 0.0, 1.5)


def device_readings(case: Case, true: Trajectory, inputs: Inputs) -> dict[str, Values]:
    """What ventilator and monitor write each minute, shape (minutes,); NaN where they write nothing.

    With the mask off the ventilator is silent; the monitor goes on.
    """
    n = inputs.minutes
    d = Dice(case.kind, case.seed, "device")
    own = np.where(inputs.on > 0, 1.0, np.nan)
    mean = true.attained_epap + 0.35 * (true.attained_ipap - true.attained_epap)
    leak = true.leak + (port_flow(mean) if case.script.leak_definition == "total" else 0.0)
    tidal = shown_tidal_ml(true.tidal_ml / 1000.0, true.leak) * (1.0 + d.wander(n, 0.05, 0.5))
    rate = np.maximum(true.rate + d.wander(n, 1.1, 0.6), inputs.rate_set)
    sensor = case.patient.sensor_bias + d.wander(n, 0.7, 0.8)
    machine = {
        "leak": np.maximum(leak + d.noise(n, 1.0), 0.0),
        "vte": tidal,
        "rr_total": rate,
        "mv": tidal * rate / 1000.0,
        "pip": np.maximum(true.attained_ipap, true.attained_epap) + d.noise(n, 0.25),
        "spont_percent": np.clip(true.triggered + d.noise(n, 4.0), 0.0, 100.0),
    }
    monitor = {
        "spo2": np.clip(100.0 * true.saturation + sensor, 50.0, 100.0),
        "hr": _heart(case, true) + d.wander(n, 2.5, 0.7),
    }
    return {**{k: v * own for k, v in machine.items()}, **monitor}


def device_rows(case: Case, true: Trajectory, inputs: Inputs) -> Iterator[Row]:
    """Device readings as rows, by time, from the first logged minute on."""
    readings = device_readings(case, true, inputs)
    decimals = {"mv": 1, "pip": 1}
    for i in range(max(0, case.script.logged_from - case.script.first), inputs.minutes):
        for channel, every in EVERY_MIN.items():
            value = readings[channel][i]
            if i % every == 0 and not np.isnan(value):
                text = f"{value:.{decimals.get(channel, 0)}f}"
                yield Row(case.script.first + i, channel, text, UNITS[channel], DEVICE)
