"""Targets and limits as bands behind a panel's traces: the patient's own targets, else the policy's numbers."""

from __future__ import annotations

from collections.abc import Iterator

from app.chart.shapes import Band
from app.episode.on_screen import EpisodeOnScreen
from app.episode.panels import Panel
from app.episode.traces import shown_as
from app.look.formats import fixed, lately, trimmed
from app.telling.phrases import translate

_BEYOND = 1e6
"""Past every scale: a band with one end reaches to the edge of the panel."""


def bands_of(on: EpisodeOnScreen, panel: Panel) -> tuple[Band, ...]:
    """The bands of a panel, of one unit only: two lying over each other could be told apart by nobody."""
    found: list[Band] = []
    for channel in panel.channels:
        band = _band(on, channel)
        if band is not None and band not in found and all(band.unit == b.unit for b in found):
            found.append(band)
    return tuple(found)


def _band(on: EpisodeOnScreen, channel: str) -> Band | None:
    makers = {
        "spo2": _saturation,
        "ph": _ph,
        "paco2": _paco2,
        "pf": _pf,
        "leak": _leak,
        "rr": _rate,
        "rr_total": _rate,
    }
    return next(iter(makers[channel](on)), None) if channel in makers else None


def _saturation(on: EpisodeOnScreen) -> Iterator[Band]:
    now = on.figures.now
    if now.spo2_target_low is None or now.spo2_target_high is None:
        return
    told = translate("stack", "SpO2 target {low} to {high} %")
    if not now.spo2_target_prescribed:
        told = translate("stack", "SpO2 {low} to {high} %, none prescribed")
    word = told.format(low=trimmed(now.spo2_target_low), high=trimmed(now.spo2_target_high))
    if now.spo2_target_since is not None:  # the band lies over all of the time, the range was another one before
        since = translate("stack", "{word}, since {time}")
        word = since.format(word=word, time=lately(now.spo2_target_since, on.figures.as_of, on.zone))
    yield Band(now.spo2_target_low, now.spo2_target_high, "%", word)


def _ph(on: EpisodeOnScreen) -> Iterator[Band]:
    low, high = on.policy.state.acidotic_below_ph.value, on.policy.state.alkalotic_above_ph.value
    word = translate("stack", "pH {low} to {high}").format(low=fixed(low, 2), high=fixed(high, 2))
    yield Band(low, high, "pH", word)


def _paco2(on: EpisodeOnScreen) -> Iterator[Band]:
    limit, shown = on.policy.state.hypercapnia_mmHg, shown_as("paco2", on.gas_unit)
    high = limit.kpa if shown.unit == "kPa" and limit.kpa is not None else limit.value * shown.factor
    word = translate("stack", "PaCO2 up to {high} {unit}").format(high=fixed(high, shown.decimals), unit=shown.unit)
    yield Band(-_BEYOND, high, shown.unit, word)


def _pf(on: EpisodeOnScreen) -> Iterator[Band]:
    shown = shown_as("pf", on.gas_unit)
    low = on.policy.state.hypoxaemia_pf_mmHg.value * shown.factor
    word = translate("stack", "P/F above {low} {unit}").format(low=fixed(low, shown.decimals), unit=shown.unit)
    yield Band(low, _BEYOND, shown.unit, word)


def _leak(on: EpisodeOnScreen) -> Iterator[Band]:
    limit = on.figures.leak.limit_L_per_min
    if limit is not None:
        yield Band(
            -_BEYOND, limit, "L/min", translate("stack", "leak up to {limit}").format(limit=trimmed(round(limit)))
        )


def _rate(on: EpisodeOnScreen) -> Iterator[Band]:
    rule = on.policy.markers.get("rr_above_25")
    if rule is not None and rule.on and "rr" in rule.limits:
        high = rule.limits["rr"]
        yield Band(-_BEYOND, high, "/min", translate("stack", "RR up to {high}/min").format(high=trimmed(high)))
