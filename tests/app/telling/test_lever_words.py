"""A lever that could not act says why first: that nothing was logged is no proof that nothing is wrong."""

import pytest

from app.telling import lever_words
from app.telling.lever_words import lever_reasons, lever_standing
from app.words import Reader
from app.words.judgements import LEVERS
from core.judgement.policy_sections import Levers
from core.judgement.shapes import LeverFigure
from core.record.message import Message
from tests.support.sample_ward import sample_ward

READER = Reader()


def idle(why: str, limit: str = "raise_ipap_alike") -> LeverFigure:
    limits = (Message(f"lever.{limit}"), Message(lever_words.DECIDES))
    return LeverFigure("epap", can_act=False, why=(Message(f"lever.{why}"),), present=None, limits=limits)


@pytest.mark.parametrize(
    ("why", "limit", "said"),
    [
        ("nothing_logged", "raise_ipap_alike", "no need seen in what was logged"),
        ("no_acidosis", "review_ipap", "no need seen in what was logged"),
        ("leak_within_limit", "raise_ipap_alike", "no need seen in what was logged"),
        ("leak_not_known", "raise_ipap_alike", "not known"),
        ("own_rate_not_known", "raise_ipap_alike", "not known"),
        ("rate_no_effect", "raise_ipap_alike", "no effect"),
        ("mode_has_no_rate", "raise_ipap_alike", "no effect"),
        ("acidosis", "review_ipap", "at its limit: review first"),
        ("spo2_below_range", "fio2_at_maximum", "at its limit: review first"),
        ("traps_air", "raise_ipap_alike", "not for this condition"),
    ],
)
def test_lack_of_need_of_knowledge_and_of_effect_are_told_apart(why: str, limit: str, said: str) -> None:
    assert lever_standing(idle(why, limit), READER) == said


def test_every_reason_in_the_lists_is_one_that_has_words() -> None:
    listed = lever_words._NO_NEED | lever_words._NOT_KNOWN | lever_words._AT_LIMIT | lever_words._NOT_FOR_THIS
    assert listed <= LEVERS.keys()


def test_on_the_sample_night_no_effect_is_said_of_a_rate_alone() -> None:
    found = {(x.key, lever_standing(x, READER)) for f in sample_ward() for x in f.levers if not x.can_act}
    assert {key for key, said in found if said == "no effect"} == {"backup_rate"}
    assert ("secretions", "no need seen in what was logged") in found


def test_who_decides_is_left_to_the_page() -> None:
    for f in sample_ward():
        for lever in f.levers:
            assert lever.limits[-1].key == lever_words.DECIDES
            assert not any("qualified person" in said for said in lever_reasons(lever, READER))


def test_a_limit_that_is_to_be_confirmed_says_so_in_every_lever() -> None:
    seen = {m.key: said for f in sample_ward() for x in f.levers for m in (*x.why, *x.limits)
            if (said := lever_words.lever_sentence(m, READER)).endswith("].")}  # fmt: skip
    assert seen["lever.rate_no_effect"].endswith("[from memory].")
    assert seen["lever.leak_within_limit"].endswith("[common practice].")
    assert all("[" not in said for key, said in seen.items() if key not in lever_words._LIMITS)
    fields = {"leak", *Levers.__struct_fields__}
    assert set(lever_words._LIMITS.values()) <= fields
    assert fields <= {*lever_words._LIMITS.values()}, "a limit of levers that no text marks"
