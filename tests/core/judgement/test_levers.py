"""Levers: their order, when they can act, the reason and what limits them."""

from __future__ import annotations

import pytest

from app.words import Reader, sentence
from core.judgement.levers import levers
from core.judgement.shapes import LeverFigure
from tests.support.log_cases import at, context

ORDER = ["fio2", "mask", "secretions", "time_on_mask", "pressure_support", "backup_rate", "inspiratory_time", "epap"]
ACIDOTIC = "03:00 ph 7.26 paco2 72\n"


def found(more: str = "", *, indication: str = "copd", start: str = "mode BPAP-ST ipap 16 epap 5 fio2 28%",
          as_of: str = "04:00") -> dict[str, LeverFigure]:  # fmt: skip
    log = f"01:00 rr 30 indication '{indication}'\n02:00 {start}\n{more}"
    return {lever.key: lever for lever in levers(context(log, as_of))}


def keys(lever: LeverFigure) -> list[str]:
    return [m.key.removeprefix("lever.") for m in (*lever.why, *lever.limits)]


def test_the_order_and_that_a_person_decides() -> None:
    figures = levers(context("01:00 rr 30\n02:00 mode BPAP-ST ipap 16 epap 5", "03:00"))
    assert [f.key for f in figures] == ORDER
    for figure in figures:
        assert figure.why
        assert figure.limits[-1].key == "lever.qualified_person_decides"


@pytest.mark.parametrize("log", ["01:00 rr 30", "01:00 rr 30\n02:00 mode CPAP cpap 8\n03:00 stopped"])
def test_none_before_or_after_support(log: str) -> None:
    assert levers(context(log, "04:00")) == ()


def test_oxygen_above_need_within_range_and_below() -> None:
    above = found("03:55 spo2 97")["fio2"]
    assert above.can_act
    assert keys(above)[0] == "oxygen_above_need"
    within = found("03:55 spo2 90")["fio2"]
    assert not within.can_act
    below = found("03:55 spo2 84")["fio2"]
    assert below.can_act
    assert keys(below)[:2] == ["spo2_below_range", "hypercapnic_risk"]
    assert keys(found()["fio2"])[0] == "spo2_not_known"
    full = found("03:55 spo2 84", start="mode CPAP cpap 8 fio2 100%")["fio2"]
    assert not full.can_act
    assert "fio2_at_maximum" in keys(full)
    room = found("03:55 spo2 97", start="mode CPAP cpap 8 fio2 21%")["fio2"]
    assert not room.can_act


def test_leak_comes_before_pressure() -> None:
    leaking = found(
        ACIDOTIC + "device leak 02:00 04:00 50 50",
        start="mode BPAP-ST ipap 16 epap 5 leak_definition unintentional",
    )
    assert leaking["mask"].can_act
    assert keys(leaking["mask"])[0] == "leak_over_limit"
    assert leaking["pressure_support"].can_act
    assert "leak_first" in keys(leaking["pressure_support"])


def test_a_leak_nobody_defined_is_no_reason_to_act() -> None:
    mask = found("device leak 02:00 04:00 50 50")["mask"]
    assert not mask.can_act
    assert keys(mask)[0] == "leak_definition_not_known"


def test_a_low_epap_does_not_clear_the_port() -> None:
    mask = found(start="mode BPAP-ST ipap 14 epap 3")["mask"]
    assert mask.can_act
    assert "port_not_cleared" in keys(mask)


def test_secretions_and_sedation() -> None:
    assert found("03:00 secretions")["secretions"].can_act
    assert not found()["secretions"].can_act


def test_time_on_the_mask_counts_only_while_acidotic() -> None:
    off = "02:30 mask_off\n03:00 mask_on\n03:35 ph 7.26 paco2 72"
    lever = found(off)["time_on_mask"]
    assert lever.can_act
    assert keys(lever)[0] == "little_mask_time"
    assert not found(off.replace("7.26", "7.40"))["time_on_mask"].can_act


def test_pressure_support_and_its_limits() -> None:
    lever = found(ACIDOTIC)["pressure_support"]
    assert lever.can_act
    assert lever.present is not None
    assert lever.present.values["pressure_support"] == 11
    full = found(ACIDOTIC, start="mode BPAP-ST ipap 30 epap 5")["pressure_support"]
    assert not full.can_act
    assert "review_ipap" in keys(full)
    assert not found("03:00 ph 7.40 paco2 50")["pressure_support"].can_act
    cpap = found(ACIDOTIC, start="mode CPAP cpap 8")["pressure_support"]
    assert cpap.can_act
    assert "no_pressure_support" in keys(cpap)


def test_a_high_tidal_volume_limits_pressure_in_hypoxaemia() -> None:
    more = "02:30 height 175 sex male\n03:00 ph 7.30 paco2 50 pao2 60\ndevice vte 02:00 04:00 720 720"
    lever = found(more, start="mode BPAP-ST ipap 16 epap 8 fio2 50%", indication="pneumonia")["pressure_support"]
    assert "high_tidal_volume" in keys(lever)


def test_a_rate_only_where_it_would_take_effect() -> None:
    start = "mode BPAP-ST ipap 16 epap 5 rate_set 14"
    fast = found(ACIDOTIC + "03:50 rr 28", start=start)["backup_rate"]
    assert not fast.can_act
    assert keys(fast)[0] == "rate_no_effect"
    slow = found(ACIDOTIC + "03:50 rr 12", start=start)["backup_rate"]
    assert slow.can_act
    assert "traps_air" in keys(slow)
    spontaneous = found(ACIDOTIC + "03:50 rr 12", start="mode BPAP-S ipap 16 epap 5")["backup_rate"]
    assert not spontaneous.can_act


def test_a_longer_inspiration_never_in_copd() -> None:
    copd = found(ACIDOTIC)["inspiratory_time"]
    assert not copd.can_act
    assert keys(copd)[0] == "traps_air"
    weak = found(ACIDOTIC, indication="neuromuscular", start="mode BPAP-ST ipap 16 epap 5 ti 1.0")["inspiratory_time"]
    assert weak.can_act
    long = found(ACIDOTIC, indication="neuromuscular", start="mode BPAP-ST ipap 16 epap 5 ti 1.6")["inspiratory_time"]
    assert not long.can_act


def test_epap_with_ipap_alike() -> None:
    lever = found("03:55 spo2 84")["epap"]
    assert lever.can_act
    assert keys(lever)[:3] == ["spo2_below_range", "hypoxaemia", "raise_ipap_alike"]
    assert not found("03:55 spo2 84", start="mode BPAP-ST ipap 20 epap 8")["epap"].can_act
    assert not found("03:55 spo2 91")["epap"].can_act
    obese = found(ACIDOTIC, indication="obesity hypoventilation")["epap"]
    assert "upper_airway" in keys(obese)


@pytest.mark.parametrize("spo2", [84, 88, 92, 97])
def test_oxygen_and_epap_speak_of_one_saturation(spo2: int) -> None:
    """A P/F of 211 in acute hypercapnia with SpO2 in range is no reason for EPAP; low SpO2 is one for both."""
    figures = found(f"03:00 ph 7.19 paco2 91 pao2 59 fio2 28%\n03:55 spo2 {spo2}")
    fio2, epap = figures["fio2"], figures["epap"]
    assert epap.can_act == (spo2 < 88)
    told = [m.values for lever in (fio2, epap) for m in lever.why if "spo2" in m.values]
    assert all(values == told[0] for values in told)
    assert len(told) == (2 if spo2 <= 92 else 1)


@pytest.mark.parametrize(("pao2", "acts"), [(40, True), (80, True), (81, False), (118, False)])
def test_epap_in_hypoxaemic_failure_from_a_pf_of_200(pao2: int, acts: bool) -> None:
    """FiO2 0.4: P/F 100, 200, 202.5 and 295, each with SpO2 in its range."""
    more = f"03:00 ph 7.44 paco2 36 pao2 {pao2} site arterial\n03:55 spo2 95"
    epap = found(more, indication="pneumonia", start="mode BPAP-ST ipap 14 epap 6 fio2 40%")["epap"]
    assert epap.can_act == acts
    assert ("pf_low" in keys(epap)) == acts
    tiring = more.replace("7.44 paco2 36", "7.30 paco2 60")
    assert not found(tiring, indication="pneumonia", start="mode BPAP-ST ipap 14 epap 6 fio2 40%")["epap"].can_act


def test_epap_without_a_saturation_says_so() -> None:
    assert keys(found()["epap"])[0] == "spo2_not_known"


LEAKING = "mode BPAP-ST ipap 16 epap 5 leak_definition unintentional"
AT_NIGHT = Reader(near=(at("00:00"), at("12:00")))


def said(lever: LeverFigure, key: str) -> str:
    """The sentence of one reason, limit or present value of a lever."""
    present = [lever.present] if lever.present is not None else []
    return next(sentence(m, AT_NIGHT) for m in (*lever.why, *lever.limits, *present) if m.key == f"lever.{key}")


@pytest.mark.parametrize(
    ("more", "told"),
    [
        ("device leak 02:00 04:01 50 50", "Leak 50 L/min (median from 03:46 to 04:00) is over 30 L/min."),
        ("device leak 02:00 03:31 20 20\n03:58 leak 50", "Leak 50 L/min (one reading at 03:58) is over 30 L/min."),
    ],
)
def test_the_leak_of_a_lever_says_of_when_it_is_and_of_what_kind(more: str, told: str) -> None:
    assert said(found(more, start=LEAKING)["mask"], "leak_over_limit") == told


def test_the_newest_leak_is_a_quarter_of_an_hour_and_never_a_breath() -> None:
    """One sample at 04:00 begins a new quarter by the clock; it alone is no level."""
    mask = found("device leak 02:00 04:00 20 20\ndevice leak 04:00 04:01 90 90", start=LEAKING)["mask"]
    assert not mask.can_act
    assert said(mask, "leak_within_limit") == "Leak 20 L/min (median from 03:46 to 04:00) is within 30 L/min."
    assert (
        said(mask, "present_leak") == "Leak now 20 L/min (median from 03:46 to 04:00), unintentional, limit 30 L/min."
    )


def test_a_leak_that_came_back_within_its_limit_is_not_called_over_it() -> None:
    """Over in ten of twelve minutes up to 03:50, then within: by minutes not yet over, by its median within."""
    more = "device leak 02:00 03:49 50 50\ndevice leak 03:49 04:00 20 20"
    mask = found(more, start=LEAKING, as_of="03:57")["mask"]
    told = said(mask, "leak_was_over_limit")
    assert told.startswith("Leak was over its limit in most minutes since 02:00; now 20 L/min (median from ")
    assert told.endswith(", within 30 L/min.")


def test_a_leak_without_a_known_limit_is_not_called_within_it() -> None:
    mask = found("device leak 02:00 04:00 20 20", start="mode BPAP-ST leak_definition total")["mask"]
    assert said(mask, "leak_limit_not_known").endswith(": its limit is not known without the pressures.")


@pytest.mark.parametrize(
    ("more", "told"),
    [
        ("03:40 spo2 97", "SpO2 97 % (one reading at 03:40) is above its range, 88 to 92 %: less oxygen is needed."),
        ("device spo2 03:00 04:01 97 97",
         "SpO2 97 % (median from 03:46 to 04:00) is above its range, 88 to 92 %: less oxygen is needed."),
        ("device spo2 04:00 04:01 97 97",
         "SpO2 97 % (one reading at 04:00) is above its range, 88 to 92 %: less oxygen is needed."),
    ],
)  # fmt: skip
def test_the_saturation_of_a_lever_is_a_median_or_one_reading(more: str, told: str) -> None:
    assert said(found(more)["fio2"], "oxygen_above_need") == told


def test_the_rate_of_a_lever_is_counted_or_a_median() -> None:
    counted = found("03:50 rr 24")["backup_rate"]
    assert said(counted, "rate_no_effect") == (
        "The patient's own rate is 24/min (counted at 03:50), not below 20/min: a backup rate would not act."
    )
    machine = found("device rr_total 03:00 04:01 14 14")["backup_rate"]
    assert said(machine, "rate_in_reach") == (
        "The patient's own rate, 14/min (median from 03:46 to 04:00), is below 20/min: a backup rate can act."
    )
    fast = found("03:50 rr 24", start="mode BPAP-ST ipap 16 epap 5 rate_set 24")["backup_rate"]
    assert said(fast, "rate_above_backup").endswith("not below the backup rate of 24/min: it does not act.")


def test_a_high_tidal_volume_says_of_when_it_is_and_its_doubt() -> None:
    more = "02:30 height 175 sex male\n03:00 ph 7.30 paco2 50 pao2 60\ndevice vte 02:00 04:01 720 720\n"
    setting = "mode BPAP-ST ipap 16 epap 8 fio2 50%"
    lever = found(more, start=setting, indication="pneumonia")["pressure_support"]
    told = "Tidal volume 10.2 mL/kg (median from 03:46 to 04:00) is above 9.5 mL/kg already."
    assert said(lever, "high_tidal_volume") == told
    assert "tidal_volume.leak_not_known" in [m.key for m in lever.limits]
    leaking = "device leak 02:00 04:01 40 40"
    lever = found(more + leaking, start=f"{setting} leak_definition unintentional", indication="pneumonia")
    assert "tidal_volume.leak_too_large" in [m.key for m in lever["pressure_support"].limits]


@pytest.mark.parametrize(
    ("gas", "missing"), [("03:00 ph 7.20", "PaCO2 not reported."), ("03:00 paco2 72", "pH not reported.")]
)
def test_half_a_gas_is_no_proof_that_there_is_no_acidosis(gas: str, missing: str) -> None:
    lever = found(gas)["pressure_support"]
    assert not lever.can_act
    assert said(lever, "acidosis_not_known").endswith(missing)
    assert keys(found(gas)["time_on_mask"])[0] == "acidosis_not_known"


@pytest.mark.parametrize("gas", ["03:00 ph 7.40", "03:00 paco2 38", "03:00 ph 7.20 paco2 38"])
def test_what_one_half_rules_out_is_no_acidosis(gas: str) -> None:
    assert keys(found(gas)["pressure_support"])[0] == "no_acidosis"
