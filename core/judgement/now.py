"""How the patient stands now: state, headline, relapse, oxygen, off the mask, and how old the newest entry is."""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement import arms
from core.judgement.context import Context
from core.judgement.markers.observed import Observed
from core.judgement.markers.range_in_force import newest_change
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import GasFigure, NowFigure
from core.judgement.support_findings import last_logged
from core.record.channels import HYPERCAPNIC_RISK


def now_figure(seen: Observed) -> NowFigure:
    """How the patient stands as of the moment. P/F in mmHg."""
    ctx, gases = seen.ctx, seen.gases
    with_pf = newest_pf(seen)
    told = headline_response(ctx.responses)
    judging = newest_judging(seen)
    change = seen.once(newest_change)
    since = judging.since_start if judging is not None else None
    off = ctx.support.break_at(ctx.as_of) if _running(ctx) else None
    return NowFigure(
        state=next((g.state for g in reversed(gases) if g.ph is not None), None),
        ever_acidotic=any(g.state in ("severe", "acidotic") for g in gases),
        oxygen_failure=oxygen_failure(seen),
        oxygen_failed_before=oxygen_failed_before(seen),
        pf_mmHg=with_pf.pf_mmHg if with_pf is not None else None,
        pf_at=with_pf.at if with_pf is not None else None,
        headline=told.headline if told is not None else None,
        headline_at=told.headline_gas_at if told is not None else None,
        gain_lost=told is not None and told.gain_lost,
        since_start=since.verdict if since is not None else None,
        since_start_gain_lost=since is not None and since.gain_lost,
        off_mask_since=off.start if off is not None else None,
        last_logged_at=last_logged(ctx.episode),
        spo2_target_low=ctx.target.low,
        spo2_target_high=ctx.target.high,
        spo2_target_prescribed=ctx.target.prescribed,
        spo2_target_since=change.at if change is not None else None,
        spo2_target_before=change.before if change is not None else None,
        spo2_target_by_gas=change is not None and change.by_gas,
    )


def headline_response(responses: Iterable[ResponseFigure]) -> ResponseFigure | None:
    """The response whose headline is the newest: by its gas, then by its anchor; else the last, which waits."""
    responses = tuple(responses)
    told = [r for r in responses if r.headline_gas_at is not None]
    if told:
        return max(told, key=lambda r: (r.headline_gas_at or 0, r.anchor_at))
    return responses[-1] if responses else None


def newest_judging(seen: Observed) -> JudgedGas | None:
    """The newest arterial or capillary gas on support, as the anchor it counts for lists it, early or not."""
    for gas in reversed(seen.on_support_gases):
        if gas.at in seen.attributed:
            return seen.attributed[gas.at][-1].judged
    return None


def oxygen_failure(seen: Observed) -> bool:
    """Hypoxaemic failure: newest arterial P/F on support at or below 300, newest gas not acutely hypercapnic."""
    with_pf = newest_pf(seen)
    if with_pf is None or not arms.hypoxaemia(with_pf, seen.policy):
        return False
    newest = next((g for g in reversed(seen.gases) if g.ph is not None), None)
    return newest is None or not arms.acute_hypercapnia(newest, seen.policy)


def oxygen_failed_before(seen: Observed) -> bool:
    """Whether CO2 rose in a patient who had failed by oxygen alone, and whose P/F is still at or below 300.

    Not in one who is at hypercapnic risk by indication: there an acute hypercapnia is the failure itself.
    """
    newest = newest_pf(seen)
    if newest is None or not arms.hypoxaemia(newest, seen.policy) or seen.ctx.indication in HYPERCAPNIC_RISK:
        return False
    gases = [g for g in seen.gases if g.ph is not None or g.pf_mmHg is not None]
    rose = next((g.at for g in gases if arms.acute_hypercapnia(g, seen.policy)), None)
    return rose is not None and any(g.at < rose and arms.hypoxaemia(g, seen.policy) for g in gases)


def newest_pf(seen: Observed) -> GasFigure | None:
    """The newest gas on support with a P/F."""
    return next((g for g in reversed(seen.on_support_gases) if g.pf_mmHg is not None), None)


def _running(ctx: Context) -> bool:
    end = ctx.support.end
    return end is None or end > ctx.as_of
