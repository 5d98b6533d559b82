"""How the patient stands now: nothing reads as good that is not, and no relapse hides behind an older verdict."""

from core.figures.episode_figures import episode_figures
from core.figures.json_form import to_json
from core.judgement.policy import shipped_policy
from tests.support.flag_cases import BEFORE, COPD, START
from tests.support.log_cases import at, episode

BASE = COPD + BEFORE + START
LUNG_START = "00:00 indication pneumonia\n00:30 ph 7.44 paco2 34 pao2 60 fio2 0.5\n" + START


def now(log, as_of):
    return episode_figures(episode(log), at(as_of), shipped_policy()).now


def test_a_gain_that_was_lost_is_named_beside_the_headline():
    gained = BASE + "02:00 ph 7.36 paco2 56\n"
    before = now(gained, "02:10")
    assert (before.headline, before.gain_lost, before.since_start, before.state) == (
        "better", False, "better", "resolved")  # fmt: skip
    lost = now(gained + "05:00 ph 7.32 paco2 62", "05:10")
    assert (lost.headline, lost.gain_lost, lost.headline_at) == ("better", True, at("05:00"))
    assert (lost.since_start, lost.since_start_gain_lost, lost.state) == ("better", True, "acidotic")


def test_since_the_start_speaks_where_the_last_change_does_not():
    slow = BASE + "02:00 ph 7.26 paco2 72\n02:10 ipap 22\n03:20 ph 7.24 paco2 75"
    found = now(slow, "03:30")
    assert (found.headline, found.since_start) == ("no clear change", "worse")
    assert found.ever_acidotic


def test_oxygen_failure_is_not_called_resolved_alone():
    log = LUNG_START + "02:00 ph 7.45 paco2 34 pao2 53.5 gas_fio2 0.5 site arterial"
    found = now(log, "02:10")
    assert (found.state, found.ever_acidotic, found.oxygen_failure, found.pf_mmHg) == ("resolved", False, True, 107)
    later = now(log + "\n03:00 ph 7.46 paco2 33 site arterial", "03:10")  # no PaO2: the P/F keeps its own time
    assert (later.pf_mmHg, later.pf_at) == (107, at("02:00"))
    acidotic = now(log + "\n04:00 ph 7.29 paco2 58 pao2 53.5 gas_fio2 0.5 site arterial", "04:10")
    assert (acidotic.ever_acidotic, acidotic.oxygen_failure) == (True, False)
    assert acidotic.oxygen_failed_before, "the P/F of 107 stays beside the acidosis"
    assert now(LUNG_START, "01:10").pf_mmHg is None  # its only P/F was before support


def test_a_failure_of_co2_from_the_beginning_is_told_as_that_alone():
    log = BASE + "02:00 ph 7.29 paco2 66 pao2 60 gas_fio2 0.3 site arterial"
    assert not now(log, "02:10").oxygen_failed_before
    pneumonia = LUNG_START + "02:00 ph 7.45 paco2 34 pao2 90 gas_fio2 0.25 site arterial\n"
    well = now(pneumonia + "04:00 ph 7.29 paco2 58 pao2 80 gas_fio2 0.25 site arterial", "04:10")
    assert not well.oxygen_failed_before, "its P/F is 320 now"


def test_the_range_tells_when_and_by_what_it_became_another():
    risk = LUNG_START + "03:00 ph 7.30 paco2 58"
    found = now(risk, "03:10")
    assert (found.spo2_target_low, found.spo2_target_since, found.spo2_target_by_gas) == (88, at("03:00"), True)
    ordered = now(LUNG_START + "03:00 target_spo2_low 88 target_spo2_high 92", "03:10")
    assert (ordered.spo2_target_since, ordered.spo2_target_by_gas) == (at("03:00"), False)
    assert now(BASE, "03:10").spo2_target_since is None
    kept = now(LUNG_START.replace("pneumonia", "pneumonia target_spo2_low 92 target_spo2_high 96") +
               "03:00 ph 7.30 paco2 58", "03:10")  # fmt: skip
    assert (kept.spo2_target_low, kept.spo2_target_since) == (92, None), "what is prescribed no gas changes"


def test_off_the_mask_and_how_old_the_record_is():
    log = BASE + "02:00 mask_off\n02:05 rr 24"
    found = now(log, "03:00")
    assert (found.off_mask_since, found.last_logged_at) == (at("02:00"), at("02:05"))
    assert now(log + "\n02:50 label Later", "03:00").last_logged_at == at("02:05")  # a name is no look
    assert now(log + "\n02:30 mask_on", "03:00").off_mask_since is None
    assert now(log + "\n02:30 stopped", "03:00").off_mask_since is None
    assert now("00:00 label Empty", "01:00").last_logged_at is None


def test_instants_are_written_as_moments():
    log = BASE + "02:00 ph 7.36 paco2 56\n02:30 mask_off"
    told = to_json(episode_figures(episode(log), at("03:00"), shipped_policy()))
    assert all(isinstance(told["now"][k], str) for k in ("off_mask_since", "last_logged_at", "headline_at"))
    by_gas = to_json(episode_figures(episode(LUNG_START + "02:00 ph 7.3 paco2 60"), at("03:00"), shipped_policy()))
    assert isinstance(by_gas["now"]["spo2_target_since"], str)
