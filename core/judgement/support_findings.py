"""The support as it stands: settings in force, since when, hours on the mask."""

from __future__ import annotations

from math import isnan

from core.judgement.shapes import SupportFigure
from core.record.episode import Episode
from core.record.instant import DAY, Instant
from core.record.message import Message
from core.record.settings import Settings, SettingsInForce
from core.record.support import SupportTime


def support_figure(
    episode: Episode, settings: SettingsInForce, support: SupportTime, as_of: Instant
) -> SupportFigure:
    """The settings in force and the time on the mask as of a moment."""
    now = settings.at(as_of)
    reasons = _reasons(now, support)
    started = support.start is not None and support.start <= as_of
    known_start = started and support.start_recorded
    off = support.break_at(as_of)
    return SupportFigure(
        mode=now.mode,
        ipap_cmH2O=_number(now.ipap) if now.is_bilevel else None,
        epap_cmH2O=_number(now.low_pressure),
        pressure_support_cmH2O=_number(now.pressure_support),
        fio2=_number(now.fio2),
        o2_flow_L_per_min=_number(now.o2_flow),
        rate_set_per_min=_number(now.rate_set),
        ti_s=_number(now.ti),
        interface=now.interface,
        since=support.start if known_start else None,
        ended_at=support.end,
        end_reason=episode.latest_text("end_reason") if support.end is not None else None,
        last_change_at=max((t for t in settings.moments if t <= as_of), default=None),
        hours_on_mask=support.hours_on_mask(support.start, as_of) if known_start and support.start else None,
        hours_on_mask_last_24h=support.hours_last_day(as_of) if _day_is_known(support, as_of) else None,
        on_mask=support.on_support(as_of),
        break_since=off.start if off is not None else None,
        reasons=reasons,
    )


def _day_is_known(support: SupportTime, as_of: Instant) -> bool:
    """The last 24 h are known when the start is recorded, or logging has gone on for longer than a day."""
    return support.start is not None and (support.start_recorded or support.start <= as_of - DAY)


def _reasons(now: Settings, support: SupportTime) -> dict[str, Message]:
    reasons: dict[str, Message] = {}
    if now.mode is None:
        reasons["mode"] = Message("support.mode_not_recorded", {})
    if not now.is_bilevel:
        reasons["ipap_cmH2O"] = Message("support.one_pressure", {"mode": now.mode})
    elif isnan(now.ipap):
        reasons["ipap_cmH2O"] = Message("support.not_recorded", {"channel": "ipap"})
    if isnan(now.low_pressure):
        reasons["epap_cmH2O"] = Message("support.not_recorded", {"channel": "epap"})
    if isnan(now.pressure_support):
        reasons["pressure_support_cmH2O"] = Message("support.not_recorded", {"channel": "ipap"})
    if isnan(now.fio2):
        key = "support.not_recorded" if isnan(now.o2_flow) else "support.fio2_not_known_on_flow"
        reasons["fio2"] = Message(key, {"channel": "fio2", "o2_flow": _number(now.o2_flow)})
    if isnan(now.rate_set):
        reasons["rate_set_per_min"] = Message("support.not_recorded", {"channel": "rate_set"})
    if isnan(now.ti):
        reasons["ti_s"] = Message("support.not_recorded", {"channel": "ti"})
    if support.start is None:
        key = "support.not_started"
    elif not support.start_recorded:
        key = "support.start_not_recorded"
    else:
        return reasons
    for name in ("since", "hours_on_mask", "hours_on_mask_last_24h"):
        reasons[name] = Message(key, {})
    return reasons


def _number(value: float) -> float | None:
    return None if isnan(value) else float(value)
