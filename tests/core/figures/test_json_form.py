"""The figures' JSON: units in keys, every time in ISO, every null with its reason where there is one."""

import json

from core.figures.episode_figures import episode_figures
from core.figures.json_form import to_json
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.record.message import Message
from tests.support.log import device, episode, moment

NIGHT = """
00:30 label Bed 4
00:30 indication copd
00:40 rr 32 gcs 15 spo2 86
00:45 ph 7.24 paco2 78 pao2 55 site arterial
01:00 mode bpap-st ipap 14 epap 5 o2 flow 4
02:00 rr 32 gcs 13 spo2 84
02:10 ph 7.18 paco2 88 pao2 56 site arterial
02:20 ipap 18
"""


def made():
    record = episode(NIGHT, samples=[device("leak", "01:00", [40] * 90)])
    return to_json(episode_figures(record, moment("03:30"), shipped_policy()), lambda m: m.key)


def walk(value, name=""):
    yield name, value
    if isinstance(value, dict):
        for key, inner in value.items():
            yield from walk(inner, key)
    elif isinstance(value, list):
        for inner in value:
            yield from walk(inner, name)


def test_it_is_plain_json_without_nan():
    json.dumps(made(), allow_nan=False)


def test_the_keys_of_the_contract_are_there():
    figures = made()
    assert {
        "episode",
        "as_of",
        "support",
        "responses",
        "gases",
        "ratios",
        "leak",
        "scores",
        "flags",
        "due",
    } <= set(figures)
    assert {"mode", "ipap_cmH2O", "epap_cmH2O", "pressure_support_cmH2O", "fio2", "rate_set_per_min", "ti_s", "since",
            "hours_on_mask", "hours_on_mask_last_24h"} <= set(figures["support"])  # fmt: skip
    assert {"latest_mmHg", "slope_mmHg_per_h", "slope_low", "slope_high"} <= set(figures["ratios"]["pf"])
    assert {"latest", "slope_per_h"} <= set(figures["ratios"]["sf"])
    assert {"what", "because", "from", "until", "state"} <= set(figures["due"][0])
    assert {
        "flag_id",
        "marker",
        "group",
        "tier",
        "since",
        "ended_at",
        "state",
        "evidence",
        "source",
        "sure",
        "policy",
    } <= set(figures["flags"][0])
    assert set(figures["responses"][0]["at_minutes"]) == {"30", "60", "90", "120"}


def test_no_instant_is_left_as_a_number():
    raw = {name for name, value in walk(made()) if isinstance(value, int) and value > 10**14}
    assert raw == set()


def test_an_unknown_fio2_is_null_with_its_reason():
    figures = made()
    assert figures["support"]["fio2"] is None
    assert figures["support"]["fio2_reason"]["key"] == "support.fio2_not_known_on_flow"
    assert figures["gases"][-1]["pf_mmHg"] is None
    assert figures["gases"][-1]["pf_mmHg_reason"]["key"] == "undefined.fio2_unknown"
    assert figures["ratios"]["pf"]["latest_mmHg"] is None
    assert figures["ratios"]["pf"]["latest_mmHg_reason"]


def test_profile_keys_carry_their_units_and_numbers_no_noise_of_arithmetic():
    facts = {"usual_paco2": 224.99999999999997, "age": 65.0, "height": 169.0, "weight": 73.0, "target_spo2_low": 88.0,
             "indication": "copd"}  # fmt: skip
    told = to_json(EpisodeFigures("E", 9, profile=facts))["profile"]
    assert told == {"usual_paco2_mmHg": 225.0, "age_years": 65.0, "height_cm": 169.0, "weight_kg": 73.0,
                    "target_spo2_low_percent": 88.0, "indication": "copd"}  # fmt: skip
    gas = GasFigure(5, "arterial", pf_mmHg=0.1 + 0.2, warnings=(Message("gas.odd", {"aa": 0.1 + 0.2, "at": 5}),))
    (found,) = to_json(EpisodeFigures("E", 9, gases=(gas,)))["gases"]
    assert (found["pf_mmHg"], found["warnings"][0]["values"]["aa"]) == (0.3, 0.3)
