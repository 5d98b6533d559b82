"""Catalogue: time on support, trends and leak, and what a device measures beside them."""

from __future__ import annotations

from typing import Final

from core.figures.catalogue_entry import FigureEntry

_HOURS = "tests/outside/test_hours_on_mask.py::"
_STATISTICS = "tests/outside/test_trend_statistics.py::"
_TREND = "tests/core/judgement/test_trend.py::"
_LEAK = "tests/core/judgement/test_leak_trend.py::"
_LEAK_AT = "core.judgement.leak_trend."
_DEFINED = "None where nobody said what the device calls leak."

_line = FigureEntry

SUPPORT: Final = (
    _line(
        "hours_on_mask", "Hours on the mask since support started", "h",
        "time from the start to now or the end of support, less logged breaks", "definition", "common practice",
        "core.judgement.support_findings.support_figure", _HOURS + "test_a_night_worked_by_hand",
        "None where the start is not recorded; breaks that nobody logged count as on the mask. After 12 h without "
        "any entry the hours are presumed.",
    ),
    _line(
        "hours_on_mask_last_24h", "Hours on the mask in the last 24 h", "h",
        "the same within the 24 h before now", "definition", "common practice",
        "core.judgement.support_findings.support_figure", _HOURS + "test_only_the_last_day_counts_for_the_last_day",
        "Breaks that nobody logged count as on the mask. After 12 h without any entry the hours are presumed.",
    ),
    _line(
        "probable_breaks", "Breaks that nobody logged", "",
        "leak at the device's ceiling, or no breath, for 3 min or more", "no source found", "common practice",
        "core.judgement.probable_breaks.probable_breaks",
        _LEAK + "test_three_minutes_make_a_probable_break_two_do_not", "Asked about, never taken as logged.",
    ),
)  # fmt: skip

TRENDS: Final = (
    _line(
        "slope", "Slope per hour (P/F, S/F, ROX, leak, device channels)", "per h",
        "median of the slopes of all pairs of points, with Sen's interval",
        "Sen, J Am Stat Assoc 1968;63:1379", "confirmed",
        "core.judgement.theil_sen.theil_sen", _STATISTICS + "test_sens_worked_example",
        "Two points have no interval; with few points nothing is called significant. Device channels as 15-min "
        "medians.",
    ),
    _line(
        "mann_kendall", "Mann-Kendall test of a trend", "",
        "S of all pairs; exact p for 10 points or fewer without ties, else Z = (S -/+ 1) / sqrt(Var S)",
        "Mann, Econometrica 1945;13:245; exact table Gilbert 1987", "confirmed",
        "core.judgement.mann_kendall.mann_kendall", _STATISTICS + "test_mann_kendall_worked_by_hand",
        "Out of sight until asked for; four points cannot reach p 0.05.",
    ),
    _line(
        "device_median", "15-min median of a device channel", "",
        "median of a quarter of an hour, the newest of the last 15 min", "breath noise averages out",
        "common practice", "core.judgement.device_medians.medians",
        _TREND + "test_medians_take_the_middle_and_ignore_silence",
    ),
    _line(
        "sustained", "Sustained past a limit", "", "at least N of M minutes past it, e.g. 10 of 12",
        "no source found", "common practice",
        "core.judgement.sustained.spells",
        "tests/core/judgement/test_sustained.py::test_ten_of_twelve_minutes_make_a_spell_nine_do_not",
    ),
    _line(
        "course", "pH and PaCO2 between gases", "", "straight line between gases, band from noise and distance",
        "fitted to simulated courses, held-out seeds covered at 90 %", "computed here",
        "core.judgement.course.course_band",
        "tests/core/judgement/test_course.py::test_bands_cover_the_truth_on_held_out_seeds",
        "Never across a change, a break or a change of oxygen; nothing is judged by it.",
    ),
)  # fmt: skip

LEAK: Final = (
    _line(
        "leak_median", "Leak, median", "L/min", "median of the trend's span, breaks left out", "definition",
        "common practice", "core.judgement.leak_trend.leak_figure",
        _LEAK + "test_unknown_definition_gives_a_trend_only", "Unintentional or total, as the device means it.",
    ),
    _line(
        "leak_limit", "Leak limit", "L/min",
        "30 unintentional; a total leak's limit adds k x sqrt(time-weighted pressure), k 8.02",
        "acute use: aim below 30 L/min; orifice model through bench work (Borel, Chest 2009;135:669)",
        "common practice", _LEAK_AT + "limits_at",
        _LEAK + "test_a_total_leaks_limit_adds_the_port_at_the_time_weighted_pressure", _DEFINED,
    ),
    _line(
        "leak_minutes_over", "Minutes over the leak limit", "min",
        "time of the device's samples above the limit, in the span beside it", "definition", "common practice",
        _LEAK_AT + "leak_figure", _LEAK + "test_unintentional_leak_over_its_limit",
        _DEFINED + " Typed readings have no minutes: nobody knows how long one lasted.",
    ),
    _line(
        "leak_readings_over", "Typed readings over the leak limit", "",
        "how many of the readings that people typed are above the limit", "definition", "common practice",
        _LEAK_AT + "leak_figure", _LEAK + "test_readings_typed_now_and_then_have_no_minutes_over_the_limit",
        _DEFINED + " The leak flag asks for minutes: it is not judged from them.",
    ),
    _line(
        "leak_over_since", "Over the leak limit since", "", "start of the 10 of 12 minutes over that still last",
        "no source found", "common practice", _LEAK_AT + "leak_spells", _LEAK + "test_ten_of_twelve_minutes",
        _DEFINED,
    ),
    _line(
        "leak_around_adjustment", "Leak before and after a mask adjustment", "L/min",
        "medians of the 15 min before and after it", "no source found", "common practice",
        _LEAK_AT + "leak_figure", _LEAK + "test_before_and_after_a_mask_adjustment",
    ),
)  # fmt: skip

MEASURED: Final = (
    _line(
        "tidal_volume", "Tidal volume, expired", "mL",
        "median of the last 15 min of the device, or the newer logged value; not across a change or a break",
        "no source found", "common practice", "core.judgement.tidal_volume.measured_at",
        "tests/core/judgement/test_ventilation_findings.py::test_a_median_reaches_back_across_no_change",
        "Modelled on a mask: its trust goes by the leak of the same minutes.",
    ),
    _line(
        "expected_co2", "PaCO2 expected of the ventilation delivered", "mmHg",
        "baseline x alveolar ventilation before / after, by the course of a CO2 store",
        "alveolar ventilation equation at constant VCO2", "computed here", "core.judgement.expected_co2.expected",
        "tests/core/judgement/test_expected_co2.py::"
        "test_it_settles_where_the_alveolar_ventilation_equation_says",
        "Expected, never measured; no marker, score or handover uses it.",
    ),
    _line(
        "pao2_sao2_check", "Saturation that its own gas contradicts", "%",
        "reported saturation more than 5 points from that of PO2 and pH", "no source found", "common practice",
        "core.judgement.gas_findings.gas_figure",
        "tests/core/judgement/test_gas_checks.py::"
        "test_a_saturation_that_its_own_po2_contradicts_is_doubted_beyond_five_points",
    ),
)  # fmt: skip
