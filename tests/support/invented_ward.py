"""A small invented ward for tests of the window: records typed as people type them, figures written by hand
so that a screen can be judged before and apart from the judgement behind it. No real people."""

from __future__ import annotations

from core.judgement.response_shapes import JudgedGas, ResponseFigure, Step
from core.judgement.shapes import Concern, DueFigure, EpisodeFigures, FlagFigure, SupportFigure
from core.record.instant import HOUR
from core.record.message import Message
from tests.support.invented_failing import failing
from tests.support.invented_record import END, NOW, START, ZONE, Bed, at, device, devices, gas, record_of


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
        gas("21:20", "7.27", 64, 57, 0.28, "acidotic"),
        gas("23:05", "7.33", 55, 62, 0.28, "acidotic"),
        gas("03:00", "7.36", 51, 65, 0.28, "resolved"),
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
        (gas("04:05", "7.31", 39, 52, 0.6, "acidotic"),),
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
        (gas("23:00", "7.38", 50, 68, 0.3, "resolved"),),
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
        (gas("22:30", "7.30", 60, 59, 0.28, "acidotic"), gas("00:15", "7.31", 59, 62, 0.28, "acidotic")),
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


__all__ = ["END", "HOUR", "NOW", "START", "ZONE", "Bed", "at", "failing", "record_of", "ward"]
