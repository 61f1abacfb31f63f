"""Quantities as people write them."""

from fractions import Fraction

import pytest

from effluent.domain import Quantity, exact
from effluent.errors import ValueRefused


@pytest.mark.parametrize(
    ("written", "magnitude", "unit", "spread"),
    [
        ("12.5 L", Fraction(25, 2), "L", 0),
        ("60 ± 1 L", 60, "L", 1),
        ("60+/-1 L", 60, "L", 1),
        ("60 L ± 2 %", 60, "L", Fraction(6, 5)),
        ("-40 °C ± 5 %", -40, "°C", 2),
        ("7.2", Fraction(36, 5), "", 0),
        ("95%", 95, "%", 0),
        ("1.2E-3 mg/L", Fraction(3, 2500), "mg/L", 0),
        (" .5 m³ ", Fraction(1, 2), "m³", 0),
    ],
)
def test_quantity_reads_number_unit_and_uncertainty(written, magnitude, unit, spread):
    quantity = Quantity.parse(written)
    assert (quantity.magnitude, quantity.unit, quantity.spread_magnitude) == (magnitude, unit, spread)


@pytest.mark.parametrize("written", ["12.5 L", "60 ± 1 L", "60 L ± 2 %", "7.2", "-5 °C"])
def test_quantity_is_written_as_it_was_read(written):
    assert str(Quantity.parse(written)) == written
    assert Quantity.parse(str(Quantity.parse(written))) == Quantity.parse(written)


@pytest.mark.parametrize(
    "written",
    ["", "L", "12,5 L", "1 2 L", "60 ± 1 L ± 2 %", "60 ± -1 L", "nan L", "7" * 500],
)
def test_quantity_refuses_what_is_none(written):
    with pytest.raises(ValueRefused, match=r"is not accepted"):
        Quantity.parse(written)


def test_quantity_refuses_long_runs_of_spaces_at_once():
    with pytest.raises(ValueRefused):
        Quantity.parse("1" + " " * 100_000 + "x" * 100_000)


def test_exact_keeps_every_digit():
    assert exact("0.1234567890123456789") == Fraction(1234567890123456789, 10**19)
    with pytest.raises(ValueRefused, match="write digits"):
        exact("one")
