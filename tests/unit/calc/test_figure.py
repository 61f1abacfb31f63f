from fractions import Fraction as Rational

import pytest

from effluent.calc.figure import figure_of, greatest_figure, greatest_high, mean_figure
from effluent.calc.observation import Observation, Standing, Substitution
from effluent.domain import Qualifier
from effluent.errors import ValueRefused

LESS = Observation(value=Rational("0.5"), qualifier=Qualifier.BELOW)
ONE = Observation(value=Rational(1))
MORE = Observation(value=Rational(200), qualifier=Qualifier.ABOVE)


def figures(*observations, rule=Substitution.HALF):
    return [figure_of(one, rule) for one in observations]


def test_non_detect_has_no_value_under_the_median_rule():
    (found,) = figures(LESS, rule=Substitution.MEDIAN)
    assert (found.low, found.high, found.value) == (0, Rational("0.5"), None)
    assert (found.count, found.nondetects, found.standing) == (1, 1, Standing.NOT_DETECTED)


def test_reading_above_range_leaves_the_mean_open_above():
    found = mean_figure(figures(ONE, MORE), Substitution.HALF)
    assert (found.low, found.high, found.value) == (Rational(201, 2), None, None)
    assert greatest_figure(figures(ONE, MORE)).value is None


def test_mean_has_bounds_and_a_value_between_them():
    found = mean_figure(figures(ONE, LESS), Substitution.HALF)
    assert (found.low, found.value, found.high) == (Rational("0.5"), Rational("0.625"), Rational("0.75"))
    assert (found.count, found.nondetects, found.standing) == (2, 1, Standing.QUANTIFIED)


def test_greatest_takes_the_greatest_bounds():
    high = Observation(value=Rational(2), qualifier=Qualifier.BELOW)
    found = greatest_figure(figures(ONE, high, rule=Substitution.ZERO))
    assert (found.low, found.value, found.high) == (1, 1, 2)
    assert (found.standing, found.nondetects) == (Standing.QUANTIFIED, 1)


def test_greatest_under_the_median_rule_prefers_what_was_detected():
    assert greatest_figure(figures(LESS, ONE, rule=Substitution.MEDIAN)).value == 1
    assert greatest_figure(figures(LESS, LESS, rule=Substitution.MEDIAN)).value is None


def test_median_rule_is_a_mean_where_all_is_quantified():
    rule = Substitution.MEDIAN
    assert mean_figure(figures(ONE, Observation(value=Rational(4)), rule=rule), rule).value == Rational(5, 2)


def test_median_can_itself_be_quantified_or_not_detected():
    rule = Substitution.MEDIAN
    seen = mean_figure(figures(LESS, ONE, Observation(value=Rational(4)), rule=rule), rule)
    assert (seen.value, seen.standing) == (1, Standing.QUANTIFIED)
    unseen = mean_figure(figures(LESS, LESS, ONE, rule=rule), rule)
    assert (unseen.value, unseen.standing) == (None, Standing.NOT_DETECTED)


def test_median_refuses_weights():
    rule = Substitution.MEDIAN
    with pytest.raises(ValueRefused, match="has no weights"):
        mean_figure(figures(LESS, ONE, rule=rule), rule, [Rational(1, 4), Rational(3, 4)])


def test_greatest_bound_is_open_where_one_is():
    assert greatest_high([Rational(1), Rational(3)]) == 3
    assert greatest_high([Rational(1), None]) is None
