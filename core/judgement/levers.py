"""Which levers could act now, in the order of rules of judgement 8, each with its reason and what limits it.

Never an order, never a dose: a qualified person decides, and every lever says so.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from math import isnan

from core.judgement.context import Context
from core.judgement.lever_facts import DECIDES, Facts
from core.judgement.lever_flags import flags_on
from core.judgement.setting_change import number
from core.judgement.shapes import FlagFigure, LeverFigure
from core.judgement.vitals_near import Found
from core.record.message import Message, Value

LONG_TI = frozenset({"neuromuscular", "chest wall", "obesity hypoventilation"})
RATE_MODES = frozenset({"BPAP-ST", "BPAP-T", "pressure control", "volume-assured"})


def levers(ctx: Context, flags: Iterable[FlagFigure] = ()) -> tuple[LeverFigure, ...]:
    """The levers of an episode on support, in the order to think of them; empty before and after support.

    Each names the open ones of `flags` that are about what it acts on.
    """
    support = ctx.support
    if support.start is None or support.start > ctx.as_of or support.end is not None:
        return ()
    facts, flags = Facts(ctx), tuple(flags)
    found = (
        lever(facts)
        for lever in (_fio2, _mask, _secretions, _time_on_mask, _pressure_support, _backup_rate,
                      _inspiratory_time, _epap)
    )  # fmt: skip
    return tuple(replace(lever, flags=flags_on(lever.key, flags)) for lever in found)


def _lever(
    key: str, can_act: bool, why: list[Message], present: Message | None, limits: list[Message] | None = None
) -> LeverFigure:
    return LeverFigure(key, can_act, tuple(why), present, (*(limits or ()), DECIDES))


def _say(key: str, **values: Value) -> Message:
    return Message(f"lever.{key}", values)


def _fio2(f: Facts) -> LeverFigure:
    """Lower an FiO2 above what the range needs; below the range, oxygen is too little."""
    target = f.ctx.target
    present = _say("present_oxygen", fio2=number(f.now.fio2), o2_flow=number(f.now.o2_flow))
    if f.spo2 is None:
        return _lever("fio2", False, [_say("spo2_not_known")], present)
    facts = _saturation(f, f.spo2)
    if f.spo2.value > target.high and f.oxygen_given:
        return _lever("fio2", True, [Message("lever.oxygen_above_need", facts)], present)
    if f.spo2.value >= target.low:
        return _lever("fio2", False, [Message("lever.spo2_in_range", facts)], present)
    limits = [_say("hypercapnic_risk", high=target.high)] if f.ctx.hypercapnic_risk else []
    if f.now.fio2 >= 1.0:
        limits.append(_say("fio2_at_maximum"))
    return _lever("fio2", not f.now.fio2 >= 1.0, [Message("lever.spo2_below_range", facts)], present, limits)


def _saturation(f: Facts, spo2: Found) -> dict[str, Value]:
    """The SpO2 that every lever speaks of, with its range; `since` where it is a median."""
    return {
        "spo2": spo2.value,
        "low": f.ctx.target.low,
        "high": f.ctx.target.high,
        "at": spo2.at,
        "since": spo2.since,
    }


def _leak(f: Facts) -> dict[str, Value]:
    """The leak that every lever speaks of: of when it is, and since when where it is a median."""
    of = f.leak.latest_median_of
    return {"leak": f.leak.latest_L_per_min, "at": f.leak.latest_at, "since": of[0] if of is not None else None}


def _own(own: Found) -> dict[str, Value]:
    """The patient's own rate, counted or a median of the device."""
    return {"own_rate": own.value, "at": own.at, "since": own.since, "counted": not own.device}


def _mask(f: Facts) -> LeverFigure:
    """Leak, mask, exhalation port."""
    leak, policy = f.leak, f.ctx.policy
    told = _leak(f)
    shown = _say("present_leak", **told, limit=leak.limit_L_per_min, definition=leak.definition)
    present = shown if leak.latest_L_per_min is not None else None
    why: list[Message] = []
    if f.leak_over:
        key = "leak_was_over_limit" if f.leak_back_within else "leak_over_limit"
        why.append(_say(key, **told, limit=leak.limit_L_per_min, over_since=leak.over_since))
    if leak.probable_breaks and leak.probable_breaks[-1][1] is None:
        why.append(_say("probable_break", since=leak.probable_breaks[-1][0]))
    clears = policy.levers.port_clears_from_cmH2O.value
    if f.now.low_pressure < clears:
        why.append(_say("port_not_cleared", epap=f.now.low_pressure, least=clears))
    if why:
        return _lever("mask", True, why, present)
    if leak.latest_L_per_min is None:
        return _lever("mask", False, [_say("leak_not_known")], present)
    key = "leak_limit_not_known" if leak.limit_L_per_min is None else "leak_within_limit"
    key = "leak_definition_not_known" if leak.definition is None else key
    return _lever("mask", False, [_say(key, **told, limit=leak.limit_L_per_min)], present)


def _secretions(f: Facts) -> LeverFigure:
    """Secretions, sedation, asynchrony."""
    events = f.recent_events()
    why = [_say("event", channel=channel, text=text, at=at) for channel, text, at in events]
    quiet = _say("nothing_logged", hours=f.ctx.policy.trend.span_h.value)
    return _lever("secretions", bool(events), why or [quiet], None)


def _time_on_mask(f: Facts) -> LeverFigure:
    share, least = f.mask_share, f.ctx.policy.levers.mask_share_low.value
    if share is None:
        return _lever("time_on_mask", False, [_say("mask_time_not_known")], None)
    hours, of_hours = share
    present = _say("present_mask_time", hours=hours, of_hours=of_hours)
    off = f.ctx.support.break_at(f.ctx.as_of)
    why: list[Message] = []
    if f.acidotic and off is not None:
        why.append(_say("off_mask_acidotic", since=off.start))
    if f.acidotic and hours < least * of_hours:
        why.append(_say("little_mask_time", hours=hours, of_hours=of_hours, least=least))
    if (drawn_off := f.acidosis_off_support) is not None:
        told = {"ph": drawn_off.ph, "paco2_mmHg": drawn_off.paco2_mmHg, "at": drawn_off.at}
        why.append(_say("acidosis_off_support", **told, minutes=drawn_off.back_on_minutes))
    enough = [_say("mask_time_enough", hours=hours, of_hours=of_hours, least=least)]
    return _lever("time_on_mask", bool(why), why or (enough if f.acidotic else _acidosis(f)), present)


def _acidosis(f: Facts) -> list[Message]:
    gas = f.gas
    if gas is None:
        return [_say("no_gas")]
    if f.acidosis_missing:
        return [_say("acidosis_not_known", at=gas.at, missing=", ".join(f.acidosis_missing))]
    if not f.acidotic:
        return [_say("no_acidosis", at=gas.at, ph=gas.ph, paco2_mmHg=gas.paco2_mmHg)]
    return [_say("acidosis", ph=gas.ph, paco2_mmHg=gas.paco2_mmHg, at=gas.at)]


def _pressure_support(f: Facts) -> LeverFigure:
    policy, now = f.ctx.policy.levers, f.now
    present = _say("present_support", pressure_support=number(now.pressure_support), ipap=number(now.ipap))
    why, limits = _acidosis(f), []
    if now.is_cpap:
        why.append(_say("no_pressure_support"))
    if now.is_bilevel and isnan(now.pressure_support):
        return _lever("pressure_support", False, [_say("pressures_not_known")], present)
    full = now.is_bilevel and now.ipap >= policy.review_ipap_cmH2O.value
    if full:
        limits.append(_say("review_ipap", ipap=now.ipap, limit=policy.review_ipap_cmH2O.value))
    if f.leak_over:
        limits.append(_say("leak_first", **_leak(f)))
    limits += _high_volume(f)
    return _lever("pressure_support", f.acidotic and not full, why, present, limits)


def _high_volume(f: Facts) -> list[Message]:
    """A tidal volume that is large already in hypoxaemic failure, with its doubt."""
    per_kg, volume, limit = f.tidal_volume_per_kg, f.tidal_volume, f.ctx.policy.levers.vt_ml_per_kg.value
    if not f.hypoxaemic or volume is None or per_kg is None or per_kg <= limit:
        return []
    given = volume.value
    since = given.median_of[0] if given.median_of is not None else None
    said = _say("high_tidal_volume", vt_per_kg=per_kg, limit=limit, at=given.at, since=since)
    return [said, *([volume.doubt] if volume.doubt is not None else [])]


def _backup_rate(f: Facts) -> LeverFigure:
    """A rate only where it would take effect: the patient's own rate must be in its reach."""
    now, reach = f.now, f.ctx.policy.levers.rate_in_reach_per_min.value
    found = f.own_rate
    present = _say("present_rate", rate_set=number(now.rate_set))
    if found is not None:
        present = _say("present_rates", rate_set=number(now.rate_set), **_own(found))
    if not now.is_bilevel or (now.mode is not None and now.mode not in RATE_MODES):
        return _lever("backup_rate", False, [_say("mode_has_no_rate", mode=now.mode)], present)
    if found is None:
        return _lever("backup_rate", False, [_say("own_rate_not_known")], present)
    of_setting = not isnan(now.rate_set) and now.rate_set > reach
    bound = now.rate_set if of_setting else reach
    if found.value >= bound:
        key = "rate_above_backup" if of_setting else "rate_no_effect"
        return _lever("backup_rate", False, [_say(key, **_own(found), reach=bound)], present)
    key = "rate_below_backup" if of_setting else "rate_in_reach"
    why = [*_acidosis(f), _say(key, **_own(found), reach=bound)]
    limits = [_say("traps_air")] if f.ctx.indication == "copd" else []
    return _lever("backup_rate", f.acidotic, why, present, limits)


def _inspiratory_time(f: Facts) -> LeverFigure:
    """Longer only in neuromuscular, chest wall or obesity hypoventilation; in COPD it traps air."""
    limit, ti = f.ctx.policy.levers.review_ti_s.value, f.now.ti
    present = _say("present_ti", ti=number(ti))
    if f.ctx.indication not in LONG_TI:
        key = "traps_air" if f.ctx.indication == "copd" else "ti_not_for_this"
        return _lever("inspiratory_time", False, [_say(key)], present)
    if not f.now.is_bilevel:
        return _lever("inspiratory_time", False, [_say("mode_has_no_rate", mode=f.now.mode)], present)
    full = ti >= limit
    limits = [_say("review_ti", ti=ti, limit=limit)] if full else []
    return _lever("inspiratory_time", f.acidotic and not full, [*_acidosis(f), _say("ti_may_help")], present, limits)


def _epap(f: Facts) -> LeverFigure:
    """EPAP acts on oxygen and the upper airway; IPAP goes up alike, or pressure support falls."""
    limit, low = f.ctx.policy.levers.review_epap_cmH2O.value, f.now.low_pressure
    present = _say("present_epap", epap=number(low))
    if isnan(low):
        return _lever("epap", False, [_say("pressures_not_known")], present)
    limits = [_say("raise_ipap_alike")] if f.now.is_bilevel else []
    full = low >= limit
    if full:
        limits.append(_say("review_epap", epap=low, limit=limit))
    why = _recruiting(f)
    if f.ctx.indication == "obesity hypoventilation" and f.acidotic:
        why.append(_say("upper_airway"))
    if f.leak_over:
        limits.append(_say("leak_first", **_leak(f)))
    return _lever("epap", bool(why) and not full, why or _oxygen_enough(f), present, limits)


def _recruiting(f: Facts) -> list[Message]:
    """Why EPAP may act on oxygen: SpO2 below its range on the oxygen given, or P/F at or below 200 in hypoxaemic
    failure. A P/F that is merely reduced while SpO2 keeps its range asks for nothing."""
    why: list[Message] = []
    if f.spo2 is not None and f.spo2_low:
        why.append(Message("lever.spo2_below_range", _saturation(f, f.spo2)))
    if f.severe_oxygen_failure and f.with_pf is not None:
        limit = f.ctx.policy.levers.epap_pf_mmHg.value
        why.append(_say("pf_low", pf=f.with_pf.pf_mmHg, at=f.with_pf.at, limit=limit))
    return [*why, _say("hypoxaemia")] if why else []


def _oxygen_enough(f: Facts) -> list[Message]:
    """Why not: the same SpO2 as the oxygen lever shows, or that it is not known."""
    if f.spo2 is None:
        return [_say("spo2_not_known"), *([] if f.with_pf is None else [_say("oxygen_enough")])]
    over = f.spo2.value > f.ctx.target.high
    seen = [] if over else [Message("lever.spo2_in_range", _saturation(f, f.spo2))]
    return [*seen, _say("oxygen_enough")]
