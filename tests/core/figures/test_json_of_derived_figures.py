"""The JSON of an episode carries the derived figures whole: value, time, inputs, doubt, caveats, reason."""

import json

from app.words import sentence
from core.figures.episode_figures import episode_figures
from core.figures.json_form import to_json
from core.judgement.policy import shipped_policy
from tests.support.log import device, episode, moment

LOG = """
00:30 height 175
00:30 sex male
00:30 age 60
00:50 rr 20
01:00 mode bpap-st ipap 18 epap 6 fio2 50 ti 1.0 backup 14
02:50 spo2 92 rr 20
02:50 ph 7.22 paco2 80 pao2 60 hco3 44 sao2 70 site arterial
02:55 ph 7.30 paco2 44 site venous
"""


def as_json():
    vte, leak = (
        device("vte", "02:00", [400.0] * 50 + [0.0] * 5 + [400.0] * 5),
        device("leak", "02:00", [12.0] * 60),
    )
    figures = episode_figures(episode(LOG, samples=(vte, leak)), moment("03:00"), shipped_policy())
    return json.loads(json.dumps(to_json(figures, sentence), allow_nan=False))


def test_oxygenation_and_ventilation_are_there_with_their_times_and_words():
    found = as_json()
    imputed = found["oxygenation"]["pf_imputed_mmHg"]
    assert round(imputed["value"]) == 128
    assert imputed["key"] == "pf_imputed"
    assert imputed["inputs"]["spo2"] == {"value": 92.0, "at": "2026-03-28T02:50:00+00:00", "median_of": None}
    assert "non-linear" in imputed["caveats"][0]["text"]
    volume = found["ventilation"]["tidal_volume_mL"]
    assert (volume["value"], volume["at"]) == (400.0, "2026-03-28T02:59:00+00:00")
    span = ["2026-03-28T02:45:00+00:00", "2026-03-28T02:59:00+00:00"]
    assert volume["inputs"]["vte"]["median_of"] == span
    assert volume["doubt"]["key"] == "tidal_volume.leak_not_known"
    assert "doubtful" in volume["doubt"]["text"]
    assert found["ratios"]["sf"]["inputs"]["fio2"]["value"] == 0.5


def test_a_gas_is_read_in_words_with_its_explanations():
    arterial, venous = as_json()["gases"]
    assert arterial["reading"]["classification"]["text"] == "Acute-on-chronic respiratory acidosis."
    assert len(arterial["reading"]["steps"]) == 3
    assert arterial["reading"]["hco3_expected_chronic_mmol_L"]["value"] == 38.0
    assert arterial["explanations"][-1]["key"] == "consistency.copying_slip"
    assert any("70 %" in w["text"] for w in arterial["warnings"])
    assert "rules out arterial hypercapnia unless in shock" in venous["rule_out"]["text"]
    assert venous["reading"]["classification"] is None
    assert "does not stand for arterial" in venous["reading"]["classification_reason"]["text"]


def test_the_instants_of_leak_are_iso():
    leak = as_json()["leak"]
    assert leak["latest_at"].startswith("2026-03-28T02:")
    assert leak["probable_breaks"] == [["2026-03-28T02:50:00+00:00", "2026-03-28T02:55:00+00:00"]]


def test_no_message_is_without_words_or_value():
    def walk(node):
        if isinstance(node, dict):
            if isinstance(node.get("text"), str):
                assert node["text"] != node.get("key")
                assert "?" not in node["text"] or "swapped" in node["text"], node
            for part in node.values():
                walk(part)
        elif isinstance(node, list):
            for part in node:
                walk(part)

    found = as_json()
    for part in ("gases", "oxygenation", "ventilation"):
        walk(found[part])
