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
    code, said, err = filled("correct", "N4", entry["id"][:8], "--value", "7.13", "--reason", "misread")
    assert code == DONE, err
    assert said == "Corrected in N4: pH of 27-Mar-2026 21:25, 7.33 to 7.13.\n"
    _, out, _ = filled("figures", "N4", "--as-of", "2026-03-27T22:00Z", "--json")
    gas = json.loads(out)["episodes"][0]["gases"][1]
    assert (gas["ph"], gas["corrected"]) == (7.13, True)
