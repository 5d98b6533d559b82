"""How an episode stands in the words of its heading: its state, the verdict, and what must not go without them.

A gain that was lost and a sum since the start that says otherwise stand beside the verdict wherever it stands:
"better" alone would hide a relapse.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.look.formats import fixed, gas_pressure, lately
from app.look.theme import GasState, Verdict, state_word, verdict_of, verdict_word
from app.telling.drawn import drawn_short
from app.telling.gas_doubt import state_in_doubt
from app.telling.phrases import state_of, translate
from app.words.verdict_loss import LOST_SINCE, with_loss
from core.judgement.now import headline_response
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.record.instant import Instant
from core.record.message import Message

_DECIDES = frozenset({
    "response.over_correction", "response.tiring_not_excluded", "response.gain_lost", "response.not_better_in_doubt",
    "response.towards_normal",
})  # fmt: skip
_CLEAR = (Verdict.BETTER, Verdict.WORSE, Verdict.MIXED, Verdict.OVER_CORRECTION)


@dataclass(frozen=True, slots=True)
class Headline:
    """The newest verdict; `since_start` against the baseline of the start, None where that is not known."""

    verdict: Verdict
    gain_lost: bool = False
    since_start: Verdict | None = None
    lost_later: bool = False
    """Whether a newer gas than the verdict's lost the gain: then nothing says that it is still better."""
    doubtful: bool = False
    """Whether its gas, or what it is compared with, holds a doubtful value: it is never said without that."""

    @property
    def word(self) -> str:
        """The verdict, whether a gain was lost, which comes first, and a doubt: gain lost, still better."""
        later = self.gain_lost and self.lost_later and self.verdict is Verdict.BETTER
        said = translate("headline", LOST_SINCE) if later else verdict_with_loss(self.verdict, lost=self.gain_lost)
        return in_doubt(said) if self.doubtful else said

    @property
    def short(self) -> str:
        """For a narrow column: no clear change, worse since start."""
        if self.since_start not in _CLEAR or self.since_start is self.verdict:
            return self.word
        against = verdict_word(self.since_start)
        return translate("headline", "{verdict}, {against} since start").format(verdict=self.word, against=against)

    @property
    def sign(self) -> Verdict:
        """The sign to draw: never that of the verdict alone where it would hide something worse."""
        return sign_of(self.verdict, lost=self.gain_lost, since_start=self.since_start)


def headline(f: EpisodeFigures) -> Headline | None:
    """The verdict that stands for the episode now; None before any change."""
    told = headline_response(f.responses)
    if told is None:
        return None
    judged = judged_by(told)
    lost = lost_gain(told) or f.now.gain_lost
    later = f.now.since_start_gain_lost and not lost
    against = f.now.since_start or (judged.since_start.verdict if judged is not None else None)
    since = verdict_of(against) if against is not None else None
    return Headline(verdict_of(told.headline), lost or later, since, later, told.in_doubt)


def verdict_sentences(f: EpisodeFigures) -> tuple[str, ...]:
    """The verdict and that since the start, in words; nothing before any change."""
    told = headline(f)
    if told is None:
        return ()
    if told.since_start is None:
        return (told.word,)
    against = translate("headline", "since the start: {verdict}").format(verdict=verdict_word(told.since_start))
    return told.word, against


def since_start_words(judged: JudgedGas) -> str:
    """What a gas says against the start, to stand behind its verdict; "" where it cannot be compared."""
    if judged.since_start.verdict is None:
        return ""
    word = verdict_word(verdict_of(judged.since_start.verdict))
    return translate("headline", "; since the start: {verdict}").format(verdict=word)


def judged_by(response: ResponseFigure) -> JudgedGas | None:
    """The gas that a headline rests on."""
    return next((g for g in reversed(response.gases) if g.at == response.headline_gas_at), None)


def deciding(why: Sequence[Message]) -> tuple[Message, ...]:
    """The reasons that stand beside a verdict: each change beyond noise, and what is lost or in doubt; the first
    reason where there is none. A pH within noise alone would contradict a verdict that PaCO2 gave."""
    found = tuple(m for m in why if m.key in _DECIDES or m.values.get("direction") in ("up", "down"))
    return found or tuple(why[:1])


def lost_gain(response: ResponseFigure) -> bool:
    """Whether the gas of the headline, or a later one, had lost what was gained."""
    judged = judged_by(response)
    return response.gain_lost or (judged is not None and judged.since_start.gain_lost)


def in_doubt(verdict: str) -> str:
    """A verdict in words that rests on a doubtful value."""
    return translate("headline", "{verdict} (doubtful value)").format(verdict=verdict)


def verdict_with_loss(verdict: Verdict, *, lost: bool) -> str:
    """A verdict in words, the gain that was lost before a better."""
    return translate("headline", with_loss(verdict.value, lost=True)) if lost else verdict_word(verdict)


def sign_of(verdict: Verdict, *, lost: bool, since_start: Verdict | None = None) -> Verdict:
    """A better with its gain lost is drawn as mixed, no clear change that adds up to worse as worse."""
    if verdict is Verdict.NO_CLEAR_CHANGE and since_start is Verdict.WORSE:
        return Verdict.WORSE
    if verdict in (Verdict.BETTER, Verdict.NO_CLEAR_CHANGE) and (lost or since_start is Verdict.WORSE):
        return Verdict.MIXED
    return verdict


def judged_sign(judged: JudgedGas | None) -> Verdict | None:
    """The sign to draw at a gas; None where it judges nothing."""
    if judged is None or judged.verdict is None:
        return None
    since = judged.since_start
    against = verdict_of(since.verdict) if since.verdict is not None else None
    return sign_of(verdict_of(judged.verdict), lost=since.gain_lost, since_start=against)


def ever_acidotic(f: EpisodeFigures) -> bool:
    """Whether there was an acidosis that could have resolved."""
    return f.now.ever_acidotic or any(g.state in ("severe", "acidotic") for g in f.gases)


def acidotic_before(f: EpisodeFigures, at: Instant) -> bool:
    """Whether an acidosis was seen before a moment: what it says of a gas of then could have resolved."""
    seen = [g.at for g in f.gases if g.state in ("severe", "acidotic")]
    return min(seen) < at if seen else f.now.ever_acidotic


def gas_state_word(f: EpisodeFigures, gas: GasFigure) -> str:
    """The state of a gas; what was not acidotic before it has not resolved, and a pH above its limits is no normal
    one."""
    if gas.state != "resolved":
        return state_word(state_of(gas.state))
    if gas.ph_above is not None:
        return translate("headline", "not acidotic, pH above {limit}").format(limit=fixed(gas.ph_above, 2))
    return state_word(state_of(gas.state)) if acidotic_before(f, gas.at) else translate("headline", "not acidotic")


def response_state_word(f: EpisodeFigures, response: ResponseFigure) -> str:
    """The state of the gas that a headline rests on."""
    gas = next((g for g in f.gases if g.at == response.headline_gas_at and g.state == response.state), None)
    if gas is None:
        gas = GasFigure(response.headline_gas_at or response.anchor_at, "", state=response.state)
    return gas_state_word(f, gas)


def pf_word(f: EpisodeFigures, gas: GasFigure, gas_unit: str, zone: str) -> str:
    """The newest P/F where oxygen is what fails, or failed before CO2 rose too; "" elsewhere. With its time where not
    of this gas."""
    fails = f.now.oxygen_failure or f.now.oxygen_failed_before
    if not fails or f.now.pf_mmHg is None:
        return ""
    told = f"P/F {gas_pressure(f.now.pf_mmHg, gas_unit)}"
    if f.now.pf_at is None or f.now.pf_at == gas.at:
        return told
    return translate("headline", "{pf} at {time}").format(pf=told, time=lately(f.now.pf_at, f.as_of, zone))


def beside_pf(pf: str, state: str) -> str:
    """The P/F, then the state of the pH by its own name: nothing may let a low P/F read as resolved. A pH above its
    limits says so by itself.

    >>> beside_pf("P/F 273 mmHg", "resolved"), beside_pf("", "resolved")
    ('P/F 273 mmHg; not acidotic', 'resolved')
    >>> beside_pf("P/F 140 mmHg", "not acidotic, pH above 7.45")
    'P/F 140 mmHg; pH above 7.45'
    """
    if not pf:
        return state
    plain = translate("headline", "not acidotic")
    of_ph = plain if state == state_word(GasState.RESOLVED) else state.removeprefix(f"{plain}, ")
    return f"{pf}; {of_ph}"


def state_now(f: EpisodeFigures, gas: GasFigure, gas_unit: str, zone: str) -> str:
    """The state in a few words, the oxygen first where it is what fails, a doubt before both: P/F 107 mmHg; not
    acidotic."""
    state = beside_pf(pf_word(f, gas, gas_unit, zone), gas_state_word(f, gas))
    if gas.off_support:
        last = translate("headline", "{state}, last gas {drawn}")
        state = last.format(state=state, drawn=drawn_short(gas))
    return state_in_doubt(gas, state)


def off_mask_word(f: EpisodeFigures, zone: str) -> str:
    """That the mask is off, since when; "" where it is on or support has ended."""
    since = f.now.off_mask_since or f.support.break_since
    if since is None or f.support.ended_at is not None:
        return ""
    return translate("headline", "mask off since {time}").format(time=lately(since, f.as_of, zone))
