"""A small invented ward for tests of the window: records typed as people type them, figures written by hand
so that a screen can be judged before and apart from the judgement behind it. No real people."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import count

import numpy as np

from core.judgement.shapes import (
    Concern,
    DueFigure,
    EpisodeFigures,
    FlagFigure,
    GasFigure,
    JudgedGas,
    LeverFigure,
    RatioFigure,
    ResponseFigure,
    ScoreFigure,
    ScoreInput,
    Step,
    SupportFigure,
)
from core.record.channels import channel
from core.record.entries import Entry, from_reading, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import HOUR, MINUTE, Instant, parse
from core.record.knowledge import standing
from core.record.message import Message
from core.record.reading import read_value
from core.record.samples import DeviceSamples

ZONE = "Europe/London"
START: Instant = parse("2026-03-27T19:30:00+00:00")
END: Instant = parse("2026-03-28T07:30:00+00:00")
NOW: Instant = parse("2026-03-28T05:30:00+00:00")


def at(clock: str) -> Instant:
    """The moment of the night at which the clock shows `clock`."""
    day = "27" if int(clock[:2]) >= 12 else "28"
    return parse(f"2026-03-{day}T{clock}:00+00:00")


@dataclass(frozen=True)
class Bed:
    """One episode of the invented ward."""

    record: Episode
    figures: EpisodeFigures


_seq = count(1)


def record_of(key: str, rows: Iterable[tuple[str, dict[str, str]]], samples: Iterable[DeviceSamples] = ()) -> Episode:
    """An episode from rows of (clock, {channel: text, with an optional unit after a space})."""
    entries: list[Entry] = []
    for clock, values in rows:
        for name, text in values.items():
            ch = channel(name)
            number, _, unit = text.partition(" ") if ch.units else (text, "", "")
            new = from_reading(key, at(clock), read_value(ch, number, unit), by="AB", zone=ZONE, confirmed=True)
            seq = next(_seq)
            entries.append(recorded(new, seq, f"e{seq}", at(clock)))
    return build_episode(key, standing(entries), samples)


def device(key: str, name: str, since: str, level: float, swing: float, drift: float = 0.0) -> DeviceSamples:
    """One-minute device data from `since` to now, seeded by the names."""
    n = (NOW - at(since)) // MINUTE
    noise = np.random.default_rng(sum(map(ord, key + name))).normal(0, swing, n)
    v = level + drift * np.arange(n) / 60 + noise
    return DeviceSamples(
        key, name, "device", at(since) + np.arange(n, dtype=np.int64) * MINUTE, np.maximum(v, 0).round(0)
    )


def devices(
    key: str, since: str, rr: float, leak: float, vte: float, drift: float = 0.0
) -> tuple[DeviceSamples, ...]:
    return (
        device(key, "rr_total", since, rr, 1.6, drift),
        device(key, "leak", since, leak, 4),
        device(key, "vte", since, vte, 45),
        device(key, "spo2", since, 90, 1.0),
    )


def _gas(clock: str, ph: str, co2: float, o2: float, fio2: float, state: str) -> GasFigure:
    return GasFigure(
        at(clock),
        "arterial",
        ph=float(ph),
        ph_text=ph,
        paco2_mmHg=co2,
        pao2_mmHg=o2,
        fio2=fio2,
        fio2_from="setting",
        pf_mmHg=round(o2 / fio2),
        hco3_calculated_mmol_L=29.4,
        sbe_mmol_L=2.3,
        state=state,
        hypercapnic=co2 > 45,
        consistent=None,
    )


def failing() -> Bed:
    """COPD, three settings changes, pH falling: the one to see first."""
    key = "E-7"
    record = record_of(
        key,
        [
            ("20:40", {"label": "Bed 7", "indication": "copd", "age": "71", "location": "Bay B"}),
            ("20:50", {"ph": "7.26", "paco2": "68", "pao2": "58", "rr": "30", "spo2": "87"}),
            (
                "21:05",
                {"mode": "BPAP-ST", "ipap": "12", "epap": "5", "fio2": "28", "rate_set": "14", "ti": "1.0"},
            ),
            ("22:10", {"ph": "7.27", "paco2": "66", "pao2": "60", "rr": "29", "spo2": "89", "gcs": "15"}),
            ("22:20", {"ipap": "16"}),
            ("23:20", {"ph": "7.25", "paco2": "69", "pao2": "61", "rr": "28"}),
            ("23:30", {"ipap": "18", "epap": "6", "fio2": "35"}),
            ("00:40", {"ph": "7.24", "paco2": "71", "pao2": "64", "rr": "26"}),
            ("01:10", {"mask_off": ""}),
            ("01:35", {"mask_on": ""}),
            ("02:05", {"rr": "27", "spo2": "88", "gcs": "14"}),
            ("03:05", {"ipap": "20"}),
            ("04:20", {"ph": "7.22", "paco2": "74", "pao2": "63", "rr": "22", "gcs": "13", "spo2": "88"}),
            ("05:10", {"rr": "20", "spo2": "86"}),
        ],
        devices(key, "21:05", 28, 24, 380, -0.8),
    )
    gases = (
        _gas("20:50", "7.26", 68, 58, 0.28, "acidotic"),
        _gas("22:10", "7.27", 66, 60, 0.28, "acidotic"),
        _gas("23:20", "7.25", 69, 61, 0.28, "acidotic"),
        _gas("00:40", "7.24", 71, 64, 0.35, "severe"),
        _gas("04:20", "7.22", 74, 63, 0.35, "severe"),
    )
    why = Message("judged.ph", {"delta": -0.02, "noise": 0.033})
    responses = (
        ResponseFigure(
            at("21:05"),
            "start",
            at("21:05"),
            (),
            ("co2", "oxygen"),
            at("21:35"),
            at("23:05"),
            at("20:50"),
            7.26,
            68,
            None,
            headline="no clear change",
            headline_gas_at=at("22:10"),
            state="acidotic",
            gases=(
                JudgedGas(
                    at("22:10"),
                    65,
                    "in_window",
                    0.01,
                    -2,
                    verdict="no clear change",
                    state="acidotic",
                    why=(why,),
                ),
            ),
        ),
        ResponseFigure(
            at("22:20"),
            "change",
            at("22:20"),
            (Step(at("22:20"), "ipap", 12.0, 16.0),),
            ("co2",),
            at("22:50"),
            at("00:20"),
            at("22:10"),
            7.27,
            66,
            headline="no clear change",
            headline_gas_at=at("23:20"),
            state="acidotic",
            gases=(JudgedGas(at("23:20"), 60, "in_window", -0.02, 3, verdict="no clear change", state="acidotic"),),
        ),
        ResponseFigure(
            at("03:05"),
            "change",
            at("03:05"),
            (Step(at("03:05"), "ipap", 18.0, 20.0),),
            ("co2",),
            at("03:35"),
            at("05:05"),
            at("00:40"),
            7.24,
            71,
            headline="worse",
            headline_gas_at=at("04:20"),
            state="severe",
            gases=(JudgedGas(at("04:20"), 75, "in_window", -0.02, 6, verdict="worse", state="severe"),),
        ),
    )
    flags = (
        FlagFigure(
            "f1",
            "ph_below_7_25_after_support",
            "acidosis",
            "escalate",
            at("04:20"),
            (Message("evidence.ph", {"ph": 7.22, "at": at("04:20")}),),
            "Confalonieri, ERJ 2005;25:348",
            "confirmed",
            "p",
        ),
        FlagFigure(
            "f2",
            "paco2_rising",
            "acidosis",
            "concern",
            at("00:40"),
            (Message("evidence.paco2", {"paco2_mmHg": 74, "at": at("04:20")}),),
            "common practice, no source",
            "common practice",
            "p",
            strongest=False,
        ),
        FlagFigure(
            "f3",
            "gcs_fall",
            "consciousness",
            "concern",
            at("04:20"),
            (Message("evidence.gcs", {"gcs": 13, "before": 15}),),
            "BTS/ICS 2016, Thorax 71 S2",
            "from memory",
            "p",
        ),
    )
    due = (
        DueFigure(
            "gas",
            Message("due.gas_after_change", {"anchor_at": at("03:05")}),
            at("04:50"),
            at("05:20"),
            "overdue",
        ),
        DueFigure("reassessment", Message("due.reassessment", {}), at("05:30"), at("06:00"), "soon"),
    )
    levers = (
        LeverFigure("pressure_support", True, (Message("lever.ps", {}),), None, ()),
        LeverFigure("fio2", False, (Message("lever.fio2_in_range", {}),)),
    )
    hacor = ScoreFigure(
        None,
        8,
        12,
        at("04:20"),
        ("heart rate",),
        {"ph": ScoreInput(7.22, at("04:20"), 4), "rr": ScoreInput(22.0, at("04:20"), 0)},
        "outside",
    )
    figures = EpisodeFigures(
        key,
        NOW,
        "Bed 7",
        ZONE,
        {"indication": "copd", "age": 71.0, "location": "Bay B"},
        SupportFigure(
            "BPAP-ST",
            20,
            6,
            14,
            0.35,
            None,
            14,
            1.0,
            None,
            at("21:05"),
            None,
            None,
            at("03:05"),
            8.0,
            8.0,
            True,
        ),
        responses,
        gases,
        RatioFigure(180, at("04:20"), 1.2, -4, 6, 5),
        flags=flags,
        due=due,
        levers=levers,
        scores={"hacor": hacor},
        concern=Concern(0, 0.0, Message("concern.flag", {"marker": "ph_below_7_25_after_support"})),
    )
    return Bed(record, figures)


def improving() -> Bed:
    """COPD, prompt response; quiet."""
    key = "E-3"
    record = record_of(
        key,
        [
            (
                "21:20",
                {
                    "label": "Bed 3",
                    "indication": "copd",
                    "location": "Bay A",
                    "ph": "7.27",
                    "paco2": "64",
                    "pao2": "57",
                    "rr": "29",
                    "spo2": "88",
                },
            ),
            ("21:40", {"mode": "BPAP-ST", "ipap": "14", "epap": "5", "fio2": "28", "rate_set": "14"}),
            ("22:00", {"ipap": "18"}),
            ("23:05", {"ph": "7.33", "paco2": "55", "pao2": "62", "rr": "22", "spo2": "91"}),
            ("03:00", {"ph": "7.36", "paco2": "51", "pao2": "65", "rr": "20", "spo2": "91"}),
        ],
        devices(key, "21:40", 22, 12, 520, -0.5),
    )
    gases = (
        _gas("21:20", "7.27", 64, 57, 0.28, "acidotic"),
        _gas("23:05", "7.33", 55, 62, 0.28, "acidotic"),
        _gas("03:00", "7.36", 51, 65, 0.28, "resolved"),
    )
    responses = (
        ResponseFigure(
            at("22:00"),
            "start",
            at("21:40"),
            (Step(at("22:00"), "ipap", 14.0, 18.0),),
            ("co2", "oxygen"),
            at("22:30"),
            at("00:00"),
            at("21:20"),
            7.27,
            64,
            headline="better",
            headline_gas_at=at("23:05"),
            state="acidotic",
            gases=(
                JudgedGas(at("23:05"), 65, "in_window", 0.06, -9, verdict="better", state="acidotic"),
                JudgedGas(at("03:00"), 300, "late", 0.09, -13, verdict="better", state="resolved"),
            ),
        ),
    )
    figures = EpisodeFigures(
        key,
        NOW,
        "Bed 3",
        ZONE,
        {"indication": "copd", "location": "Bay A"},
        SupportFigure(
            "BPAP-ST",
            18,
            5,
            13,
            0.28,
            None,
            14,
            None,
            None,
            at("21:40"),
            None,
            None,
            at("22:00"),
            7.8,
            7.8,
            True,
        ),
        responses,
        gases,
        concern=Concern(5, 1.0),
        due=(DueFigure("reassessment", Message("due.reassessment", {}), at("06:30"), at("07:00"), "open"),),
    )
    return Bed(record, figures)


def on_cpap() -> Bed:
    """Pulmonary oedema on CPAP; a window still open."""
    key = "E-12"
    record = record_of(
        key,
        [
            (
                "03:50",
                {
                    "label": "Bed 12",
                    "indication": "cardiogenic pulmonary oedema",
                    "location": "Bay C",
                    "rr": "34",
                    "spo2": "86",
                },
            ),
            (
                "04:05",
                {"ph": "7.31", "paco2": "39", "pao2": "52", "mode": "CPAP", "cpap": "10", "fio2": "60"},
            ),
        ],
        (device(key, "spo2", "04:05", 93, 1), device(key, "rr_total", "04:05", 28, 2, -3)),
    )
    responses = (
        ResponseFigure(
            at("04:05"),
            "start",
            at("04:05"),
            (),
            ("oxygen",),
            at("04:35"),
            at("06:05"),
            at("04:05"),
            7.31,
            39,
            87,
            oxygen_arm_active=True,
        ),
    )
    due = (DueFigure("gas", Message("due.gas_after_start", {}), at("04:35"), at("06:05"), "open"),)
    figures = EpisodeFigures(
        key,
        NOW,
        "Bed 12",
        ZONE,
        {"indication": "cardiogenic pulmonary oedema", "location": "Bay C"},
        SupportFigure(
            "CPAP",
            None,
            10,
            0,
            0.6,
            None,
            None,
            None,
            None,
            at("04:05"),
            None,
            None,
            at("04:05"),
            1.4,
            1.4,
            True,
        ),
        responses,
        (_gas("04:05", "7.31", 39, 52, 0.6, "acidotic"),),
        due=due,
        concern=Concern(4, 0.0),
    )
    return Bed(record, figures)


def ended() -> Bed:
    """Weaned in the night: dimmed."""
    key = "E-5"
    record = record_of(
        key,
        [
            ("19:40", {"label": "Bed 5", "indication": "obesity hypoventilation", "location": "Bay A"}),
            ("19:45", {"mode": "BPAP-S", "ipap": "16", "epap": "8", "fio2": "30"}),
            ("23:00", {"ph": "7.38", "paco2": "50", "pao2": "68"}),
            ("00:10", {"stopped": "", "end_reason": "weaned"}),
        ],
    )
    figures = EpisodeFigures(
        key,
        NOW,
        "Bed 5",
        ZONE,
        {"indication": "obesity hypoventilation", "location": "Bay A"},
        SupportFigure("BPAP-S", 16, 8, 8, 0.3, since=at("19:45"), ended_at=at("00:10"), end_reason="weaned"),
        (),
        (_gas("23:00", "7.38", 50, 68, 0.3, "resolved"),),
        concern=Concern(6),
    )
    return Bed(record, figures)


def leaking(n: int) -> Bed:
    """A large leak; `n` tells beds apart."""
    key = f"E-{n}"
    record = record_of(
        key,
        [
            (
                "22:30",
                {
                    "label": f"Bed {n}",
                    "indication": "copd",
                    "location": "Bay B",
                    "ph": "7.30",
                    "paco2": "60",
                    "pao2": "59",
                },
            ),
            (
                "22:45",
                {
                    "mode": "BPAP-ST",
                    "ipap": "16",
                    "epap": "5",
                    "o2_flow": "4",
                    "leak_definition": "unintentional",
                },
            ),
            ("00:15", {"ph": "7.31", "paco2": "59", "pao2": "62"}),
            ("02:00", {"mask_adjusted": ""}),
        ],
        devices(key, "22:45", 24, 52, 300),
    )
    responses = (
        ResponseFigure(
            at("22:45"),
            "start",
            at("22:45"),
            (),
            ("co2",),
            at("23:15"),
            at("00:45"),
            at("22:30"),
            7.30,
            60,
            headline="no clear change",
            headline_gas_at=at("00:15"),
            state="acidotic",
            gases=(JudgedGas(at("00:15"), 90, "in_window", 0.01, -1, verdict="no clear change", state="acidotic"),),
        ),
    )
    flag = FlagFigure(
        f"l{n}",
        "leak_over_limit",
        "mask",
        "concern",
        at("23:40"),
        (Message("evidence.leak", {"leak": 52, "limit": 30}),),
        "common practice, no source",
        "common practice",
        "p",
    )
    figures = EpisodeFigures(
        key,
        NOW,
        f"Bed {n}",
        ZONE,
        {"indication": "copd", "location": "Bay B"},
        SupportFigure(
            "BPAP-ST",
            16,
            5,
            11,
            None,
            4,
            None,
            None,
            None,
            at("22:45"),
            None,
            None,
            at("22:45"),
            6.7,
            6.7,
            True,
        ),
        responses,
        (_gas("22:30", "7.30", 60, 59, 0.28, "acidotic"), _gas("00:15", "7.31", 59, 62, 0.28, "acidotic")),
        flags=(flag,),
        concern=Concern(1, float(n), Message("concern.flag", {"marker": "leak_over_limit"})),
        due=(DueFigure("reassessment", Message("due.reassessment", {}), at("05:40"), at("06:10"), "soon"),),
    )
    return Bed(record, figures)


def ward() -> tuple[Bed, ...]:
    """Nine episodes of a night."""
    return (
        improving(),
        failing(),
        ended(),
        leaking(2),
        on_cpap(),
        leaking(9),
        leaking(10),
        leaking(11),
        leaking(14),
    )


__all__ = ["END", "HOUR", "NOW", "START", "ZONE", "Bed", "at", "ward"]
