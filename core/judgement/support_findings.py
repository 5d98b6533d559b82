"""The support as it stands: settings in force, since when, hours on the mask."""

from __future__ import annotations

from math import isnan

from core.judgement.shapes import SupportFigure
from core.record.channels import CHANNELS, Group
from core.record.episode import Episode
from core.record.instant import DAY, HOUR, Instant
from core.record.message import Message
from core.record.settings import Settings, SettingsInForce
from core.record.support import SupportTime


def support_figure(
    episode: Episode, settings: SettingsInForce, support: SupportTime, as_of: Instant, silence_h: float = 12.0
) -> SupportFigure:
    """The settings in force and the time on the mask as of a moment.

    `silence_h`: after so many hours without any entry or sample the time on the mask is presumed, and says so.
    """
    now = settings.at(as_of)
    reasons = _reasons(now, support)
    started = support.start is not None and support.start <= as_of
    known_start = started and support.start_recorded
    off = support.break_at(as_of)
    silent = _silent_since(episode, support, as_of, silence_h)
    hours = support.hours_on_mask(support.start, as_of) if known_start and support.start is not None else None
    day = support.hours_last_day(as_of) if _day_is_known(support, as_of) else None
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
        hours_on_mask=hours,
        hours_on_mask_last_24h=day,
        on_mask=support.on_support(as_of),
        break_since=off.start if off is not None else None,
        silent_since=silent,
        hours_presumed=support.hours_on_mask(silent, as_of) if silent is not None and hours is not None else None,
        hours_presumed_last_24h=(
            support.hours_on_mask(max(silent, as_of - DAY), as_of) if silent is not None and day is not None else None
        ),
        reasons=reasons,
    )


def last_logged(episode: Episode) -> Instant | None:
    """The newest moment of every channel but those of the profile; those of the gases are among them."""
    ends = [(key, int(s.t[-1])) for key, s in episode.series.items() if len(s)]
    ends += [(key, int(w.t[-1])) for key, w in episode.words.items() if len(w)]
    return max((at for key, at in ends if CHANNELS[key].group is not Group.PROFILE), default=None)


def _silent_since(episode: Episode, support: SupportTime, as_of: Instant, silence_h: float) -> Instant | None:
    """The last entry or sample, where support is taken to run and nobody has written for so many hours."""
    if not support.on_support(as_of):
        return None
    last = last_logged(episode)
    last = support.start if last is None else last
    return last if last is not None and as_of - last > silence_h * HOUR else None


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
