"""What somebody may type at random, sensible and senseless."""

from __future__ import annotations

from typing import Final

BRIEF: Final = ("rr 27", "spo2 90", "hr 104", "18/6 30", "gcs 14", "note seen by the other", "mask off", "mask on")
LINES: Final = (
    *BRIEF, "16/6 35", "20/8", "bpap-st 14/5 28", "cpap 8 40", "rr 30 spo2 88", "ph 7.29 paco2 62 pao2 63",
    "ph 7.31 paco2 8.1 pao2 8.6", "05:10 ph 7.22 paco2 74 pao2 58 gas_fio2 35%", "04:10 rr 24", "gas sent",
    "checked no change", "told registrar: comes now", "note tolerates the mask", "ceiling_of_care no_intubation",
    "stopped end_reason weaned", "23:59 hr 99", "fio2 40", "o2 2", "rr 12 note drowsy", "skin check",
)  # fmt: skip
NONSENSE: Final = (
    "", " ", "?", "rr", "ph 99", "16/", "/", "ph 7.2 ph 7.3", "99:99 rr 20", "rr 1e999", "rr -3", "rr nan", "told",
    "<b>rr</b> 20 & 'x'", "note \u202eabc\u202c \u0301\u0301", "\U0001f600 rr 20", "x" * 190, "16/6 35 " * 12,
    "note {label} %s {0}", "2026-03-28 04:00 rr 20", "rr 20;spo2 90", "rr\t20", "'; drop table entries; --",
)  # fmt: skip
TYPED: Final = (
    "7.29", "7,31", "62", "8.1", "28", "35%", "rr", "Bed 9", "Bed 7", "bed", "05:10", "04:00", "07:30 19:30", "AB",
    "CD", "2580", "0000", "four quiet boats tonight", "reason", "15", "0", "-1", "1e9", "weaned", "Dr Test 123",
    "gas", "ph", "note", "x",
)  # fmt: skip
PAGES: Final = ("ward", "episode", "map", "handover", "compare", "statistics")
