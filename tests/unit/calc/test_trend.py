from dataclasses import replace
from datetime import date, timedelta
from itertools import permutations
from math import inf, nan

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.trend import Direction, Point, mann_kendall, sen_slope
from effluent.errors import ValueRefused

START = date(2026, 1, 1)


def series(*values, step=1):
    """Make points; a text as in "<5" is a non-detect."""
    points = []
    for n, value in enumerate(values):
        below = isinstance(value, str)
        high = float(value[1:]) if below else float(value)
        points.append(Point(day=START + timedelta(days=step * n), low=0.0 if below else high, high=high))
    return points


def test_series_that_rises_throughout_is_rising():
    found = mann_kendall(series(1, 2, 3, 4, 5, 6))
    assert (found.s, found.count, found.tied, found.nondetects) == (15, 6, 0, 0)
    assert found.exact_p == pytest.approx(2 / 720)
    assert (found.direction(), found.direction(0.001)) == (Direction.RISING, Direction.NONE)
    assert mann_kendall(series(6, 5, 4, 3, 2, 1)).direction() == Direction.FALLING


def test_z_is_corrected_for_continuity():
    found = mann_kendall(series(1, 2, 3, 4, 5, 6))
    assert found.z == pytest.approx(14 / (6 * 5 * 17 / 18) ** 0.5)
    assert mann_kendall(series(6, 5, 4, 3, 2, 1)).z == -found.z


def test_significance_is_reached_by_being_equalled():
    rising = mann_kendall(series(1, 2, 3, 4))
    assert rising.direction(rising.p) == Direction.RISING
    assert mann_kendall(series(2, 2, 2, 2)).direction(1.0) == Direction.NONE


def test_two_thousand_days_are_taken():
    assert mann_kendall(series(*range(2000))).s == 1999 * 1000


def test_slope_limits_stand_at_their_ranks():
    found = sen_slope(series(1, 2, 4, 3, 5, 7), confidence=0.9)
    slopes = sorted([1, 1.5, 2 / 3, 1, 1.2, 2, 0.5, 1, 1.25, -1, 0.5, 1, 2, 2, 2])
    rank = (15 - 1.6448536 * (6 * 5 * 17 / 18) ** 0.5) / 2
    assert found.low == slopes[7]
    assert found.lower == pytest.approx(slopes[2] + (rank - 3) * (slopes[3] - slopes[2]))


def test_order_of_the_points_does_not_matter():
    points = series(3, 1, 4, 1, 5)
    assert mann_kendall(points[::-1]) == mann_kendall(points)
    assert sen_slope(points[::-1]) == sen_slope(points)


def test_ties_lower_the_variance_and_leave_no_exact_probability():
    found = mann_kendall(series(1, 1, 2, 3, 3))
    assert (found.s, found.tied, found.exact_p) == (8, 4, None)
    assert found.variance == pytest.approx((5 * 4 * 15 - 2 * 2 * 9) / 18)
    assert found.p == found.normal_p


def test_constant_series_shows_no_trend():
    found = mann_kendall(series(2, 2, 2, 2))
    assert (found.s, found.z, found.p, found.direction()) == (0, 0.0, 1.0, Direction.NONE)


def test_everything_below_the_highest_limit_is_tied():
    found = mann_kendall(series("<5", 3, "<2", 5, 7, 9))
    assert (found.s, found.tied, found.nondetects) == (12, 3, 2)
    assert mann_kendall(series("<50", 3, "<2", 5)).s == 0


def test_long_series_has_the_normal_probability_only():
    assert mann_kendall(series(*range(30))).exact_p is not None
    assert mann_kendall(series(*range(31))).exact_p is None


# All permutations, counted one by one
@pytest.mark.parametrize("n", [4, 5, 6])
def test_exact_probability_equals_enumeration(n):
    found = [mann_kendall(series(*order)) for order in permutations(range(n))]
    for one in found:
        tail = sum(abs(other.s) >= abs(one.s) for other in found) / len(found)
        assert one.exact_p == pytest.approx(tail)


def test_slope_is_that_of_a_line_per_day():
    found = sen_slope(series(1, 3, 5, 7, 9, 11, step=10))
    assert (found.low, found.high) == pytest.approx((0.2, 0.2))
    assert (found.lower, found.upper) == pytest.approx((0.2, 0.2))


def test_non_detects_give_bounds_of_the_slope():
    points = series("<4", 5, 6, "<4", 9, 11)
    found = sen_slope(points)
    assert found.lower <= found.low < found.high <= found.upper
    for share in (0.0, 0.5, 1.0):
        filled = [replace(p, low=p.low + (p.high - p.low) * share) for p in points]
        filled = [replace(p, high=p.low) for p in filled]
        assert found.low <= sen_slope(filled).low <= found.high


def test_confidence_out_of_reach_has_no_limits():
    few = sen_slope(series(1, 2, 4, 3))
    assert (few.lower, few.upper) == (-inf, inf)
    assert sen_slope(series(1, 2, 4, 3), confidence=1 - 2 / 24).lower == -1.0


@pytest.mark.parametrize("use", [mann_kendall, sen_slope])
@pytest.mark.parametrize(
    ("points", "text"),
    [
        (series(1, 2, 3), "4 to 2000 days"),
        (series(*range(2001)), "4 to 2000 days"),
        (series(1, 2, 3, nan), "both bounds"),
        ([*series(1, 2, 3), Point(day=date(2027, 1, 1), low=200.0, high=inf)], "both bounds"),
        ([*series(1, 2, 3), *series(4)], "one value a day"),
    ],
)
def test_series_that_tells_no_trend_is_refused(use, points, text):
    with pytest.raises(ValueRefused, match=text):
        use(points)


@pytest.mark.parametrize("confidence", [0.0, 1.0, nan])
def test_confidence_that_is_none_is_refused(confidence):
    with pytest.raises(ValueRefused, match="between 0 and 1"):
        sen_slope(series(1, 2, 3, 4), confidence=confidence)


@given(st.lists(st.integers(0, 20), min_size=4, max_size=12))
@settings(max_examples=30)
def test_reversed_series_has_the_opposite_trend(values):
    forth, back = mann_kendall(series(*values)), mann_kendall(series(*values[::-1]))
    assert (forth.s, forth.variance, forth.p) == (-back.s, back.variance, back.p)
    assert sen_slope(series(*values)).low == pytest.approx(-sen_slope(series(*values[::-1])).high)
