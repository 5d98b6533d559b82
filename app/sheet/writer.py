"""What every page of a handover says alike: how an episode stands, its support, moments in the reader's zone."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Final

from app.look import formats
from app.operations.handover import Handover
from app.telling.certainty import starred
from app.telling.drawn import drawn_word
from app.telling.finding_names import marker_name
from app.telling.gas_doubt import rests_on_doubt
from app.telling.headline import ever_acidotic
from app.telling.language import in_language as tr
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.figures.shift import Event, ShiftFigures
from core.judgement.shapes import EpisodeFigures, FlagFigure
from core.record.instant import MINUTE

STATES: Final = {"severe": "Severe acidosis", "acidotic": "Acidotic", "resolved": "Not acidotic"}
"""A gas that is not acidotic may still be a bad one: in a heading "resolved" would say too much."""

SKIN_OVERDUE: Final = "skin_check_overdue"
QUIET: Final = 30 * MINUTE
"""A record that ends so long before the shift does is said to."""
_STRENGTH = {"escalate": 0, "concern": 1, "remark": 2}


def state_head(state: str | None) -> str:
    """The state of a gas as a heading says it."""
    return tr(STATES.get(state or "", "State not known"))


class SheetWriter:
    """Turns one handover into words."""

    def __init__(self, handover: Handover, reader: Reader) -> None:
        self._h = handover
        self._reader = reader
        self._lines = FigureLines(reader)

    def _standing(self, f: EpisodeFigures) -> str:
        """The last gas that tells the state, and the state."""
        gases = [g for g in f.gases if g.site != "venous"]
        if not gases:
            return tr("No arterial or capillary gas recorded.")
        last = gases[-1]
        state = state_head(last.state)
        if last.state == "resolved" and last.ph_above is not None:
            state += tr(", pH above {fixed}").format(fixed=formats.fixed(last.ph_above, 2))
        pf = f", P/F {self._lines.pressure(last.pf_mmHg)}" if last.pf_mmHg is not None else ""
        if (f.now.oxygen_failure or f.now.oxygen_failed_before) and f.now.pf_mmHg is not None:
            first = "P/F" if ever_acidotic(f) else tr("Hypoxaemic: P/F")
            dated = f.now.pf_at is not None and f.now.pf_at != last.at
            at = tr(" at {moment}").format(moment=self._moment(f.now.pf_at)) if dated and f.now.pf_at else ""
            state, pf = f"{first} {self._lines.pressure(f.now.pf_mmHg)}{at}; {lowered(state)}", ""
        off = tr(", last gas {drawn}").format(drawn=drawn_word(last)) if last.off_support else ""
        values = f"pH {self._lines.ph(last)}, PaCO2 {self._lines.paco2(last)}{pf} at {self._moment(last.at)}"
        doubt = tr("Doubtful gas. ") if rests_on_doubt(last) else ""
        return f"{doubt}{state}{off}: {values}"

    def _support_now(self, f: EpisodeFigures) -> str:
        s = f.support
        if s.ended_at is not None:
            return tr("Support ended {wall}").format(wall=formats.wall(s.ended_at, self._reader.zone)) + (
                f", {s.end_reason}" if s.end_reason else ""
            )
        text = self._lines.settings(s)
        if s.break_since is None:
            return text
        told = tr("{settings}; OFF THE MASK since {time}")
        return told.format(settings=text, time=self._clock(s.break_since))

    def _who(self, f: EpisodeFigures) -> str:
        p = f.profile
        age, indication = p.get("age"), p.get("indication")
        parts = (
            formats.quantity("age", age) if age is not None else tr("age not recorded"), word_of(p.get("sex"), "sex"),
            formats.quantity("indication", indication) if indication else tr("indication not recorded"),
        )  # fmt: skip
        return ", ".join(parts)

    def _remark(self, f: FlagFigure) -> str:
        name = starred(marker_name(f.marker, self._reader), f.sure)
        return tr("{flag}, since {moment}").format(flag=name, moment=self._moment(f.since))

    def _calls(self, s: ShiftFigures) -> tuple[str, ...]:
        """Every call and its answer, those of earlier shifts that may still be waited for first."""
        before = (tr("{moment} (before this shift) {call}").format(moment=self._moment(e.at), call=_call(e))
                  for e in s.told_before)  # fmt: skip
        return (*before, *(f"{self._moment(e.at)} {_call(e)}" for e in s.told))

    def _clock(self, at: int) -> str:
        return formats.clock(at, self._reader.zone)

    def _moment(self, at: int) -> str:
        return self._reader.time(at)


def _call(told: Event) -> str:
    return formats.told_words(told.words or tr("somebody"))


def quiet_since(s: ShiftFigures) -> int | None:
    """When the record of a running episode ended, where that is well before the shift's end."""
    at = s.now.now.last_logged_at
    if at is None or s.now.support.ended_at is not None or s.end - at <= QUIET:
        return None
    return at


def limits_of_care(profile: Mapping[str, float | str | None]) -> str:
    """How far treatment goes, in whole words: full support must not be taken for a full ceiling of anything else."""
    ceiling = formats.quantity("ceiling_of_care", profile.get("ceiling_of_care") or tr(formats.ABSENT))
    decided = profile.get("resuscitation")
    resuscitation = formats.choice_word(str(decided)) if decided else tr("resuscitation: not recorded")
    return tr("Ceiling of care: {ceiling}; {resuscitation}.").format(ceiling=ceiling, resuscitation=resuscitation)


def is_limited(profile: Mapping[str, float | str | None]) -> bool:
    """Whether anything is withheld: who reads only the bold print must read that."""
    open_ended = ("full", "for resuscitation", "not recorded", None, "")
    return any(profile.get(k) not in open_ended for k in ("ceiling_of_care", "resuscitation"))


def strength(f: FlagFigure) -> tuple[int, int]:
    """The order of flags: the strongest first, then the oldest."""
    return (_STRENGTH.get(f.tier, 3), f.since)


def lowered(text: str) -> str:
    """A sentence inside another."""
    return text[:1].lower() + text[1:]


def opened(text: str) -> str:
    """The words as a sentence begins."""
    return text[:1].upper() + text[1:]


def word_of(value: float | str | None, name: str) -> str:
    """A fact, or that it was not recorded."""
    return str(value) if value else tr("{name} not recorded").format(name=name)
