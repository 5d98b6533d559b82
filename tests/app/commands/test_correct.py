"""Correcting by the command line."""

import json

from app.cli import DONE, REFUSED, WRONG_USAGE
from tests.support.command_line import Run


def test_correct_lists_and_supersedes(filled: Run) -> None:
    _, out, _ = filled("correct", "N4", "--json")
    entry = next(e for e in json.loads(out)["entries"] if e["channel"] == "ph" and e["value"] == 7.33)
    assert filled("correct", "N4", entry["id"][:8], "--value", "7.13")[0] == REFUSED, "it needs a reason"
    assert filled("correct", "N4", entry["id"][:8], "--reason", "x")[0] == WRONG_USAGE
    code, _, err = filled("correct", "N4", entry["id"][:8], "--value", "7.91", "--reason", "misread")
    assert (code, "pH 7.91 is outside the usual 7.00 to 7.60" in err, "--yes" in err) == (REFUSED, True, True)
    paco2 = next(e for e in json.loads(out)["entries"] if e["channel"] == "paco2" and e["at"] == entry["at"])
    code, _, err = filled("correct", "N4", paco2["id"][:8], "--value", "9", "--unit", "mmHg", "--reason", "misread")
    assert (code, "which unit was meant" in err, "--yes" in err) == (REFUSED, True, True), err
    right = ("correct", "N4", entry["id"][:8], "--value", "7.13", "--reason", "misread")
    assert "bicarbonate by both 19, there 30 mmol/L. Is it this patient's?" in filled(*right)[2]
    code, said, err = filled(*right, "--yes")
    assert code == DONE, err
    assert said == "Corrected in N4: pH of 27-Mar-2026 21:25, 7.33 to 7.13.\n"
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--json")
    gas = json.loads(out)["episodes"][0]["gases"][1]
    assert (gas["ph"], gas["corrected"]) == (7.13, True)


def id_of(filled: Run, channel: str, value: float, episode: str = "N4") -> str:
    listed = json.loads(filled("correct", episode, "--json")[1])["entries"]
    return next(e["id"] for e in listed if (e["channel"], e["value"]) == (channel, value))


def test_a_gas_moves_whole_and_one_value_of_it_asks(filled: Run) -> None:
    assert filled("log", "N5", "rr 22", "--new")[0] == DONE
    move = ("correct", "N4", id_of(filled, "ph", 7.33), "--move-to", "N5", "--reason", "wrong bed")
    code, _, err = filled(*move, "--only")
    assert (code, "Only this value?" in err) == (REFUSED, True), err
    code, said, err = filled(*move, "--json")
    assert code == DONE, err
    told = json.loads(said)
    assert (told["old"]["channel"], [w["new"]["channel"] for w in told["with"]]) == ("ph", ["site", "paco2"])
    gases = {e["episode"]: e["gases"] for e in json.loads(filled("figures", "--json")[1])["episodes"]}
    assert [len(gases[k]) for k in ("N4", "N5")] == [1, 1]
    assert gases["N5"][0]["paco2_mmHg"] == 57


def test_another_time_is_that_of_the_whole_gas(filled: Run) -> None:
    at = ("--at", "2026-03-27T21:35Z")
    code, said, err = filled("correct", "N4", id_of(filled, "paco2", 57), *at, "--reason", "late", "--yes")
    assert code == DONE, err
    assert "PaCO2 57 mmHg, Sample site arterial, pH 7.33 of 27-Mar-2026 21:25 to" in said
    assert filled("correct", "N4", id_of(filled, "ph", 7.33), "--withdraw", "--reason", "clotted")[1].startswith(
        "Withdrawn in N4: pH 7.33, Sample site arterial, PaCO2 57 mmHg of 27-Mar-2026 21:35"
    )


def test_a_moment_is_corrected_by_the_walls_clock(filled: Run) -> None:
    assert filled("log", "N4", "support started", "--at", "2026-03-27T21:20Z")[0] == DONE
    listed = json.loads(filled("correct", "N4", "--json")[1])["entries"]
    entry = next(e["id"] for e in listed if e["channel"] == "started_at")
    code, said, err = filled("correct", "N4", entry, "--value", "21:35", "--reason", "misread", "--zone", "UTC")
    assert (code, "27-Mar-2026 21:20 to 27-Mar-2026 21:35" in said) == (DONE, True), (said, err)
    iso = ("--value", "2026-03-27T21:15:00+00:00", "--reason", "iso")
    listed = json.loads(filled("correct", "N4", "--json")[1])["entries"]
    entry = next(e["id"] for e in listed if e["channel"] == "started_at")
    assert "to 27-Mar-2026 21:15" in filled("correct", "N4", entry, *iso, "--zone", "UTC")[1]
    code, _, err = filled("correct", "N4", entry[:4], "--value", "soon", "--reason", "x")
    assert code == REFUSED
