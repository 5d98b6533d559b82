"""What is said of a lever: whether it could act, and if not, whether for lack of need, of knowledge or of effect."""

from __future__ import annotations

from typing import Final

from app.look.formats import opened
from app.policy.names import in_force
from app.words import Reader, sentence
from core.judgement.concern import UNCONFIRMED
from core.judgement.shapes import LeverFigure
from core.record.message import Message

DECIDES: Final = "lever.qualified_person_decides"
"""Stands with every lever; a page says it once."""
_NAMED: Final = 3
"""So many open flags a lever names; the others stand among the flags."""
_ENOUGH: Final = "lever.oxygen_enough"
_NO_NEED: Final = frozenset({
    "lever.leak_within_limit", "lever.mask_time_enough", "lever.no_acidosis", "lever.nothing_logged",
    "lever.oxygen_enough", "lever.spo2_in_range",
})  # fmt: skip
_NOT_KNOWN: Final = frozenset({
    "lever.acidosis_not_known", "lever.leak_definition_not_known", "lever.leak_limit_not_known",
    "lever.leak_not_known", "lever.mask_time_not_known", "lever.no_gas", "lever.own_rate_not_known",
    "lever.pressures_not_known", "lever.spo2_not_known",
})  # fmt: skip
_LIMITS: Final = {
    "lever.review_ipap": "review_ipap_cmH2O", "lever.review_epap": "review_epap_cmH2O",
    "lever.review_ti": "review_ti_s", "lever.high_tidal_volume": "vt_ml_per_kg",
    "lever.port_not_cleared": "port_clears_from_cmH2O", "lever.little_mask_time": "mask_share_low",
    "lever.mask_time_enough": "mask_share_low", "lever.rate_in_reach": "rate_in_reach_per_min",
    "lever.rate_no_effect": "rate_in_reach_per_min", "lever.pf_low": "epap_pf_mmHg",
    "lever.leak_over_limit": "leak", "lever.leak_was_over_limit": "leak", "lever.leak_within_limit": "leak",
}  # fmt: skip
"""Which number of the policy a reason rests on."""
_AT_LIMIT: Final = frozenset({
    "lever.fio2_at_maximum", "lever.review_epap", "lever.review_ipap", "lever.review_ti",
})  # fmt: skip
_NOT_FOR_THIS: Final = frozenset({"lever.ti_not_for_this", "lever.traps_air"})


def lever_standing(lever: LeverFigure, reader: Reader) -> str:
    """In a few words whether it could act. Nothing wrong seen in the log is no proof that nothing is wrong."""
    first = lever.why[0].key if lever.why else ""
    if lever.can_act:
        return reader.translate("can act")
    if first in _NO_NEED:
        return reader.translate("to be judged: a flag is open" if lever.flags else "no need seen in what was logged")
    if first in _NOT_KNOWN:
        return reader.translate("not known")
    if any(m.key in _AT_LIMIT for m in lever.limits):
        return reader.translate("at its limit: review first")
    if first in _NOT_FOR_THIS:
        return reader.translate("not for this condition")
    return reader.translate("no effect")


def asks(lever: LeverFigure) -> bool:
    """Whether a page shows it among those to think of: it could act, or a flag is open about what it acts on while
    nothing in the newest values shows a need. Neither stands with those that nobody needs."""
    return lever.can_act or _contradicted(lever)


def _contradicted(lever: LeverFigure) -> bool:
    """Whether an open flag stands against "no need"."""
    first = lever.why[0].key if lever.why else ""
    return not lever.can_act and first in _NO_NEED and bool(lever.flags)


def lever_why(lever: LeverFigure) -> tuple[Message, ...]:
    """Why it could act or not; where a flag stands against "no need", the flag first and no word that all is well."""
    if not _contradicted(lever):
        return lever.why
    more = len(lever.flags) - _NAMED
    others = (Message("lever.flags_more", {"count": more}),) if more > 0 else ()
    return (*lever.flags[:_NAMED], *others, *(m for m in lever.why if m.key != _ENOUGH))


def without_decides(messages: tuple[Message, ...]) -> tuple[Message, ...]:
    """The messages but for who decides, which the page says once."""
    return tuple(m for m in messages if m.key != DECIDES)


def lever_reasons(lever: LeverFigure, reader: Reader) -> tuple[str, ...]:
    """Why it could act or not, and what limits it, a sentence each; a limit says how sure it is where it is not."""
    return tuple(lever_sentence(m, reader) for m in (*lever_why(lever), *without_decides(lever.limits)))


def lever_sentence(message: Message, reader: Reader) -> str:
    """One reason in words; a limit of the policy that is to be confirmed locally says so.

    >>> lever_sentence(Message("lever.review_epap", {"epap": 8.0, "limit": 8.0}), Reader())
    'EPAP 8 cmH2O: review before going past 8 cmH2O [from memory].'
    >>> lever_sentence(Message("tidal_volume.leak_not_known"), Reader())
    'Tidal volume doubtful: leak not known.'
    """
    text, sure = opened(sentence(message, reader)).rstrip("."), _sure_of(message.key)
    return f"{text} [{reader.translate(sure)}]." if sure in UNCONFIRMED else f"{text}."


def _sure_of(key: str) -> str:
    """How sure the limit is that a reason names; "" for one that names none."""
    policy, name = in_force(), _LIMITS.get(key, "")
    if name == "leak":
        return policy.leak.unintentional_limit_L_per_min.sure
    return str(getattr(policy.levers, name).sure) if name else ""
