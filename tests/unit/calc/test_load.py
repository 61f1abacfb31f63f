from fractions import Fraction as Rational

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.figure import figure_of
from effluent.calc.load import conventional_lb, day_load, mass_kg, total_load, volume_l
from effluent.calc.observation import Observation, Substitution
from effluent.domain import Qualifier
from effluent.errors import ValueRefused


def load(value, volume, qualifier=Qualifier.EQUAL, rule=Substitution.ZERO):
    one = Observation(value=Rational(value), qualifier=qualifier)
    return day_load(figure_of(one, rule), Rational(volume))


def test_mass_is_concentration_times_volume_without_loss():
    assert mass_kg(Rational("0.11"), Rational(1)) == Rational(11, 10**8)


# NIST Handbook 44, appendix C: 1 lb = 0.45359237 kg
def test_load_is_given_in_pounds_too():
    found = load("1", "453592.37")
    assert (found.low_lb, found.value_lb, found.high_lb) == (1, 1, 1)


def test_non_detect_gives_bounds_of_the_load():
    found = load("0.5", "1000000", Qualifier.BELOW)
    assert (found.low_kg, found.value_kg, found.high_kg) == (0, 0, Rational(1, 2))


def test_open_bounds_stay_open_in_the_sum():
    above = load("200", "10", Qualifier.ABOVE)
    total = total_load([load("1", "10"), above])
    assert (total.high_kg, total.high_lb, total.value_kg, total.value_lb) == (None, None, None, None)
    assert (total.low_kg, total.volume_l, total.days) == (Rational(201, 10**5), 20, 2)


def test_nothing_released_is_no_load():
    total = total_load([])
    assert (total.low_kg, total.high_kg, total.value_kg, total.days) == (0, 0, 0, 0)


def test_conventional_factor_is_another_when_the_document_says_so():
    assert conventional_lb(Rational(15), Rational("3785411.784")) == Rational("125.1")
    assert conventional_lb(Rational(15), Rational("3785411.784"), factor=Rational("8.345")) == Rational(
        "125.175"
    )


@pytest.mark.parametrize(("concentration", "volume"), [(-1, 1), (1, -1)])
@pytest.mark.parametrize("mass", [mass_kg, conventional_lb])
def test_negative_amounts_are_refused(mass, concentration, volume):
    with pytest.raises(ValueRefused, match="never negative"):
        mass(Rational(concentration), Rational(volume))


def test_volume_of_an_allowance_needs_a_substance():
    with pytest.raises(ValueRefused, match="no largest volume"):
        volume_l(Rational(1), Rational(0))
    with pytest.raises(ValueRefused, match="mass"):
        volume_l(Rational(-1), Rational(1))


AMOUNT = st.fractions(0, 1000, max_denominator=1000)


@given(AMOUNT.filter(bool), AMOUNT)
@settings(max_examples=30)
def test_volume_and_mass_are_each_others_reverse(concentration, volume):
    assert volume_l(mass_kg(concentration, volume), concentration) == volume
