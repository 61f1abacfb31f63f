from fractions import Fraction as Rational

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from effluent.calc.decision import (
    DecisionRule,
    Guard,
    Part,
    Shared,
    acceptance_limit,
    blend,
    decide,
    probability_met,
    risk_at_acceptance_limit,
)
from effluent.domain import Bound, BrokenBy
from effluent.errors import ValueRefused

SIMPLE = Guard()
ACCEPT = Guard(rule=DecisionRule.GUARDED_ACCEPTANCE)
REJECT = Guard(rule=DecisionRule.GUARDED_REJECTION)


def decided(value, guard, **changed):
    return decide(Rational(value), Rational("0.02"), Rational("0.11"), guard=guard, **changed)


@pytest.mark.parametrize(
    ("guard", "edge", "mirrored"),
    [(SIMPLE, "0.11", "0.11"), (ACCEPT, "0.09", "0.13"), (REJECT, "0.13", "0.09")],
)
def test_guard_band_lies_inside_or_outside_the_limit(guard, edge, mirrored):
    limit, expanded = Rational("0.11"), Rational("0.02")
    assert acceptance_limit(limit, expanded, guard) == Rational(edge)
    assert acceptance_limit(limit, expanded, guard, bound=Bound.MINIMUM) == Rational(mirrored)


def test_result_on_the_acceptance_limit_is_decided_exactly():
    assert decided("0.09", ACCEPT).accepted
    assert not decided("0.09", ACCEPT, broken_by=BrokenBy.REACHING).accepted
    assert not decided("0.0900000000000000001", ACCEPT).accepted
    assert decided("0.13", ACCEPT, bound=Bound.MINIMUM).accepted


def test_minimum_is_the_mirror_image():
    assert not decided("0.1299", ACCEPT, bound=Bound.MINIMUM).accepted
    assert decided("0.0901", REJECT, bound=Bound.MINIMUM).accepted


def test_guard_band_is_a_multiple_of_the_uncertainty():
    guard = Guard(rule=DecisionRule.GUARDED_ACCEPTANCE, multiple=Rational("1.5"))
    assert acceptance_limit(Rational(1), Rational("0.2"), guard) == Rational("0.7")
    assert acceptance_limit(Rational(1), Rational(0), guard) == 1
    assert acceptance_limit(Rational(1), Rational(1), Guard(multiple=Rational(0))) == 1


def test_risk_stands_with_the_decision():
    accepted = decided("0.09", ACCEPT)
    assert accepted.false_accept_risk == pytest.approx(0.02275, abs=1e-5)
    assert (accepted.false_reject_risk, accepted.guard_band) == (None, Rational("0.02"))
    rejected = decided("0.14", REJECT)
    assert (rejected.accepted, rejected.false_accept_risk) == (False, None)
    assert rejected.false_reject_risk == pytest.approx(0.00135, abs=1e-5)


def test_uncertainty_larger_than_the_value_is_pointed_out():
    assert "0.02 is larger than the value" in decided("0.01", SIMPLE).caution
    assert decided("0.02", SIMPLE).caution == ""


@pytest.mark.parametrize("expanded", [0.0, -1.0, float("nan")])
def test_probability_needs_an_uncertainty(expanded):
    with pytest.raises(ValueRefused, match="above zero"):
        probability_met(1.0, expanded, 2.0)


@pytest.mark.parametrize(("expanded", "multiple"), [(-1, 1), (1, -1)])
def test_negative_guard_band_is_refused(expanded, multiple):
    with pytest.raises(ValueRefused, match="never negative"):
        acceptance_limit(Rational(1), Rational(expanded), Guard(multiple=Rational(multiple)))


def test_simple_acceptance_may_be_wrong_half_of_the_time():
    assert risk_at_acceptance_limit(SIMPLE) == 0.5
    assert risk_at_acceptance_limit(REJECT) == pytest.approx(0.97725, abs=1e-5)


def part(volume, concentration, volume_spread="0", concentration_spread="0"):
    figures = (volume, concentration, volume_spread, concentration_spread)
    names = ("volume", "concentration", "volume_spread", "concentration_spread")
    return Part(**{name: Rational(figure) for name, figure in zip(names, figures, strict=True)})


def test_shared_error_does_not_average_out():
    parts = [part("1", "2", "0", "0.2"), part("1", "2", "0", "0.2")]
    assert blend(parts).spread == pytest.approx(0.2 / 2**0.5)
    assert blend(parts, shared=Shared.ALL).spread == pytest.approx(0.2)


@pytest.mark.parametrize(
    ("parts", "text"),
    [([], "no volume"), ([part("0", "1")], "no volume"), ([part("1", "-1")], "ever negative")],
)
def test_blend_of_nothing_is_refused(parts, text):
    with pytest.raises(ValueRefused, match=text):
        blend(parts)


AMOUNT = st.fractions(0, 100, max_denominator=100)


@given(
    st.lists(st.builds(lambda v, c: Part(volume=v, concentration=c), AMOUNT, AMOUNT), min_size=1, max_size=5)
)
@settings(max_examples=30)
def test_blend_holds_the_mass_of_its_parts(parts):
    assume(any(one.volume for one in parts))
    found = blend(parts)
    assert found.concentration * found.volume == sum(one.volume * one.concentration for one in parts)
    assert found.spread == 0
