"""The patient of the invented night who does not respond: the richest record, with every figure written by hand."""

from __future__ import annotations

from core.judgement.response_shapes import JudgedGas, ResponseFigure, Step
from core.judgement.shapes import (
    Concern,
    DueFigure,
    EpisodeFigures,
    FlagFigure,
    LeverFigure,
    RatioFigure,
    ScoreFigure,
    ScoreInput,
    SupportFigure,
)
from core.record.message import Message
from tests.support.invented_record import NOW, ZONE, Bed, at, devices, gas, record_of


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
        gas("20:50", "7.26", 68, 58, 0.28, "acidotic"),
        gas("22:10", "7.27", 66, 60, 0.28, "acidotic"),
        gas("23:20", "7.25", 69, 61, 0.28, "acidotic"),
        gas("00:40", "7.24", 71, 64, 0.35, "severe"),
        gas("04:20", "7.22", 74, 63, 0.35, "severe"),
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
