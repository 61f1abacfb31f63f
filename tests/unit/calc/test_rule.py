from datetime import date
from fractions import Fraction as Rational

import pytest

from effluent.calc.rule import (
    Basis,
    action_cut,
    basis,
    cut,
    in_force,
    limit_unit,
    on_the_cut,
    place,
    proof,
    rounded,
    written_cut,
)
from effluent.domain import Bound, BrokenBy, Fraction, Limit, Outcome, Qualifier, Quantity, Rounding
from effluent.errors import UnitMismatch, UnitUnknown, ValueRefused


def limit(written, **changes):
    known = {"point": "P1", "analyte": "cadmium", "effective_from": date(2020, 1, 1), "authority": "a"}
    known |= {"document": "d", "entered_by": "P01", "value": Quantity.parse(written)}
    return Limit(**(known | changes))


@pytest.mark.parametrize(
    ("text", "worth"),
    [("0.11", "0.01"), ("5", "1"), ("5.0", "0.1"), ("36000", "1"), ("3.60e4", "100"), ("1e-3", "0.001")],
)
def test_place_is_the_worth_of_the_last_figure_written(text, worth):
    assert place(Quantity(text, "mg/L")) == Rational(worth)


def test_place_of_no_number_is_refused():
    with pytest.raises(ValueRefused):
        place(Quantity("1_0", "mg/L"))


# NIST SP 811, appendix B.7.1: 6.974 951 5 to three digits is 6.97, to two 7.0, to five 6.9750, to seven
# 6.974 952; 6.974 950 5 to seven is 6.974 950
@pytest.mark.parametrize(
    ("value", "like", "expected"),
    [
        ("6.9749515", "1.00", "6.97"),
        ("6.9749515", "1.0", "7.0"),
        ("6.9749515", "1.0000", "6.9750"),
        ("6.9749515", "1.000000", "6.974952"),
        ("6.9749505", "1.000000", "6.974950"),
    ],
)
def test_rounding_is_half_to_even(value, like, expected):
    assert rounded(Rational(value), Quantity(like, "mm")) == Rational(expected)


@pytest.mark.parametrize("written", ["0.11", "0.12", "5", "3.60e4", "0"])
@pytest.mark.parametrize("bound", Bound)
@pytest.mark.parametrize("broken_by", BrokenBy)
def test_cut_says_the_same_as_rounding_and_comparing(written, bound, broken_by):
    asked = limit(f"{written} mg/L", bound=bound, broken_by=broken_by, rounding=Rounding.SIGNIFICANT_FIGURES)
    found, edge = cut(asked), asked.value.magnitude
    for eighths in range(-16, 17):
        value = edge + place(asked.value) * eighths / 8
        beyond = (
            rounded(value, asked.value) - edge
            if bound == Bound.MAXIMUM
            else edge - rounded(value, asked.value)
        )
        expected = beyond > 0 or (beyond == 0 and broken_by == BrokenBy.REACHING)
        passed = value > found.value if bound == Bound.MAXIMUM else value < found.value
        assert (passed or (value == found.value and found.inclusive)) == expected


def test_cuts_stand_in_the_canonical_unit():
    asked = limit("110 ug/L", action_level=Quantity.parse("0.00008 g/L"))
    assert (written_cut(asked).value, written_cut(asked).double) == (Rational("0.11"), 0.11)
    assert (action_cut(asked).value, limit_unit(asked.value)) == (Rational("0.08"), "mg/L")


def test_action_level_of_another_kind_is_refused():
    with pytest.raises(UnitMismatch):
        action_cut(limit("0.11 mg/L", action_level=Quantity.parse("1 degC")))


def test_limit_in_an_unknown_unit_is_refused():
    with pytest.raises(UnitUnknown):
        cut(limit("0.11 mgg/L"))


def test_first_and_last_day_count():
    asked = limit("1 mg/L", effective_from=date(2026, 3, 1), effective_to=date(2026, 3, 2))
    days = [date(2026, 2, 28), date(2026, 3, 1), date(2026, 3, 2), date(2026, 3, 3)]
    assert [in_force(asked, day) for day in days] == [False, True, True, False]


@pytest.mark.parametrize(
    ("reading", "asked", "expected"),
    [
        (Fraction.TOTAL, Fraction.TOTAL, Basis.VALUE),
        (Fraction.TCLP, Fraction.TCLP, Basis.VALUE),
        (Fraction.DISSOLVED, Fraction.TOTAL_RECOVERABLE, Basis.AT_LEAST),
        (Fraction.TOTAL_RECOVERABLE, Fraction.TOTAL, Basis.AT_LEAST),
        (Fraction.TOTAL, Fraction.TOTAL_RECOVERABLE, Basis.AT_MOST),
        (Fraction.TOTAL_RECOVERABLE, Fraction.DISSOLVED, Basis.AT_MOST),
        (Fraction.TCLP, Fraction.DISSOLVED, Basis.OTHER_FRACTION),
        (Fraction.DISSOLVED, Fraction.TCLP, Basis.OTHER_FRACTION),
    ],
)
def test_part_bounds_from_below_and_whole_from_above(reading, asked, expected):
    assert basis(reading, Qualifier.EQUAL, asked) == expected


@pytest.mark.parametrize("bound", Bound)
@pytest.mark.parametrize("broken", [False, True])
@pytest.mark.parametrize("known", [Basis.OTHER_FRACTION, Basis.OTHER_KIND])
def test_what_says_nothing_proves_nothing(known, bound, broken):
    assert proof(known, bound, broken=broken) == Outcome.UNDETERMINED


@pytest.mark.parametrize("inclusive", [False, True])
def test_strict_bound_on_the_cut_does_not_ask_the_comparison(inclusive):
    assert not on_the_cut(Basis.BELOW, Bound.MAXIMUM, inclusive=inclusive)
    assert on_the_cut(Basis.ABOVE, Bound.MAXIMUM, inclusive=inclusive)
    assert on_the_cut(Basis.BELOW, Bound.MINIMUM, inclusive=inclusive)
    assert not on_the_cut(Basis.ABOVE, Bound.MINIMUM, inclusive=inclusive)
    assert on_the_cut(Basis.AT_MOST, Bound.MAXIMUM, inclusive=inclusive) == inclusive
