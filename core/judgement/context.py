"""What judgement works on: the record cut at a moment, and what the earlier stages found in it.

Stages fill it in order: record (episode, settings, support), gases, responses, trends and scores; then
markers and due items read it whole. Each stage makes a new context; none changes one.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

from core.judgement.anchors import Anchor
from core.judgement.policy import Policy
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import GasFigure, LeakFigure, RatioFigure, ScoreFigure
from core.record.channels import HYPERCAPNIC_RISK
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.settings import SettingsInForce
from core.record.support import SupportTime


@dataclass(frozen=True, slots=True)
class Target:
    """The SpO2 range to keep. `prescribed` is False where it follows from risk alone."""

    low: float
    high: float
    prescribed: bool


@dataclass(frozen=True)
class Context:
    """One episode as of one moment. `episode` holds nothing later than `as_of`.

    `hacor_at_gases` holds HACOR 2017 for each arterial or capillary gas, by the gas's instant.
    """

    episode: Episode
    as_of: Instant
    policy: Policy
    settings: SettingsInForce
    support: SupportTime
    gases: tuple[GasFigure, ...] = ()
    """The blood gases: samples with a pH, a PCO2 or a PO2. The rest judge nothing."""
    samples: tuple[GasFigure, ...] = ()
    """Every sample, a lone lactate among them."""
    anchors: tuple[Anchor, ...] = ()
    responses: tuple[ResponseFigure, ...] = ()
    pf: RatioFigure = field(default_factory=RatioFigure)
    sf: RatioFigure = field(default_factory=RatioFigure)
    rox: RatioFigure = field(default_factory=RatioFigure)
    leak: LeakFigure = field(default_factory=LeakFigure)
    scores: Mapping[str, ScoreFigure] = field(default_factory=dict)
    hacor_at_gases: Mapping[Instant, ScoreFigure] = field(default_factory=dict)

    @cached_property
    def indication(self) -> str | None:
        """Why support is given, as logged."""
        return self.episode.latest_text("indication")

    @cached_property
    def hypercapnic_risk(self) -> bool:
        """At risk of hypercapnia: by indication, by a target prescribed for it, or by a gas that shows it."""
        if self.indication in HYPERCAPNIC_RISK:
            return True
        high = self.episode.latest("target_spo2_high")
        if high is not None and high <= self.policy.oxygen.risk_target_high.value:
            return True
        return any(g.hypercapnic and g.site != "venous" for g in self.gases)

    @cached_property
    def target(self) -> Target:
        """The prescribed SpO2 range, else the one its risk calls for."""
        low, high = self.episode.latest("target_spo2_low"), self.episode.latest("target_spo2_high")
        o = self.policy.oxygen
        low_by_risk, high_by_risk = (
            (o.risk_target_low, o.risk_target_high) if self.hypercapnic_risk else (o.target_low, o.target_high)
        )
        return Target(
            low_by_risk.value if low is None else low,
            high_by_risk.value if high is None else high,
            low is not None and high is not None,
        )

    @property
    def comfort_care(self) -> bool:
        """Comfort is the ceiling: dues for gases rest, evidence is never hidden."""
        return self.episode.latest_text("ceiling_of_care") == "comfort"
