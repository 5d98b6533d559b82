"""What is missing ends no flag: a gas without a value that a marker reads, of a site that does not answer it, or in
doubt, leaves the flag open and says that it was not judged again."""

import pytest

from core.figures.episode_figures import episode_figures
from core.judgement.flags import evaluate
from core.judgement.markers.gas_points import ANY_SAMPLE, NEEDS
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from tests.support.flag_cases import BEFORE, COPD, LUNG, START, ctx, flags, met
from tests.support.log_cases import at, episode
from tests.support.truth_table import ROWS

POLICY = shipped_policy()
ON = read_policy(shipped_text().replace("hacor_updated = false", "hacor_updated = true"))
PARTS = {
    "ph": "7.41", "paco2": "38", "pao2": "90", "lactate": "1.0",
}  # fmt: skip
"""A gas that is well in every value it holds."""
FAILING = (
    LUNG
    + "00:30 ph 7.42 paco2 36 pao2 60 site arterial gas_fio2 0.4 rr 34 gcs 15 hr 110\n"
    + START.replace("fio2 30", "fio2 70")
    + "02:00 ph 7.42 paco2 36 pao2 70 site arterial rr 41 hr 125 gcs 15\n"
)
"""P/F 100, HACOR of 8 or more at an hour."""


def gas(held, site="arterial"):
    return f" site {site} " + " ".join(f"{k} {v}" for k, v in PARTS.items() if k in held)


PARTIAL = [
    ({"lactate"}, "arterial"), ({"ph"}, "arterial"), ({"paco2"}, "arterial"), ({"ph", "paco2"}, "arterial"),
    ({"pao2"}, "arterial"), ({"paco2", "pao2"}, "arterial"), ({"ph", "pao2"}, "arterial"),
    ({"ph", "paco2", "pao2"}, "capillary"), ({"ph", "paco2", "pao2", "lactate"}, "venous"),
    ({"ph", "paco2", "pao2"}, "venous"),
]  # fmt: skip


def answers(marker, held, site):
    """Whether a gas holds what the marker needs, by the rules and not by the code: venous answers lactate and the
    venous marker alone, a P/F needs an arterial PaO2 and a capillary PO2 is none."""
    if site == "venous" and marker not in ANY_SAMPLE:
        return False
    has = {*held} - ({"pao2"} if site != "arterial" else set())
    has |= {"pf"} if "pao2" in has else set()
    needs = {*NEEDS[marker]} | ({"ph", "paco2"} if marker.startswith("hacor") else set())
    return needs <= has


def still_open(marker, log, as_of):
    return met(marker, log, as_of, ON if marker.startswith("hacor_updated") else None).endswith("-")


@pytest.mark.parametrize("marker", sorted(NEEDS))
def test_a_gas_that_does_not_hold_what_a_marker_reads_ends_no_flag(marker):
    row = ROWS[marker]
    assert still_open(marker, row.log, row.as_of)
    for held, site in PARTIAL:
        if not answers(marker, held, site):
            log = f"{row.log}\n{row.as_of}{gas(held, site)}"
            assert still_open(marker, log, row.as_of), (held, site)


@pytest.mark.parametrize("marker", sorted(NEEDS))
def test_a_gas_whose_values_hardly_belong_together_ends_no_flag(marker):
    row = ROWS[marker]
    log = f"{row.log}\n{row.as_of} ph 7.41 paco2 12 pao2 300 lactate 1.0 site arterial rr 20 gcs 15 hr 80"
    assert still_open(marker, log, row.as_of)


@pytest.mark.parametrize("marker", sorted(set(NEEDS) - {"ph_below_715_before_support"}))
def test_a_whole_gas_that_is_well_still_ends_it(marker):
    """The other side: what answers does end a flag, so that staying open is no accident."""
    row = ROWS[marker]
    fio2 = "gas_fio2 0.3" if "fio2 30" in row.log or marker == "acidosis_off_support" else "gas_fio2 0.5"
    pao2 = "390" if "0.5" in fio2 else "95"
    log = f"{row.log}\nd1 08:00 ph 7.41 paco2 36 pao2 {pao2} lactate 1.0 site arterial {fio2} rr 20 gcs 15 hr 80"
    if marker in ("paco2_rising", "rate_falling_worse_gas"):  # compared with the hours before
        log = log.replace("d1 08:00", "05:00")
    assert not still_open(marker, log, "d1 08:10")


def test_every_marker_that_gases_judge_says_what_it_needs():
    judged_otherwise = {
        "backup_takeover", "vt_high_hypoxaemic", "sf_below_985", "fio2_need_rising", "intolerance", "gas_overdue",
        "weaning_ready", "spo2_fall_after_pressure",
    }  # fmt: skip
    reads = {k for k, m in MARKERS.items() if m.channels & {"ph", "pao2", "lactate"}}
    assert reads - judged_otherwise == set(NEEDS)


@pytest.mark.parametrize("later", ["ph 7.41 paco2 38", "ph 7.41 paco2 38 pao2 70 site capillary"])
def test_a_partial_gas_neither_ends_a_hacor_flag_nor_lowers_the_rank(later):
    before = episode_figures(episode(FAILING), at("05:00"), POLICY)
    after = episode_figures(episode(f"{FAILING}05:00 {later}"), at("05:10"), POLICY)
    assert (before.concern.rank, after.concern.rank) == (0, 0)
    flag = next(f for f in after.flags if f.marker == "hacor_8_or_more")
    assert flag.state == "raised"
    said = {m.key: m.values for m in flag.evidence}["evidence.not_settled"]
    assert (said["gas_at"], said["because"]) == (at("05:00"), "missing")
    assert "pf" in said["missing"]


def test_a_score_that_became_a_range_with_its_limit_keeps_the_flag():
    """HACOR above 5 by a GCS of 12; later nobody took one: 3 to 13 is no answer."""
    log = FAILING.replace("pao2 70 site arterial rr 41 hr 125 gcs 15", "pao2 84 site arterial rr 20 hr 90 gcs 12")
    assert met("hacor_above_5", log) == "02:00-"
    later = log + "06:00 ph 7.42 paco2 36 pao2 84 site arterial rr 20 hr 90\n"
    assert met("hacor_above_5", later) == "02:00-"
    assert met("hacor_above_5", later.replace("rr 20 hr 90\n", "rr 20 hr 90 gcs 15\n")) == "02:00-06:00"


@pytest.mark.parametrize("more", ["", " pao2 70 site arterial rr 41 hr 125 gcs 14"])
def test_a_paco2_that_rises_ends_no_flag_of_a_score_that_is_not_made_for_it(more):
    """A patient in whom acute hypercapnia comes on top is worse off: no flag may go for that."""
    log = FAILING + "05:00 ph 7.28 paco2 60" + more
    assert met("hacor_8_or_more", log) == "02:00-"
    (flag,) = [f for f in flags(log, "05:10") if f.marker == "hacor_8_or_more"]
    assert flag.state == "raised"
    said = {m.key: m.values for m in flag.evidence}["evidence.not_settled"]
    assert (said["gas_at"], said["because"]) == (at("05:00"), "outside")


def test_few_points_end_it_in_anybody():
    assert met("hacor_8_or_more", FAILING + "05:00 ph 7.34 paco2 47 pao2 180 site arterial rr 20 hr 80 gcs 15") == (
        "02:00-05:00"
    )


def test_an_open_flag_says_when_its_own_values_grew_old():
    (flag,) = [f for f in flags(FAILING + "08:00 ph 7.41 paco2 38", "10:00") if f.marker == "hacor_8_or_more"]
    said = {m.key: m.values for m in flag.evidence}
    assert said["evidence.stale"]["minutes"] >= 360
    assert said["evidence.not_settled"]["gas_at"] == at("08:00")


def test_a_gas_without_ph_does_not_end_a_lost_gain_nor_one_without_pao2_a_lost_oxygen_gain():
    lost = COPD + BEFORE + START + "02:00 ph 7.36 paco2 55\n05:00 ph 7.29 paco2 70\n"
    assert met("gain_lost", lost) == "05:00-"
    assert met("gain_lost", lost + "06:00 pao2 60 lactate 1.0") == "05:00-"
    assert met("gain_lost", lost + "06:00 ph 7.36 paco2 55") == "05:00-06:00"


def test_two_gains_can_be_lost_at_once():
    log = (
        LUNG
        + "00:30 ph 7.36 paco2 44 pao2 60 site arterial gas_fio2 0.4\n"
        + START.replace("fio2 30", "fio2 40")
        + "02:00 ph 7.42 paco2 38 pao2 90 site arterial\n05:00 ph 7.30 paco2 52 pao2 60 site arterial\n"
    )
    assert met("gain_lost", log) == met("oxygen_gain_lost", log) == "05:00-"


def test_a_gas_between_without_a_value_parts_no_comparison():
    """Tiring: the rate fell while PaCO2 rose, with a gas between that holds neither pH nor PaCO2, or only a pH."""
    log = COPD + START + "02:00 ph 7.32 paco2 60 rr 30\n{}03:30 ph 7.26 paco2 72 rr 20\n"
    for between in ("", "03:00 lactate 1.0\n", "03:00 ph 7.31\n"):
        assert met("rate_falling_worse_gas", log.format(between)) == "03:30-"
    assert met("rate_falling_worse_gas", log.format("") + "04:00 lactate 1.0 rr 20") == "03:30-"


def test_news2_taken_with_less_does_not_end_its_rise():
    """RCP 2017: three points for any level below alert. A set without it may still hold them."""
    taken = "rr 18 spo2 97 hr 80 sbp 120 temp 37.0"
    risen = f"{LUNG}{START}02:00 {taken} acvpu alert\n03:00 {taken} acvpu voice\n"
    assert met("news2_rise", risen) == "03:00-"
    later = f"{risen}05:30 {taken}"
    assert met("news2_rise", later) == "03:00-"
    assert met("news2_rise", later + " acvpu alert") == "03:00-05:30"


def test_an_oxygen_flow_without_fio2_does_not_end_the_rising_need():
    log = LUNG + START + "01:20 spo2 95\n01:30 fio2 45\n01:40 spo2 95\n"
    assert met("fio2_need_rising", log, "02:30").endswith("-")
    assert met("fio2_need_rising", log + "02:00 o2_flow 10", "02:30").endswith("-")


def test_the_flags_of_a_record_without_doubt_are_as_they_were():
    clean = evaluate(ctx(FAILING))
    assert not any(m.key == "evidence.not_settled" for f in clean for m in f.evidence)
