from fractions import Fraction

import numpy as np
import pandas as pd
import pytest

from effluent.calc.plausible import (
    far_above_history,
    history_question,
    medians,
    ratio_question,
    read_ratio,
    reporting_above_limit,
    reporting_question,
)
from effluent.errors import ValueRefused


def readings(*rows):
    return pd.DataFrame(rows, columns=["point", "analyte", "canonical_unit", "value"])


HISTORY = readings(
    ("P1", "cadmium", "mg/L", 0.01),
    ("P1", "cadmium", "mg/L", 0.02),
    ("P1", "cadmium", "mg/L", 20.0),
    ("P1", "zinc", "mg/L", 0.0),
)


@pytest.mark.parametrize(
    ("row", "far"),
    [
        (("P1", "cadmium", "mg/L", 20.0), True),
        (("P1", "cadmium", "mg/L", 19.9), False),
        (("P2", "cadmium", "mg/L", 20.0), False),
        (("P1", "cadmium", "mg/kg", 20.0), False),
        (("P1", "lead", "mg/L", 20.0), False),
        (("P1", "zinc", "mg/L", 20.0), False),
    ],
)
def test_value_a_thousand_times_its_history_is_found(row, far):
    assert far_above_history(readings(row), medians(HISTORY)).tolist() == [far]


def test_without_history_nothing_is_far():
    assert far_above_history(HISTORY, medians(HISTORY[:0])).tolist() == [False] * 4


def test_history_question_names_reading_and_median():
    assert history_question("20 mg/L", 0.02, unit="mg/L") == (
        "20 mg/L is a thousand times the median of this point, 0.02 mg/L, or more: is the unit right?"
    )


def test_reporting_limit_above_the_limit_is_found():
    found = reporting_above_limit([0.5, 0.11, 0.1, np.nan, 0.5], [0.11, 0.11, 0.11, 0.11, np.nan])
    assert found.tolist() == [True, False, False, False, False]


def test_reporting_question_names_both():
    assert reporting_question("0.5 mg/L", "0.11 mg/L") == (
        "the reporting limit 0.5 mg/L lies above the limit 0.11 mg/L in force: a non-detect would prove "
        "nothing; can the laboratory reach lower?"
    )


@pytest.mark.parametrize(
    ("text", "water"),
    [("1:4", Fraction(4)), (" 1 : 4 ", Fraction(4)), ("2 to 5", Fraction(5, 2)), ("1:0", Fraction(0))],
)
def test_ratio_is_read_as_parts_of_water(text, water):
    assert read_ratio(text) == water


@pytest.mark.parametrize("text", ["", "4", "1:", "1:4:5", "one to four", "0:4", "1:-4", "1..2:4"])
def test_text_that_is_no_ratio_is_refused(text):
    with pytest.raises(ValueRefused):
        read_ratio(text)


# A factor of 1.5 either way: common practice, no source
@pytest.mark.parametrize(
    ("water", "asked"),
    [("40", False), ("60", False), ("60.1", True), ("26.7", False), ("26.6", True), ("0", True)],
)
def test_mix_outside_a_factor_of_one_and_a_half_is_questioned(water, asked):
    question = ratio_question("1:4", concentrate_l=Fraction(10), water_l=Fraction(water))
    assert (question is not None) == asked


def test_ratio_question_says_what_the_cleaner_asks_for():
    assert ratio_question("1:4", concentrate_l=Fraction(10), water_l=Fraction(80)) == (
        "10 L of cleaner with 80 L of water is far from the cleaner's mix ratio 1:4, "
        "which asks for 40 L of water"
    )


@pytest.mark.parametrize(
    ("ratio", "concentrate", "water", "asked"),
    [("1:0", 10, 0, False), ("1:0", 10, 1, True), ("1:4", 0, 0, False), ("1:4", 0, 5, True)],
)
def test_mix_of_nothing_is_compared_too(ratio, concentrate, water, asked):
    question = ratio_question(ratio, concentrate_l=Fraction(concentrate), water_l=Fraction(water))
    assert (question is not None) == asked


def test_tolerance_is_the_callers():
    wide = ratio_question("1:4", concentrate_l=Fraction(10), water_l=Fraction(80), tolerance=Fraction(2))
    assert wide is None
