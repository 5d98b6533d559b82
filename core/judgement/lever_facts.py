"""What the levers look at: settings in force, the newest gas, SpO2, rate, leak, tidal volume, events."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import isnan, nan

from core.judgement import arms
from core.judgement.context import Context
from core.judgement.leak_trend import leak_figure
from core.judgement.score_inputs import barriers
from core.judgement.shapes import GasFigure, LeakFigure
from core.judgement.tidal_volume import Measured, measured_at, newest
from core.judgement.trend import span_start
from core.judgement.vitals_near import Found, VitalsNear
from core.physiology.ventilation import base_weight, predicted_body_weight
from core.record.instant import DAY, HOUR, Instant
from core.record.message import Message
from core.record.settings import ROOM_AIR, Settings

DECIDES = Message("lever.qualified_person_decides")
UNREST = ("secretions", "vomiting", "agitation")
DEPRESSANTS = ("sedative", "opioid", "sedation")


@dataclass(frozen=True)
class Facts:
    """Facts of one context as of its moment, found when asked for."""

    ctx: Context

    @cached_property
    def now(self) -> Settings:
        return self.ctx.settings.at(self.ctx.as_of)

    @cached_property
    def gas(self) -> GasFigure | None:
        """The newest gas on support that stands for arterial in pH and PCO2."""
        return next((g for g in reversed(self.ctx.gases) if g.site != "venous" and not g.off_support), None)

    @property
    def acidotic(self) -> bool:
        """The newest gas shows acute hypercapnia."""
        return self.gas is not None and arms.acute_hypercapnia(self.gas, self.ctx.policy)

    @property
    def acidosis_off_support(self) -> GasFigure | None:
        """The newest gas of all, where it was drawn off support and shows acute hypercapnia."""
        newest = next((g for g in reversed(self.ctx.gases) if g.site != "venous"), None)
        shows = newest is not None and newest.off_support and arms.acute_hypercapnia(newest, self.ctx.policy)
        return newest if shows else None

    @property
    def acidosis_missing(self) -> tuple[str, ...]:
        """What the newest gas lacks to show or rule out acute hypercapnia; nothing where one half rules it out."""
        gas = self.gas
        if gas is None or self.acidotic or gas.hypercapnic is False:
            return ()
        if gas.ph is not None and gas.ph >= self.ctx.policy.state.acidotic_below_ph.value:
            return ()
        known = {"ph": gas.ph is not None, "paco2": gas.paco2_mmHg is not None}
        return tuple(name for name, is_known in known.items() if not is_known)

    @cached_property
    def with_pf(self) -> GasFigure | None:
        """The newest gas with a P/F, none drawn off support."""
        return next((g for g in reversed(self.ctx.gases) if g.pf_mmHg is not None and not g.off_support), None)

    @property
    def hypoxaemic(self) -> bool:
        """The newest P/F on support is at or below 300, or SpO2 is below its range."""
        return self.spo2_low or (self.with_pf is not None and arms.hypoxaemia(self.with_pf, self.ctx.policy))

    @property
    def spo2_low(self) -> bool:
        """SpO2 is below its range on the oxygen that is given."""
        return self.spo2 is not None and self.spo2.value < self.ctx.target.low

    @property
    def severe_oxygen_failure(self) -> bool:
        """P/F at or below 200 without acute hypercapnia: EPAP may act even with SpO2 in its range."""
        pf = self.with_pf.pf_mmHg if self.with_pf is not None else None
        return pf is not None and pf <= self.ctx.policy.levers.epap_pf_mmHg.value and not self.acidotic

    @cached_property
    def _vitals(self) -> VitalsNear:
        return VitalsNear(self.ctx.episode, self.ctx.policy)

    @cached_property
    def spo2(self) -> Found | None:
        return self._vitals.spo2(self.ctx.as_of, 0, self.ctx.as_of)

    @cached_property
    def own_rate(self) -> Found | None:
        return self._vitals.rate(self.ctx.as_of, 0, self.ctx.as_of)

    @cached_property
    def leak(self) -> LeakFigure:
        found = self.ctx.leak
        return leak_figure(self.ctx) if found.latest_at is None and not found.reasons else found

    @property
    def leak_over(self) -> bool:
        limit, latest = self.leak.limit_L_per_min, self.leak.latest_L_per_min
        return self.leak.over_since is not None or (limit is not None and latest is not None and latest > limit)

    @property
    def leak_back_within(self) -> bool:
        """Over the limit by minutes, while the newest median or value is not: nobody may be told that it is."""
        limit, latest = self.leak.limit_L_per_min, self.leak.latest_L_per_min
        return limit is not None and latest is not None and latest <= limit

    @cached_property
    def tidal_volume(self) -> Measured | None:
        """The newest tidal volume on the mask with its trust: a median, or one logged value."""
        at = newest(self.ctx, "vte")
        if at is None:
            return None
        walls = barriers(tuple(step.at for a in self.ctx.anchors for step in a.steps), self.ctx.support)
        return measured_at(self.ctx, "vte", at, walls)

    @cached_property
    def tidal_volume_per_kg(self) -> float | None:
        """mL per kg of predicted weight; None without a volume, height or sex."""
        height, sex = self.ctx.episode.latest("height"), self.ctx.episode.latest_text("sex")
        volume = self.tidal_volume.value.value if self.tidal_volume is not None else None
        weight = float(predicted_body_weight(nan if height is None else height, base_weight(sex)))
        return volume / weight if isinstance(volume, float) and not isnan(weight) else None

    @property
    def oxygen_given(self) -> bool:
        return self.now.fio2 > ROOM_AIR if not isnan(self.now.fio2) else self.now.o2_flow > 0

    @cached_property
    def mask_share(self) -> tuple[float, float] | None:
        """Hours on the mask, of the hours since the start or of the last 24; None where the start is not known."""
        support, as_of = self.ctx.support, self.ctx.as_of
        if support.start is None or not support.start_recorded or support.start >= as_of:
            return None
        since = max(support.start, as_of - DAY)
        return support.hours_on_mask(since, as_of), (as_of - since) / HOUR

    def recent_events(self) -> list[tuple[str, str, Instant]]:
        """Unrest and sedation logged within the trend's span: channel, text, moment; newest first."""
        start, found = span_start(self.ctx), []
        for channel in (*UNREST, "drug"):
            words = self.ctx.episode.text(channel)
            for t, text in zip(words.t.tolist(), words.v, strict=True):
                depresses = any(d in text.casefold() for d in DEPRESSANTS)
                if t >= start and (channel != "drug" or depresses):
                    found.append((channel, text, t))
        comfort = self.ctx.episode.text("comfort")
        if len(comfort) and comfort.v[-1] in ("poor", "not tolerated") and int(comfort.t[-1]) >= start:
            found.append(("comfort", comfort.v[-1], int(comfort.t[-1])))
        return sorted(found, key=lambda row: -row[2])
