from datetime import date

import pytest

from effluent.calc.reading import Reading
from effluent.calc.units import canonical_unit, convert, nearest
from effluent.calc.verdict import judge
from effluent.domain import (
    Bound,
    BrokenBy,
    Fraction,
    Limit,
    Qualifier,
    Quantity,
    Rounding,
    Statistic,
    exact,
)

KNOWN = {
    "code": "L1",
    "point": "P1",
    "analyte": "cadmium",
    "authority": "Invented council",
    "document": "permit 1",
    "effective_from": date(2020, 1, 1),
    "entered_by": "P01",
    "verified_by": "P02",
}


def reading(written, **changes):
    sign = written[0] if written[0] in "<>" else "="
    number, _, unit = written.lstrip("<>").partition(" ")
    wanted = canonical_unit(unit or "s.u.")
    value = nearest(convert(exact(number), unit or "s.u.", wanted))
    known = {"row": 1, "sample": "S1", "day": date(2026, 3, 1), "analyte": "cadmium"}
    known |= {"fraction": Fraction.TOTAL, "number": number, "unit": unit, "value": value}
    return Reading(**(known | {"canonical_unit": wanted, "qualifier": Qualifier(sign)} | changes))


def limit(written, **changes):
    return Limit(**(KNOWN | {"value": Quantity.parse(written)} | changes))


def lines(written, limit_written, **changes):
    (verdict,) = judge([reading(written)], [limit(limit_written, **changes)])
    return verdict.working


def line(start, found):
    (one,) = [text for text in found if text.startswith(start)]
    return one


def test_working_of_a_value_can_be_followed_with_a_calculator():
    assert lines("111 ug/L", "0.11 mg/L") == (
        "reading: result 1, sample S1, 2026-03-01: cadmium, total: 111 ug/L",
        "conversion: 111 ug/L x 0.001 = 0.111 mg/L",
        "limit L1: maximum 0.11 mg/L, instantaneous, cadmium, total; broken by a reading above it; "
        "readings compared as reported",
        "source: Invented council: permit 1; in force from 2020-01-01; entered by P01, verified by P02",
        "comparison: 0.111 > 0.11 mg/L is true",
        "outcome: over: 111 ug/L is above the limit 0.11 mg/L",
        "margin: (0.11 - 0.111) / 0.11 in mg/L = -0.009091",
    )


def test_source_names_clause_last_day_and_missing_verification():
    found = lines(
        "0.1 mg/L",
        "0.11 mg/L",
        written_at="page 3",
        effective_to=date(2027, 1, 1),
        verified_by=None,
    )
    assert line("source", found) == (
        "source: Invented council: permit 1, page 3; in force from 2020-01-01 to 2027-01-01; "
        "entered by P01, not verified by a second person"
    )


BOUNDS = [
    ("<1.0 mg/L", BrokenBy.REACHING, "< 1 mg/L", ">= 1: no value left breaks it"),
    ("<2 mg/L", BrokenBy.BEYOND, "< 2 mg/L", "> 1: some values left break it, some do not"),
    (">1 mg/L", BrokenBy.BEYOND, "> 1 mg/L", "> 1: every value left breaks it"),
]


@pytest.mark.parametrize(("written", "broken_by", "known", "left"), BOUNDS)
def test_bound_says_which_values_are_left(written, broken_by, known, left):
    found = lines(written, "1.0 mg/L", broken_by=broken_by)
    assert line("known", found) == f"known: truth {known}; the limit is broken by {left}"


def test_rounding_is_shown_before_the_comparison():
    found = lines("115.000 ug/L", "0.11 mg/L", rounding=Rounding.SIGNIFICANT_FIGURES)
    assert line("rounding", found) == "rounding: half to even, to a multiple of 0.01 mg/L: 0.115 -> 0.12"
    assert line("comparison", found) == "comparison: 0.12 > 0.11 mg/L is true"
    assert line("outcome", found) == (
        "outcome: over: 115.000 ug/L, rounded to 0.12 mg/L, is above the limit 0.11 mg/L"
    )


def test_rounding_of_a_bound_is_only_named():
    found = lines("<0.5 mg/L", "0.11 mg/L", rounding=Rounding.SIGNIFICANT_FIGURES)
    assert line("rounding", found) == "rounding: half to even, to a multiple of 0.01 mg/L"


@pytest.mark.parametrize(("written", "reached"), [("0.09 mg/L", "true"), ("0.079 mg/L", "false")])
def test_action_level_is_compared(written, reached):
    found = lines(written, "0.11 mg/L", action_level=Quantity.parse("80 ug/L"))
    assert line("action", found) == f"action level 80 ug/L: {written[:-5]} >= 0.08 mg/L is {reached}"


def test_action_level_of_a_bound_is_not_compared():
    found = lines("<0.1 mg/L", "0.11 mg/L", action_level=Quantity.parse("0.08 mg/L"))
    assert not [text for text in found if text.startswith("action")]


def test_near_says_which_level_is_reached():
    found = lines("6.0", "5.0", bound=Bound.MINIMUM, action_level=Quantity.parse("6.0"))
    assert line("action", found) == "action level 6.0: 6 <= 6 s.u. is true"
    assert line("outcome", found) == (
        "outcome: near: 6.0 is not below the limit 5.0, but it reaches the action level 6.0"
    )


def test_decimal_that_does_not_end_is_marked():
    found = lines("139.9 degF", "60 degC", bound=Bound.MINIMUM)
    assert line("conversion", found) == "conversion: 139.9 degF x 5/9 - 160/9 ~ 59.94444444 degC"
    assert line("comparison", found) == "comparison: ~59.94444444 < 60 degC is true"


@pytest.mark.parametrize(
    ("written", "bound", "margin"),
    [
        ("<0.05 mg/L", Bound.MAXIMUM, "margin: at least (0.1 - 0.05) / 0.1 in mg/L = 0.5"),
        (">0.15 mg/L", Bound.MAXIMUM, "margin: at most (0.1 - 0.15) / 0.1 in mg/L = -0.5"),
        (">0.15 mg/L", Bound.MINIMUM, "margin: at least (0.15 - 0.1) / 0.1 in mg/L = 0.5"),
        ("<0.5 mg/L", Bound.MAXIMUM, "margin: none"),
    ],
)
def test_margin_of_a_bound_says_on_which_side_it_lies(written, bound, margin):
    assert line("margin", lines(written, "0.1 mg/L", bound=bound)) == margin


REASONS = [
    (
        Fraction.TOTAL,
        "<0.5 mg/L",
        "less than 0.5 mg/L proves nothing: the limit is 0.11 mg/L",
    ),
    (
        Fraction.TCLP,
        "0.01 mg/L",
        "a reading 0.01 mg/L of TCLP extract proves nothing about a limit for total",
    ),
    (
        Fraction.DISSOLVED,
        "0.01 mg/L",
        "at least 0.01 mg/L (the reading is of dissolved, the limit for total): "
        "whether the truth is above the limit 0.11 mg/L is not shown",
    ),
    (
        Fraction.TOTAL_RECOVERABLE,
        "0.01 mg/L",
        "at least 0.01 mg/L (the reading is of total recoverable, the limit for total): "
        "whether the truth is above the limit 0.11 mg/L is not shown; "
        "if the limit's document takes both as one, enter it for total recoverable too",
    ),
    (
        Fraction.TOTAL,
        "0.01 mg/kg",
        "the reading 0.01 mg/kg is a mass ratio, the limit 0.11 mg/L a concentration: "
        "nothing is proved; the density of the liquid would join them",
    ),
    (
        Fraction.TOTAL,
        "10 degC",
        "the reading 10 degC is a temperature, the limit 0.11 mg/L a concentration: nothing is proved",
    ),
]


@pytest.mark.parametrize(("fraction", "written", "why"), REASONS)
def test_undetermined_says_why(fraction, written, why):
    (verdict,) = judge([reading(written, fraction=fraction)], [limit("0.11 mg/L")])
    assert verdict.reason == why


def test_bound_above_the_limit_keeps_the_laboratorys_unit():
    (verdict,) = judge([reading("<500 ug/L", reporting_limit="0.05")], [limit("0.43 mg/L")])
    assert verdict.reason == "less than 500 ug/L proves nothing: the limit is 0.43 mg/L"


def test_working_names_the_analyte_as_a_reader_knows_it():
    (verdict,) = judge([reading("7.2", analyte="ph")], [limit("5.0", analyte="ph", bound=Bound.MINIMUM)])
    assert ": pH, total: 7.2" in verdict.working[0]
    assert ", pH, total; broken by" in line("limit", verdict.working)


def test_bound_on_the_open_side_of_a_minimum_is_not_shown():
    (verdict,) = judge([reading("<7")], [limit("5.0", bound=Bound.MINIMUM)])
    assert verdict.reason == "less than 7: whether the truth is below the limit 5.0 is not shown"


def test_value_above_the_laboratorys_range_is_more_than_it():
    (verdict,) = judge([reading(">0.2 mg/L")], [limit("0.11 mg/L")])
    assert verdict.reason == "more than 0.2 mg/L is above the limit 0.11 mg/L"


def test_other_kind_has_no_comparison():
    found = lines("10 mg/kg", "0.11 mg/L")
    assert line("conversion", found) == "conversion: none from mg/kg to mg/L"
    assert not [text for text in found if text.startswith(("known", "comparison", "action"))]


def test_density_stands_in_the_conversion():
    ppm = reading("1 ppm", density="1.1 kg/L", canonical_unit="mg/L", value=1.1)
    (verdict,) = judge([ppm], [limit("2 mg/L")])
    assert line("conversion", verdict.working) == "conversion: 1 ppm x 1.1 (density 1.1 kg/L) = 1.1 mg/L"


def test_reading_line_keeps_the_laboratorys_text_and_flag():
    (verdict,) = judge([reading("0.0123 mg/L", text="0,0123 J", flag="J")], [limit("0.11 mg/L")])
    assert line("reading", verdict.working) == (
        "reading: result 1, sample S1, 2026-03-01: cadmium, total: 0.0123 mg/L, "
        "reported as '0,0123 J', flag J"
    )


def test_daily_working_lists_every_reading_of_the_day():
    readings = [reading("0.05 mg/L"), reading("0.2 mg/L", row=2)]
    (verdict,) = judge(readings, [limit("0.11 mg/L", statistic=Statistic.DAILY)])
    assert verdict.working[:2] == (
        "readings of 2026-03-01: result 1: 0.05 mg/L within; result 2: 0.2 mg/L over",
        "deciding: result 2",
    )
