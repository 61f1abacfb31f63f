from fractions import Fraction as Rational

import pytest

from effluent.calc.daily import Several, daily_value, extremes, refuse_mean
from effluent.calc.observation import Observation, Substitution
from effluent.domain import Qualifier
from effluent.errors import ValueRefused

GRABS = [Observation(value=Rational(value)) for value in ("0.1", "0.3", "0.5")]


def of(grabs, several, **given):
    return daily_value(grabs, several, rule=Substitution.ZERO, unit=given.pop("unit", "mg/L"), **given)


def test_highest_and_mean_of_grabs_are_exact():
    assert of(GRABS, Several.HIGHEST).value == Rational("0.5")
    assert of(GRABS, Several.MEAN).value == Rational("0.3")


def test_aliquots_are_weighted_with_their_flow():
    assert of(GRABS, Several.FLOW, volumes=[Rational(6), Rational(3), Rational(1)]).value == Rational("0.2")


def test_aliquot_of_no_flow_counts_nothing():
    assert of(GRABS, Several.FLOW, volumes=[Rational(0), Rational(1), Rational(0)]).value == Rational("0.3")


@pytest.mark.parametrize(
    ("volumes", "text"),
    [
        ([Rational(1)], "one for each of 3"),
        ([Rational(1), Rational(2), Rational(-1)], "above zero"),
        ([Rational(0)] * 3, "above zero"),
    ],
)
def test_weights_that_are_none_are_refused(volumes, text):
    with pytest.raises(ValueRefused, match=text):
        of(GRABS, Several.FLOW, volumes=volumes)


@pytest.mark.parametrize(("unit", "text"), [("s.u.", "logarithm"), ("degC", "hides the peak")])
def test_mean_of_ph_and_temperature_is_refused_with_the_reason(unit, text):
    with pytest.raises(ValueRefused, match=text):
        refuse_mean(unit)
    with pytest.raises(ValueRefused, match="minimum and maximum"):
        of(GRABS, Several.MEAN, unit=unit)
    assert of(GRABS, Several.HIGHEST, unit=unit).value == Rational("0.5")


def test_day_without_a_sample_has_no_value():
    with pytest.raises(ValueRefused, match="no number is invented"):
        of([], Several.HIGHEST)
    with pytest.raises(ValueRefused):
        extremes([])


def test_extremes_are_the_least_and_greatest_reading():
    assert extremes(GRABS) == (Rational("0.1"), Rational("0.5"))
    assert extremes([*GRABS, Observation(value=Rational(14), qualifier=Qualifier.ABOVE)])[1] is None
