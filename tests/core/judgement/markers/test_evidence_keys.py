"""The list of message keys is whole: the words of the window are made from it."""

from pathlib import Path

from hypothesis import given
from hypothesis import strategies as st

from core.judgement.markers.evidence import KEYS, is_above, is_below, tenths
from core.judgement.policy_sections import PressureLimit
from core.physiology.pressure import tenths_of_kpa

ROOM = Path(__file__).parents[4] / "core" / "judgement"


def test_every_key_of_the_list_is_used_and_no_other():
    source = "".join(p.read_text("utf-8") for p in (*ROOM.glob("markers/*.py"), *ROOM.glob("due*.py"),
                     ROOM / "concern.py", ROOM / "flags.py") if p.name != "evidence.py")  # fmt: skip
    made = source + (ROOM / "markers" / "evidence.py").read_text("utf-8").partition("def value_is")[2]
    unused = [k for k in KEYS if f'"{k}"' not in made and not k.startswith(("due.mask_check", "due.oxygen_review"))]
    assert unused == []


@given(st.floats(5, 250))
def test_one_pressure_is_compared_like_an_array_of_them(mmhg):
    assert tenths(mmhg) == tenths_of_kpa(mmhg)
    assert not is_below(float("nan"), PressureLimit(45, 6.0))
    assert not is_above(float("nan"), PressureLimit(45, 6.0))
