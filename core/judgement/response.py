"""Did it work? Every anchor judged by the gases that can judge it (rules of judgement 1 to 3).

A gas counts once for a headline: for the latest anchor before it. Earlier anchors list it as not attributable.
Each gas is judged twice: against its anchor's baseline, and against the baseline of the start.
"""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from core.judgement import arms
from core.judgement import response_reasons as why
from core.judgement.anchors import Anchor
from core.judgement.arms import Oxygenation
from core.judgement.context import Context, Target
from core.judgement.policy import Policy
from core.judgement.response_baseline import (
    VENOUS,
    Baseline,
    baseline,
    minute,
    of_site,
    timing,
    venous_baseline,
)
from core.judgement.response_headline import Headline, headline
from core.judgement.response_shapes import JudgedGas, ResponseFigure, SinceStart, Step
from core.judgement.response_since import Earlier, StartBaseline, difference, since_start
from core.judgement.shapes import GasFigure
from core.judgement.stretches import stretch_around, stretch_before
from core.judgement.vitals_near import Found, VitalsNear
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.settings import ROOM_AIR


def judge_responses(ctx: Context, anchors: tuple[Anchor, ...]) -> tuple[ResponseFigure, ...]:
    """The response to every anchor, by time. Reads `ctx.gases`, vitals, settings and support."""
    judge = _Judge(ctx, anchors)
    return tuple(judge.response(i) for i in range(len(anchors)))


@dataclass(frozen=True)
class _Judge:
    ctx: Context
    anchors: tuple[Anchor, ...]

    @cached_property
    def vitals(self) -> VitalsNear:
        return VitalsNear(self.ctx.episode, self.ctx.policy)

    @cached_property
    def arterial(self) -> tuple[GasFigure, ...]:
        return of_site(self.ctx.gases, venous=False)

    @cached_property
    def venous(self) -> tuple[GasFigure, ...]:
        return of_site(self.ctx.gases, venous=True)

    @cached_property
    def target(self) -> Target:
        return self.ctx.target

    @cached_property
    def at_risk(self) -> bool:
        return self.ctx.hypercapnic_risk

    @cached_property
    def since(self) -> dict[Instant, SinceStart]:
        """Every arterial or capillary gas on support after the start, against the start."""
        if not self.anchors:
            return {}
        first = self.anchors[0]
        start = self._start_baseline(first)
        found: dict[Instant, SinceStart] = {}
        earlier = Earlier()
        for gas in self.arterial:
            if gas.off_support or (minute(gas.at) <= minute(first.first_at) and not first.running_before):
                continue
            seen = self._seen(first, start.gas, gas)
            found[gas.at] = since_start(start, gas, earlier, seen, self.ctx.policy)
            earlier.add(gas)
        return found

    def _start_baseline(self, first: Anchor) -> StartBaseline:
        if first.running_before:
            reference = next((g for g in self.arterial if not g.off_support), None)
            return StartBaseline(reference, reference=True)
        found = baseline(self.ctx, first, self.arterial, self._untils[0])
        return StartBaseline(found.gas, found.why)

    @cached_property
    def _untils(self) -> tuple[Instant | None, ...]:
        """For each anchor, the first step of the next one that gases can count for."""
        out: list[Instant | None] = []
        later: Instant | None = None
        for anchor in reversed(self.anchors):
            out.append(later)
            later = anchor.first_at if anchor.judges else later
        return tuple(reversed(out))

    @cached_property
    def _steps(self) -> tuple[tuple[int, int, Step], ...]:
        """Every step of the anchors that act: its minute, its anchor's index, the step; by time."""
        made = (
            (minute(step.at), i, step)
            for i, a in enumerate(self.anchors)
            if a.judges and not (a.kind == "start" and a.running_before)
            for step in a.steps
        )
        return tuple(sorted(made, key=lambda row: row[0]))

    def response(self, index: int) -> ResponseFigure:
        anchor, until = self.anchors[index], self._untils[index]
        base = baseline(self.ctx, anchor, self.arterial, until) if anchor.judges else Baseline(None)
        judged = self._gases(index, base, until) if anchor.judges else ()
        said = headline(self.ctx, anchor, base, judged, until) if anchor.judges else _no_effect(anchor)
        if said.headline == arms.NOT_YET and self._oxygen_by_spo2_alone(anchor):
            said = self._by_spo2(anchor, until) or said
        rules, gas, by_at = self.ctx.policy.response, base.gas, self._by_moment
        return ResponseFigure(
            anchor_at=anchor.at, anchor=anchor.kind, first_at=anchor.first_at, steps=anchor.steps,
            effects=anchor.effects,
            window_from=anchor.at + int(rules.window_from_min.value * MINUTE),
            window_to=anchor.at + int(rules.window_to_min.value * MINUTE),
            baseline_at=gas.at if gas else None, baseline_ph=gas.ph if gas else None,
            baseline_paco2_mmHg=gas.paco2_mmHg if gas else None, baseline_pf_mmHg=gas.pf_mmHg if gas else None,
            baseline_early=base.early,
            co2_arm_active=gas is not None and arms.acute_hypercapnia(gas, self.ctx.policy),
            oxygen_arm_active=gas is not None and arms.hypoxaemia(gas, self.ctx.policy),
            headline=said.headline, headline_gas_at=said.gas_at, state=said.state, why=said.why, gases=judged,
            superseded_at=until,
            in_doubt=_rests_on_doubt(base.gas, by_at.get(said.gas_at or -1)),
            gain_lost=any(j.at == said.gas_at and j.since_start.gain_lost for j in judged if j.attributable),
        )  # fmt: skip

    def _gases(self, index: int, base: Baseline, until: Instant | None) -> tuple[JudgedGas, ...]:
        anchor = self.anchors[index]
        limit = minute(anchor.at) + self.ctx.policy.response.window_to_min.value
        first = minute(anchor.first_at) - anchor.running_before  # the reference may be of the first minute
        out: list[JudgedGas] = []
        for gas in self.ctx.gases[bisect_right(self._gas_minutes, first) :]:
            m = minute(gas.at)
            if until is None or m <= minute(until):
                out.append(self._judged(index, base, gas))
            elif m <= limit:
                out.append(self._not_attributable(index, base, gas))
            else:
                break
        return tuple(out)

    @cached_property
    def _by_moment(self) -> dict[Instant, GasFigure]:
        return {g.at: g for g in self.ctx.gases}

    @cached_property
    def _gas_minutes(self) -> list[int]:
        return [minute(g.at) for g in self.ctx.gases]

    def _judged(self, index: int, base: Baseline, gas: GasFigure) -> JudgedGas:
        anchor = self.anchors[index]
        minutes, when = timing(self.ctx, anchor, gas)
        since = self.since.get(gas.at, _NOT_COMPARED)
        plain = _listed(gas, JudgedGas(gas.at, minutes, when, state=gas.state, since_start=since))
        if gas.site == VENOUS:
            return self._venous(anchor, gas, plain)
        reason = _unjudged(base, gas)
        if reason or base.gas is None:
            return replace(plain, why=(*reason, *why.doubts(base.gas, gas)))
        seen = self._seen(anchor, base.gas, gas)
        co2 = arms.co2_arm(base.gas, gas, self.ctx.policy)
        oxygen = arms.oxygen_arm(base.gas, gas, seen, self.ctx.policy, co2, by_spo2=anchor.oxygen_only)
        active = arms.acute_hypercapnia(base.gas, self.ctx.policy) or (anchor.oxygen_only and self.at_risk)
        also = self._also_changed(index, base.gas.at, gas.at)
        apart = arms.pf_comparable(base.gas, gas, self.ctx.policy)
        found = arms.verdict(co2, oxygen, active, anchor.oxygen_only)
        verdict = arms.sure(found, base.gas, gas)
        unsure = (why.in_doubt(base.gas, gas),) if verdict != found else ()
        if found is None and co2.verdict is not None and not active:
            unsure = (why.co2_not_active(base.gas),)
        return JudgedGas(
            gas.at, minutes, when, difference(base.gas.ph, gas.ph),
            difference(base.gas.paco2_mmHg, gas.paco2_mmHg),
            None if apart else difference(base.gas.pf_mmHg, gas.pf_mmHg),
            verdict, arms.sure(co2.verdict, base.gas, gas), arms.sure(oxygen.verdict, base.gas, gas), gas.state, True,
            since, also, (*unsure, *co2.why, *oxygen.why, *_cautions(base, gas, when, since, also),
                          *why.doubts(base.gas, gas)),
            active or arms.acute_hypercapnia(gas, self.ctx.policy), gas.ph, gas.paco2_mmHg, gas.pf_mmHg,
        )  # fmt: skip

    def _not_attributable(self, index: int, base: Baseline, gas: GasFigure) -> JudgedGas:
        """A gas after a later anchor: listed, with what changed in between, never judged for this one."""
        minutes, when = timing(self.ctx, self.anchors[index], gas)
        also = self._also_changed(index, self.anchors[index].at, gas.at)
        reason = Message("response.not_attributable", {"gas_at": gas.at, "steps": len(also)})
        listed = _listed(gas, JudgedGas(
            gas.at, minutes, when, state=gas.state, attributable=False, also_changed=also, why=(reason,),
            since_start=self.since.get(gas.at, _NOT_COMPARED),
        ))  # fmt: skip
        if base.gas is None or gas.site == VENOUS or gas.off_support:
            return listed
        return _with_deltas(listed, self.ctx.policy, base.gas, gas)

    def _venous(self, anchor: Anchor, gas: GasFigure, plain: JudgedGas) -> JudgedGas:
        """Compared with venous only, and never a verdict."""
        said = [why.about_gas("venous_only", gas)]
        if gas.ph is not None and gas.ph < self.ctx.policy.state.severe_below_ph.value:
            said.append(Message("response.confirm_arterially", {"gas_at": gas.at, "ph": gas.ph}))
        base = venous_baseline(self.ctx, anchor, self.venous)
        if base is None:
            return replace(plain, why=tuple(said))
        co2 = arms.co2_arm(base, gas, self.ctx.policy)
        compared = _with_deltas(plain, self.ctx.policy, base, gas)
        return replace(compared, co2_arm=arms.sure(co2.verdict, base, gas), why=(*said, *co2.why))

    def _also_changed(self, index: int, after: Instant, before: Instant) -> tuple[Step, ...]:
        """The steps of other anchors between two gases: what else could have made the difference."""
        steps = self._steps
        low = bisect_left(steps, minute(after), key=lambda row: row[0])
        high = bisect_left(steps, minute(before), key=lambda row: row[0])
        return tuple(step for _, i, step in steps[low:high] if i != index)

    def _seen(self, anchor: Anchor, base: GasFigure | None, gas: GasFigure) -> Oxygenation:
        spo2_before, rr_before, given_before = self._before(anchor, base)
        spo2_after, rr_after, given_after = self._after[gas.at]
        return Oxygenation(
            spo2_before, spo2_after, rr_before, rr_after, self.target.low, self.target.high, given_before, given_after
        )

    def _before(self, anchor: Anchor, base: GasFigure | None) -> tuple[Found | None, Found | None, bool]:
        """SpO2, rate and whether oxygen was given before an anchor: near the anchor, else near its baseline."""
        vitals, breaks = self.vitals, self.ctx.support.breaks
        low, last = stretch_before(breaks, anchor.kind, anchor.first_at)
        given = self._oxygen_given(anchor.first_at - 1)
        if base is None:
            return vitals.spo2(last, low, last), vitals.rate(last, low, last), given
        base_low, base_high = stretch_around(breaks, base.at)
        early = base.at > anchor.first_at
        base_high = min(base_high, base.at if early else anchor.first_at)
        spo2 = None if early else vitals.spo2(last, low, last)
        rate = vitals.rate(base.at, base_low, base_high) or vitals.rate(last, low, last)
        return spo2 or vitals.spo2(base.at, base_low, base_high), rate, given

    @cached_property
    def _after(self) -> dict[Instant, tuple[Found | None, Found | None, bool]]:
        """SpO2, rate and whether oxygen was given at each gas, with no other anchor and no break between."""
        acting = [(a, until) for a, until in zip(self.anchors, self._untils, strict=True) if a.judges]
        starts = [minute(a.first_at) for a, _ in acting]
        out: dict[Instant, tuple[Found | None, Found | None, bool]] = {}
        for gas in self.arterial:
            i = bisect_left(starts, minute(gas.at)) - 1
            low, high = stretch_around(self.ctx.support.breaks, gas.at)
            high = min(high, gas.at + 30 * MINUTE, self.ctx.as_of)
            if i >= 0:
                anchor, until = acting[i]
                low = max(low, anchor.at if gas.at > anchor.at else anchor.first_at)
                high = high if until is None else min(high, until)
            spo2, rate = (look(gas.at, low, high) for look in (self.vitals.spo2, self.vitals.rate))
            out[gas.at] = spo2, rate, self._oxygen_given(gas.at)
        return out

    @cached_property
    def _oxygen(self) -> tuple[list[int], list[bool]]:
        """When the oxygen changed, and whether it was more than room air from then on."""
        fio2, flow = self.ctx.settings.fio2, self.ctx.settings.o2_flow
        given = np.where(np.isnan(fio2.v), flow.on(fio2.t) > 0, fio2.v > ROOM_AIR)
        return fio2.t.tolist(), given.tolist()

    def _oxygen_given(self, at: Instant) -> bool:
        moments, given = self._oxygen
        i = bisect_right(moments, at)
        return i > 0 and given[i - 1]

    def _oxygen_by_spo2_alone(self, anchor: Anchor) -> bool:
        return anchor.oxygen_only and not self.at_risk

    def _by_spo2(self, anchor: Anchor, until: Instant | None) -> Headline | None:
        """A change of oxygen without a gas, in a patient not at hypercapnic risk: SpO2 in the window answers."""
        rules = self.ctx.policy.response
        opens = anchor.at + int(rules.window_from_min.value * MINUTE)
        closes = min(anchor.at + int(rules.window_to_min.value * MINUTE), self.ctx.as_of,
                     until if until is not None else self.ctx.as_of,
                     stretch_around(self.ctx.support.breaks, anchor.at)[1])  # fmt: skip
        if closes < opens:
            return None
        after = _last(self.vitals, closes, opens)
        seen = Oxygenation(
            self._before(anchor, None)[0], after, None, None, self.target.low,
            self.target.high, self._oxygen_given(anchor.first_at - 1), self._oxygen_given(anchor.at),
        )  # fmt: skip
        arm = arms.spo2_arm(seen, self.ctx.policy)
        if arm.verdict is None:
            return None
        return Headline(arm.verdict, None, None, (Message("response.by_spo2_alone", {}), *arm.why))


def _last(vitals: VitalsNear, closes: Instant, opens: Instant) -> Found | None:
    """The newest SpO2 in a window, looked for from its end backwards."""
    at = closes
    while at >= opens:
        found = vitals.spo2(at, opens - 1, closes)
        if found is not None:
            return found
        at -= 30 * MINUTE
    return None


def _rests_on_doubt(base: GasFigure | None, gas: GasFigure | None) -> bool:
    """Whether a value of the headline's gas, or of what it is compared with, is marked as doubtful."""
    return gas is not None and (gas.doubt or gas.disputed or (base is not None and (base.doubt or base.disputed)))


_NOT_COMPARED = SinceStart(reasons={"verdict": Message("response.not_compared_with_start", {})})


def _unjudged(base: Baseline, gas: GasFigure) -> tuple[Message, ...]:
    """Why a gas that could count does not judge the anchor; empty where it does."""
    if gas.off_support:
        return tuple(why.off_support(gas))
    if base.gas is None:
        return (base.why,) if base.why is not None else ()
    if gas.at <= base.gas.at:
        key = "serves_as_baseline" if gas is base.gas else "before_baseline"
        return (why.about_gas(key, gas),)
    return ()


def _cautions(base: Baseline, gas: GasFigure, when: str, since: SinceStart, also: tuple[Step, ...]) -> list[Message]:
    """What has to be said beside a verdict."""
    said = [base.why] if base.early and base.why else []
    if when == "early":
        said.append(why.about_gas("early", gas))
    said += [since.reasons[key] for key in ("gain_lost", "oxygen_gain_lost") if key in since.reasons]
    if gas.site == "capillary":
        said.append(why.about_gas("capillary", gas))
    if also:
        said.append(Message("response.also_changed", {"steps": len(also), "last_at": also[-1].at}))
    return said


def _listed(gas: GasFigure, judged: JudgedGas) -> JudgedGas:
    """With the gas's own values."""
    return replace(judged, ph=gas.ph, paco2_mmHg=gas.paco2_mmHg, pf_mmHg=gas.pf_mmHg)


def _with_deltas(judged: JudgedGas, policy: Policy, base: GasFigure, gas: GasFigure) -> JudgedGas:
    apart = arms.pf_comparable(base, gas, policy)
    return replace(
        judged,
        delta_ph=difference(base.ph, gas.ph),
        delta_paco2_mmHg=difference(base.paco2_mmHg, gas.paco2_mmHg),
        delta_pf_mmHg=None if apart else difference(base.pf_mmHg, gas.pf_mmHg),
    )


def _no_effect(anchor: Anchor) -> Headline:
    channels = ", ".join(sorted({s.channel for s in anchor.steps}))
    return Headline(arms.NOT_JUDGED, None, None, (Message("response.no_effect", {"channels": channels}),))
