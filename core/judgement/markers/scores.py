"""Scores as markers: HACOR inside its population, a rise of NEWS2 over the patient's own low."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator

from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import from_gases
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.spells import Point, Spell
from core.judgement.policy_sections import MarkerRule
from core.judgement.score_findings import hacor_updated_at
from core.judgement.scores import failure_percent
from core.judgement.shapes import GasFigure, ScoreFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message, Value


def _hacor(seen: Observed) -> Iterator[tuple[GasFigure, ScoreFigure, list[float]]]:
    """HACOR at each gas on support, with the minutes from the start and from the anchor it belongs to."""
    start = seen.support.start
    for gas in seen.on_support_gases:
        score = seen.ctx.hacor_at_gases.get(gas.at)
        if score is None or score.lowest is None:
            continue
        after = [a.judged.minutes for a in seen.attributed.get(gas.at, ()) if a.response.effects]
        if start is not None and seen.support.start_recorded:
            after.append(gas.at // MINUTE - start // MINUTE)
        yield gas, score, after


def hacor_limit_passed(score: ScoreFigure, limit: float) -> bool:
    """The lowest possible points are over the limit: what is missing can only add."""
    return score.lowest is not None and score.lowest > limit


def _answers(score: ScoreFigure, limit: float, *, fits: bool) -> bool:
    """Whether a score tells if its limit is passed, and in whom: a range that holds the limit does not, nor points
    over it of a patient whom the score was not made for (a PaCO2 that rises ends no flag), nor those of a gas without
    the P/F, pH or PaCO2 that its population asks for. Surely at or below the limit always does."""
    if score.highest is None or score.highest <= limit:
        return True
    return fits and "population" not in score.reasons and hacor_limit_passed(score, limit)


def hacor_above_5(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """HACOR above 5 at 1-2 h after the start or the anchor, by its lowest possible points."""
    low, high = rule.limits["from_min"], rule.limits["to_min"]
    return _score_spells(seen, rule, lambda minutes: any(low <= m <= high for m in minutes))


def hacor_above_5_later(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """HACOR above 5 later than that: it was also validated at 12, 24 and 48 h."""
    return _score_spells(seen, rule, lambda minutes: bool(minutes) and min(minutes) > rule.limits["from_min"])


def hacor_8_or_more(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """HACOR of 8 or more (above 7): the band in which nine of ten failed, from 45 min after the start on."""
    return _score_spells(seen, rule, lambda minutes: bool(minutes) and max(minutes) >= rule.limits["from_min"])


def hacor_updated_above_10_5(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Updated HACOR above 10.5 at 1-2 h (failure in one of two), by its lowest possible points; off until the ward
    switches the score on, since its added points are from memory."""
    if not seen.policy.scores.hacor_updated:
        return []
    low, high, limit = rule.limits["from_min"], rule.limits["to_min"], rule.limits["points"]
    points = []
    for gas, _, minutes in _hacor(seen):
        score = hacor_updated_at(seen.ctx, gas)
        over = hacor_limit_passed(score, limit)
        fits = score.population == "inside" and inside(seen, rule.population, gas.at)
        heard = fits or rule.outside == "remark"
        if (over and not any(low <= m <= high for m in minutes)) or not _answers(score, limit, fits=heard):
            points.append(Point(gas.at, None))
            continue
        told = (_score_told("hacor_updated", score, limit, gas.at), *say.gas_doubts(gas)) if over else ()
        points.append(Point(gas.at, over, told, not fits))
    return from_gases(seen, points)


def _score_spells(seen: Observed, rule: MarkerRule, timely: Callable[[list[float]], bool]) -> list[Spell]:
    limit = rule.limits["points"]
    points = []
    for gas, score, minutes in _hacor(seen):
        fits = score.population == "inside" and inside(seen, rule.population, gas.at)
        outside = score.population == "outside" or not fits
        over = hacor_limit_passed(score, limit)
        heard = fits or rule.outside == "remark"
        if (over and not timely(minutes)) or not _answers(score, limit, fits=heard):
            points.append(Point(gas.at, None))
            continue
        points.append(Point(gas.at, over, _told(gas, score, limit) if over else (), outside))
    return from_gases(seen, points)


def _told(gas: GasFigure, score: ScoreFigure, limit: float) -> tuple[Message, ...]:
    said = [_score_told("hacor", score, limit, gas.at)]
    if score.lowest is not None:
        percent = failure_percent(score.lowest)
        failed: dict[str, Value] = {"score": "hacor", "points": score.lowest, "percent": percent}
        said.append(Message("evidence.failed_percent", failed))
    return (*said, *say.gas_doubts(gas))


def _score_told(name: str, score: ScoreFigure, limit: float, at: Instant) -> Message:
    values: dict[str, Value] = {
        "score": name, "points": score.points, "lowest": score.lowest, "highest": score.highest,
        "limit": limit, "at": at, "missing": ", ".join(score.missing),
    }  # fmt: skip
    return Message("evidence.score", values)


def to_complete(seen: Observed) -> tuple[GasFigure, ScoreFigure] | None:
    """The newest gas on support whose HACOR could pass the limit only with what is missing, inside its population."""
    rule = seen.policy.markers.get("hacor_above_5")
    found = [(g, s) for g, s, _ in _hacor(seen)]
    if rule is None or not found:
        return None
    gas, score = found[-1]
    limit = rule.limits["points"]
    open_ended = score.points is None and score.highest is not None and score.highest > limit
    if not open_ended or hacor_limit_passed(score, limit) or score.population != "inside":
        return None
    return (gas, score) if inside(seen, rule.population, gas.at) else None
