"""Figures as people read them. Also runs the examples in the docstrings of the room's plain modules."""

import doctest
from decimal import ROUND_HALF_UP, Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.look import formats
from app.operations import outcome
from app.session import clock, failure, local_zone
from core.record.channels import CHANNELS, Kind
from core.record.instant import parse


@pytest.mark.parametrize("module", [formats, clock, local_zone, failure, outcome], ids=lambda m: m.__name__)
def test_examples(module: object) -> None:
    assert doctest.testmod(module).failed == 0  # type: ignore[arg-type]


@given(st.decimals(-1000, 1000, places=3), st.integers(0, 2))
def test_rounding_is_half_up_of_what_was_typed(typed: Decimal, decimals: int) -> None:
    wanted = typed.quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP)
    assert formats.rounded(float(typed), decimals) == wanted


@given(st.floats(-1e6, 1e6), st.integers(0, 3))
def test_no_lone_point_and_no_minus_on_a_zero(value: float, decimals: int) -> None:
    for text in (formats.fixed(value, decimals), formats.trimmed(value, decimals)):
        assert text.lstrip(formats.MINUS)[0].isdigit()
        assert text[-1].isdigit()
        assert text not in ("−0", "−0.0", "−0.00", "−0.000")


def test_dates_have_the_month_in_letters_and_24_hours() -> None:
    assert formats.wall(parse("2026-03-28T14:05:00Z"), "Europe/London") == "28-Mar-2026 14:05"
    assert formats.wall(parse("2026-07-01T23:30:00Z"), "Europe/London") == "02-Jul-2026 00:30"


def test_an_hour_that_comes_twice_says_which() -> None:
    first, second = parse("2026-10-25T00:30:00Z"), parse("2026-10-25T01:30:00Z")
    assert formats.clock(first, "Europe/London") == "01:30 BST"
    assert formats.clock(second, "Europe/London") == "01:30 GMT"
    assert formats.clock(parse("2026-10-25T03:30:00Z"), "Europe/London") == "03:30"


def test_a_span_says_its_date_once() -> None:
    start = parse("2026-03-27T20:00:00Z")
    assert formats.span(start, parse("2026-03-27T22:00:00Z"), "UTC") == "27-Mar-2026 20:00 to 22:00"
    assert formats.span(start, parse("2026-03-28T08:00:00Z"), "UTC") == "27-Mar-2026 20:00 to 28-Mar-2026 08:00"


def test_every_numeric_channel_has_a_reading_with_its_unit() -> None:
    for c in CHANNELS.values():
        if c.kind is not Kind.NUMBER or c.hard is None:
            continue
        text = formats.quantity(c.key, c.hard[1])
        unit = formats.shown_unit(c.key)
        assert text.endswith(unit), (c.key, text)
        assert formats.quantity(c.key, None) == "not recorded"
        assert formats.quantity(c.key, float("nan")) == "not recorded"


def test_laboratory_values_keep_precision_and_settings_do_not() -> None:
    assert formats.quantity("ph", 7.3) == "7.30"
    assert formats.quantity("ipap", 16.0) == "16 cmH2O"
    assert formats.quantity("ti", 0.90) == "0.9 s"
    assert formats.quantity("temp", 37.0) == "37.0 °C"
    assert formats.quantity("mode", "BPAP-ST") == "BPAP-ST"


def test_an_unknown_gas_unit_is_refused() -> None:
    with pytest.raises(ValueError, match="mmHg or kPa"):
        formats.gas_pressure(40, "torr")


def test_marked_up_text_is_inert() -> None:
    shown = formats.inert('<img src="x"> & <b>bold</b>\nnext')
    assert "<img" not in shown
    assert "<b>" not in shown
    assert "<br>next" in shown
