from math import inf, nan

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from effluent.calc.confidence import chebyshev, land, samples_needed, student
from effluent.errors import ValueRefused

VALUES = [0.05, 0.09, 0.11, 0.02, 0.07]


@pytest.mark.parametrize("limits", [student, chebyshev, land])
def test_mean_lies_between_its_limits_and_says_how(limits):
    found = limits(VALUES, 0.95)
    assert found.lower < found.mean < found.upper
    assert (found.count, found.confidence) == (5, 0.95)
    assert found.method in ("Student t", "Chebyshev", "Land")


# scipy, an independent library
@pytest.mark.parametrize("confidence", [0.8, 0.9, 0.95, 0.99])
def test_student_limits_equal_those_of_an_independent_library(confidence):
    found = student(VALUES, confidence)
    interval = stats.ttest_1samp(VALUES, 0).confidence_interval(2 * confidence - 1)
    assert (found.lower, found.upper) == pytest.approx((interval.low, interval.high), rel=1e-9)


def test_chebyshev_is_wider_than_student():
    assert chebyshev(VALUES, 0.95).upper > student(VALUES, 0.95).upper
    assert chebyshev(VALUES, 0.95).upper == pytest.approx(0.068 + 19**0.5 * 0.034928498 / 5**0.5)


@pytest.mark.parametrize("limits", [student, chebyshev, land])
@pytest.mark.parametrize("confidence", [0.5, 1.0, nan])
def test_confidence_that_is_none_is_refused(limits, confidence):
    with pytest.raises(ValueRefused, match=r"above 0\.5 and below 1"):
        limits(VALUES, confidence)


@pytest.mark.parametrize("limits", [student, chebyshev, land])
def test_results_that_show_no_spread_are_refused(limits):
    with pytest.raises(ValueRefused, match="two or more"):
        limits([1.0], 0.95)
    with pytest.raises(ValueRefused, match="has to be a number"):
        limits([1.0, inf], 0.95)


@pytest.mark.parametrize(
    ("values", "text"),
    [
        ([1.0, 2.0], "three or more"),
        ([1.0, 2.0, 0.0], "above zero"),
        ([2.0, 2.0, 2.0], "no spread"),
        ([1e-9, 1.0, 50.0], "no limit can be told"),
    ],
)
def test_land_refuses_what_is_not_lognormal(values, text):
    with pytest.raises(ValueRefused, match=text):
        land(values, 0.999)


def test_enough_samples_settle_it():
    assert samples_needed(0.068, 0.0349, 5, limit=0.11) == 2
    assert samples_needed(0.068, 0.0, 5, limit=0.11) == 1


@pytest.mark.parametrize(
    ("mean", "sd", "text"),
    [
        (0.11, 0.03, "more of the same settles nothing"),
        (0.05, -1.0, "never negative"),
        (0.11 - 1e-9, 0.03, "too near"),
    ],
)
def test_samples_that_would_settle_nothing_are_refused(mean, sd, text):
    with pytest.raises(ValueRefused, match=text):
        samples_needed(mean, sd, 5, limit=0.11)


@given(st.lists(st.floats(0.01, 100), min_size=3, max_size=8), st.floats(0.55, 0.98))
@settings(max_examples=20)
def test_more_confidence_gives_wider_limits(values, confidence):
    less, more = student(values, confidence), student(values, confidence + 0.01)
    assert more.lower <= less.lower <= less.upper <= more.upper
