"""The messages that the tests are built on are ORU_R01 by the structure that hl7apy knows, and both read the same.

Source: HL7 v2.5.1 message structures, as the library hl7apy carries them. An oracle for the structure alone.
"""

from __future__ import annotations

import warnings
from pathlib import Path

import pytest

from core.record.instant import parse
from storage.intake.hl7v2 import read_hl7
from storage.intake.said import Said
from tests.support.hl7_messages import gas, message, obx

with warnings.catch_warnings():
    warnings.simplefilter("ignore")  # the library's own, at import
    parser = pytest.importorskip("hl7apy.parser")

NOW = parse("2026-03-28T02:00:00Z")
TEXTS = {
    "gas": message(gas()),
    "notes": message([*gas(), "NTE|1|L|drawn on the mask"]),
    "correction": message([obx("ph", "7.25", status="C")]),
    "structured": message([obx("paco2", "^8.1", kind="SN")]),
}


@pytest.mark.parametrize("text", TEXTS.values(), ids=TEXTS.keys())
def test_structure_and_values_agree(text: str, tmp_path: Path) -> None:
    made = parser.parse_message(text, find_groups=True)
    assert made.name == "ORU_R01"
    results = made.ORU_R01_PATIENT_RESULT
    orders = results.ORU_R01_ORDER_OBSERVATION
    theirs = []
    for order in orders:
        for group in order.ORU_R01_OBSERVATION:
            row = group.OBX
            value = row.obx_5.to_er7().lstrip("^")
            theirs.append((row.obx_3.to_er7().split("^")[0], value))
    assert results.ORU_R01_PATIENT.PID.pid_3.to_er7().split("^")[0] == "0042"
    path = tmp_path / "a.hl7"
    path.write_text(text)
    intake = read_hl7(path, now=NOW, said=Said(episodes={"WARD-7|0042": "E1"}))
    codes = {"ph": "2744-1", "paco2": "2019-8", "pao2": "2703-7"}
    ours = [(codes[d.entry.channel], d.entry.raw) for d in intake.entries if d.entry.channel in codes]
    assert ours == theirs
