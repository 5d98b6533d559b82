"""What a gas is asked about before it is taken."""

from math import nan

import pytest

from core.judgement.entry_doubts import gas_doubts
from core.judgement.policy import shipped_policy
from core.record.channels import channel
from core.record.gas_sample import GasSample
from core.record.reading import read_value
from core.record.settings import Settings

ON_35 = Settings("BPAP-ST", 16.0, 6.0, nan, 0.35, nan, 14.0, nan, None)


def asked(typed, already=None):
    readings = []
    for item in typed.split(","):
        key, value, *unit = item.split()
        readings.append(read_value(channel(key), value, *unit))
    return [m.key for m in gas_doubts(readings, ON_35, shipped_policy(), already)]


@pytest.mark.parametrize(
    ("typed", "keys"),
    [
        ("ph 7.31,paco2 50,hco3 25", []),
        ("ph 7.31,paco2 50,hco3 31", ["gas.inconsistent"]),
        ("ph 7.31,paco2 8.3", ["gas.kpa_suspected"]),
        ("ph 7.31,paco2 8.3 kPa", []),
        ("pao2 11", ["gas.kpa_suspected"]),
        ("pao2 8.2 kPa", []),
        ("pao2 38", []),
        ("gas_fio2 50", ["gas.fio2_differs"]),
        ("gas_fio2 40", []),
        ("gas_fio2 35,paco2 92,pao2 160", ["gas.negative_gradient"]),
        ("rr 20", []),
    ],
)
def test_questions(typed, keys):
    assert asked(typed) == keys


def test_values_of_the_same_moment_are_judged_together():
    assert asked("hco3 31", GasSample(at=0, ph=7.31, paco2=50.0)) == ["gas.inconsistent"]
