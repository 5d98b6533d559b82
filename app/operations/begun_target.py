"""The SpO2 range that would hold for an episode that is being begun, by the very rule that holds once it is."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from app.operations.episode import Given, typed_reading
from core.figures.episode_figures import gas_stage, record_stage
from core.judgement.context import Target
from core.judgement.policy import Policy
from core.record.channels import HYPERCAPNIC_RISK
from core.record.entries import Entry, from_reading, recorded
from core.record.episode import build_episode
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import RecordError


@dataclass(frozen=True, slots=True)
class BegunTarget:
    """The range, whether it is that of hypercapnic risk, and whether a gas says so where the indication does not."""

    target: Target
    at_risk: bool
    by_gas: bool
    """A gas shows the risk, the indication does not."""


def begun_target(facts: Mapping[str, str], given: Iterable[Given], now: Instant, policy: Policy) -> BegunTarget:
    """The range that follows from facts and values as typed so far; what cannot be read yet says nothing.

    A gas whose site is not chosen yet counts as one that is not venous: it may not hide a risk.
    """
    entries: list[Entry] = []
    for at, values in ((now, facts), *((g.at, g.values) for g in given)):
        for channel, text in values.items():
            try:
                new = from_reading("begun", at, typed_reading(channel, text), confirmed=True)
            except RecordError:
                continue
            entries.append(recorded(new, len(entries) + 1, str(len(entries) + 1), now))
    ctx = gas_stage(record_stage(build_episode("begun", standing(entries), ()), now, policy))
    by_gas = any(g.hypercapnic and g.site != "venous" for g in ctx.gases)
    return BegunTarget(ctx.target, ctx.hypercapnic_risk, by_gas and ctx.indication not in HYPERCAPNIC_RISK)
