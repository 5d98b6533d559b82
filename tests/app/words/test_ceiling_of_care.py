"""A ceiling of care changes what escalating means, in words, and takes nothing from the evidence."""

import pytest

from app.words import Reader, sentence
from core.judgement.markers.registry import MARKERS
from core.record.channels import CEILINGS
from tests.support import flag_cases
from tests.support.flag_cases import BEFORE, COPD, START

LOG = COPD + BEFORE + START + "02:00 ph 7.14 paco2 82"
MEANS = {
    "no intubation": "a decision with the responsible clinician, not intubation",
    "ward support is the ceiling": "telling the responsible clinician, not a higher level of care",
    "comfort": "comfort and telling whom it concerns",
}


def flags(ceiling: str | None):
    log = LOG if ceiling is None else LOG + f"\n01:30 ceiling_of_care '{ceiling}'"
    return {f.marker: f for f in flag_cases.flags(log, "02:10")}


def evidence(flag):
    return [m for m in flag.evidence if m.key != "evidence.ceiling"]


@pytest.mark.parametrize("ceiling", [c for c in CEILINGS if c not in ("full", "not recorded")])
def test_the_words_change_and_the_evidence_does_not(ceiling):
    without, with_it = flags(None), flags(ceiling)
    assert without.keys() == with_it.keys() <= MARKERS.keys()
    for marker, flag in with_it.items():
        assert (flag.tier, flag.since, evidence(flag)) == (
            without[marker].tier, without[marker].since, evidence(without[marker]))  # fmt: skip
        said = [sentence(m, Reader()) for m in flag.evidence if m.key == "evidence.ceiling"]
        expected = [f"Ceiling of care: {ceiling}. Escalating here means {MEANS[ceiling]}."]
        assert said == (expected if flag.tier == "escalate" else [])


@pytest.mark.parametrize("ceiling", ["full", "not recorded"])
def test_no_ceiling_no_words(ceiling):
    assert not [m for f in flags(ceiling).values() for m in f.evidence if m.key == "evidence.ceiling"]
