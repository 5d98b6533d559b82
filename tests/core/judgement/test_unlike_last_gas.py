"""A gas very unlike this patient's last is asked about: it may be another patient's."""

import pytest

from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.judgement.unlike_last_gas import unlike_last_gas
from core.record.log_line import read_line
from tests.support.log import NO_SETTINGS, episode, moment

LAST = "01:00 site arterial ph 7.49 paco2 32"


def asked(typed, at="02:00", log=LAST, policy=None):
    line = read_line(typed, now=moment(at), zone="UTC", in_force=NO_SETTINGS)
    return unlike_last_gas(line.readings, moment(at), episode(log), policy or shipped_policy())


@pytest.mark.parametrize(
    ("log", "typed", "at", "asks"),
    [
        (LAST, "ph 7.10 paco2 95", "02:00", True),
        (LAST, "ph 7.29 paco2 32", "02:00", True),  # 0.20
        (LAST, "ph 7.30 paco2 40", "02:00", False),
        (LAST, "ph 7.30", "02:00", False),
        (LAST, "ph 7.29", "02:00", True),
        (LAST, "paco2 62", "02:00", True),  # 30 mmHg
        (LAST, "paco2 61", "02:00", False),
        (LAST, "pao2 40", "02:00", False),
        (LAST, "ph 7.10 paco2 95", "06:59", True),
        (LAST, "ph 7.10 paco2 95", "07:01", False),  # beyond six hours
        (LAST, "ph 7.10 paco2 95", "00:30", True),  # a late entry: the gas after it is compared too
        (LAST, "ph 7.10 paco2 95", "01:00", False),  # the same gas: "two values" asks there
        (LAST, "site venous ph 7.10 paco2 95", "02:00", False),
        ("01:00 site venous ph 7.49 paco2 32", "ph 7.10 paco2 95", "02:00", False),
        ("01:00 site venous ph 7.49 paco2 32", "site venous ph 7.10 paco2 95", "02:00", True),
        ("01:00 ph 7.30 paco2 48", "ph 7.32 paco2 68", "02:00", True),  # bicarbonate 23 and 34
        ("01:00 ph 7.20 paco2 95", "ph 7.35 paco2 66", "03:00", False),  # a good answer to support
        ("01:00 spo2 91", "ph 7.10 paco2 95", "02:00", False),
        ("", "ph 7.10 paco2 95", "02:00", False),
    ],
)
def test_when_it_asks(log, typed, at, asks):
    assert [m.key for m in asked(typed, at, log)] == ["gas.unlike_last"] * asks


def test_the_nearest_gas_is_compared():
    log = "00:30 ph 7.10 paco2 95\n01:45 ph 7.45 paco2 38"
    (said,) = asked("ph 7.12 paco2 90", "02:00", log)
    assert said.values["at"] == moment("01:45")


def test_it_says_what_it_is_unlike():
    (said,) = asked("ph 7.10 paco2 95")
    assert said.values == pytest.approx(
        {"at": moment("01:00"), "ph": 7.10, "ph_then": 7.49, "paco2": 95, "paco2_then": 32}
    )


def test_a_value_that_joins_a_gas_is_judged_with_the_rest_of_it():
    log = LAST + "\n02:00 ph 7.32"
    assert asked("paco2 68", "02:00", log)


def test_its_numbers_are_the_policys_and_say_that_they_are_common_practice():
    wide = read_policy(shipped_text().replace("unlike_ph_by = { value = 0.2", "unlike_ph_by = { value = 0.5"))
    assert not asked("ph 7.10", policy=wide)
    rules = shipped_policy().entry
    assert {getattr(rules, f).sure for f in rules.__struct_fields__} == {"common practice"}


def test_a_policy_older_than_the_section_asks_as_shipped():
    before, _, rest = shipped_text().partition("[entry]")
    older = read_policy(before + rest[rest.index("# Markers. tier") :])
    assert older.entry == shipped_policy().entry
