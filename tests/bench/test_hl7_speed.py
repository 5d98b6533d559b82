"""10,000 HL7 messages are read, judged and made entries within three times the parser alone."""

from __future__ import annotations

import time
from pathlib import Path
from statistics import median

import pytest

from core.record.instant import MINUTE, parse, to_datetime
from storage.intake.hl7v2 import read_hl7
from storage.intake.said import Said
from tests.support.hl7_messages import gas, message, obx

pytestmark = pytest.mark.bench
MESSAGES, ROUNDS, LIMIT = 10_000, 3, 3.0
NOW = parse("2026-03-28T02:00:00Z")


def test_intake_against_the_parser_alone(tmp_path: Path) -> None:
    import hl7

    start = parse("2026-03-01T00:00:00Z")
    texts = []
    for n in range(MESSAGES):
        at = to_datetime(start + n * MINUTE).strftime("%Y%m%d%H%M+0000")
        patient = f"{n % 50:04d}^^^WARD-7^MR"
        rows = [
            *gas(ph=f"7.{20 + n % 20}"),
            obx("hco3", f"{24 + n % 9}.1"),
            obx("lactate", f"1.{n % 10}"),
            "NTE|1||mask",
        ]
        texts.append(message(rows, patient=patient, order=f"F{n}", at=at, sent=at, number=n))
    path = tmp_path / "results.hl7"
    path.write_text("".join(texts))
    said = Said(episodes={f"WARD-7|{n:04d}": f"E{n}" for n in range(50)})
    alone, ours = [], []
    for _ in range(ROUNDS):
        begun = time.perf_counter()
        for text in texts:
            hl7.parse(text)
        alone.append(time.perf_counter() - begun)
        begun = time.perf_counter()
        intake = read_hl7(path, now=NOW, said=said)
        ours.append(time.perf_counter() - begun)
    assert len([d for d in intake.entries if d.entry.channel == "ph"]) == MESSAGES
    ratio = median(ours) / median(alone)
    print(f"\n{MESSAGES} messages: parser {median(alone):.2f} s, intake {median(ours):.2f} s, ratio {ratio:.2f}")
    assert ratio <= LIMIT
