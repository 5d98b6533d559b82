"""The channels as the command line lists them."""

import json

from app.cli import DONE, REFUSED
from core.record.channels import CHANNELS
from tests.support.command_line import Run


def test_every_channel_is_listed_with_what_it_takes(run: Run) -> None:
    code, out, err = run("channels")
    assert (code, err) == (DONE, "")
    listed = {line.split()[0] for line in out.splitlines() if line.startswith("  ")}
    assert listed == set(CHANNELS)
    assert "started_at            Support started: a time" in out
    assert "PaCO2: 5 to 250 mmHg, or in kPa" in out
    assert "Sample site: arterial | capillary | venous" in out


def test_a_word_finds_channels_by_key_name_short_word_or_choice(run: Run) -> None:
    code, out, _ = run("channels", "support started")
    assert (code, [line.split()[0] for line in out.splitlines() if line.startswith("  ")]) == (DONE, ["started_at"])
    assert "  vte " in run("channels", "vt")[1]
    assert [c["channel"] for c in json.loads(run("channels", "venous", "--json")[1])["channels"]] == ["site"]
    code, _, err = run("channels", "support_started")
    assert (code, "Accepted: started_at" in err) == (REFUSED, True), err
