"""The axes of a comparison write a quantity as a laboratory does."""

from app.compare.courses import Row


def test_a_ph_has_two_decimals_on_its_axis_and_other_quantities_what_tells_them_apart() -> None:
    assert Row("ph", "pH", "pH", 2, 7.1, 7.5, ()).least_decimals == 2
    assert Row("paco2", "PaCO2", "mmHg", 0, 40, 90, ()).least_decimals == 0
