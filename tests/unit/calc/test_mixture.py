"""Mix ratios, and solutions far from them."""

from fractions import Fraction

import pytest

from effluent.calc.mixture import ratio_question, read_ratio
from effluent.errors import ValueRefused


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
