from fractions import Fraction as Rational

import pytest

from effluent.calc.observation import Observation, Standing, Substitution, middle, substitute
from effluent.domain import Qualifier
from effluent.errors import ValueRefused

ND = Observation(value=Rational("0.005"), qualifier=Qualifier.BELOW, detection_limit=Rational("0.005"))
DNQ = Observation(value=Rational("0.007"), estimated=True, detection_limit=Rational("0.005"))
VALUE = Observation(value=Rational("0.2"), reporting_limit=Rational("0.01"))
ABOVE = Observation(value=Rational(200), qualifier=Qualifier.ABOVE, reporting_limit=Rational(300))


@pytest.mark.parametrize(
    ("one", "low", "high", "standing"),
    [
        (ND, 0, Rational("0.005"), Standing.NOT_DETECTED),
        (DNQ, Rational("0.007"), Rational("0.007"), Standing.NOT_QUANTIFIED),
        (VALUE, Rational("0.2"), Rational("0.2"), Standing.QUANTIFIED),
        (ABOVE, 200, None, Standing.QUANTIFIED),
    ],
)
def test_bounds_and_standing_follow_the_qualifier(one, low, high, standing):
    assert (one.low, one.high, one.standing) == (low, high, standing)


def test_value_below_its_reporting_limit_is_not_quantified():
    assert Observation(value=Rational(1), reporting_limit=Rational(2)).standing == Standing.NOT_QUANTIFIED
    assert Observation(value=Rational(2), reporting_limit=Rational(2)).standing == Standing.QUANTIFIED


@pytest.mark.parametrize(
    ("rule", "number"),
    [
        (Substitution.ZERO, 0),
        (Substitution.HALF, Rational("0.0025")),
        (Substitution.FULL, Rational("0.005")),
        (Substitution.BETWEEN, 0),
    ],
)
def test_non_detect_is_replaced_by_the_rule(rule, number):
    assert substitute(ND, rule) == number


@pytest.mark.parametrize("rule", [Substitution.ZERO, Substitution.HALF, Substitution.FULL])
def test_estimated_value_stands_for_itself(rule):
    assert substitute(DNQ, rule) == Rational("0.007")


def test_between_the_limits_the_detection_limit_stands():
    unsure = Observation(value=Rational("0.02"), qualifier=Qualifier.BELOW, detection_limit=Rational("0.005"))
    assert (
        substitute(DNQ, Substitution.BETWEEN) == substitute(unsure, Substitution.BETWEEN) == Rational("0.005")
    )
    assert substitute(VALUE, Substitution.BETWEEN) == Rational("0.2")


def test_rule_between_needs_a_detection_limit():
    with pytest.raises(ValueRefused, match="needs it"):
        substitute(Observation(value=Rational(1), qualifier=Qualifier.BELOW), Substitution.BETWEEN)


def test_median_puts_no_number_for_a_result():
    with pytest.raises(ValueRefused, match="ranks results"):
        substitute(ND, Substitution.MEDIAN)


@pytest.mark.parametrize(
    ("ranked", "found"),
    [
        ([(2, 5), (0, 1), (2, 3)], (2, 3)),
        ([(2, 5), (2, 3)], (2, 4)),
        ([(2, 5), (1, 9)], (1, 9)),
        ([(0, 0), (0, 0), (2, 1), (2, 2)], (0, 0)),
    ],
)
def test_median_ranks_not_detected_first(ranked, found):
    assert middle([(Standing(rank), Rational(value)) for rank, value in ranked]) == found


def test_median_of_nothing_is_refused():
    with pytest.raises(ValueRefused, match="at least one"):
        middle([])
