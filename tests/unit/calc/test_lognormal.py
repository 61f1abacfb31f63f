from math import exp, log
from statistics import fmean, pstdev, stdev

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import effluent.calc.lognormal
from effluent.calc.lognormal import likelihood, regression
from effluent.errors import ValueRefused

DETECTS = [3.0, 7.0, 9.0, 12.0, 15.0]
LIMITS = [1.0, 10.0, 40.0]


@pytest.mark.parametrize("estimate", [likelihood, regression])
def test_values_without_spread_are_refused(estimate):
    with pytest.raises(ValueRefused, match="show no spread"):
        estimate([2.0] * 5, LIMITS)


@pytest.mark.parametrize("estimate", [likelihood, regression])
def test_too_few_detects_are_refused(estimate):
    with pytest.raises(ValueRefused, match="needs 5 or more"):
        estimate(DETECTS[:4], LIMITS)


def test_search_that_does_not_end_is_refused(monkeypatch):
    monkeypatch.setattr(effluent.calc.lognormal, "_TURNS", 2)
    with pytest.raises(ValueRefused, match="no greatest likelihood"):
        likelihood(DETECTS, LIMITS)


def test_regression_leaves_a_limit_above_every_detect_aside():
    found = regression(DETECTS, LIMITS)
    assert (found.aside, found.count) == (1, 8)
    assert found.mean == regression(DETECTS, LIMITS[:2]).mean


def test_few_results_are_said_to_be_few():
    assert "fewer than 50" in likelihood(DETECTS, LIMITS).note
    many = [1.0 + n / 10 for n in range(50)]
    assert likelihood(many, []).note == "it holds for lognormal results only"


AMOUNT = st.floats(0.01, 1000)


@given(st.lists(AMOUNT, min_size=5, max_size=12).filter(lambda v: max(v) > min(v)))
@settings(max_examples=20)
def test_without_non_detects_the_plain_formulas_hold(values):
    logs = [log(value) for value in values]
    assert likelihood(values, []).mean == pytest.approx(exp(fmean(logs) + pstdev(logs) ** 2 / 2))
    found = regression(values, [])
    assert (found.mean, found.sd) == (pytest.approx(fmean(values)), pytest.approx(stdev(values)))


def test_estimates_scale_with_the_unit():
    small = [value / 1000 for value in DETECTS]
    for estimate in (likelihood, regression):
        scaled = estimate(small, [limit / 1000 for limit in LIMITS])
        assert scaled.mean * 1000 == pytest.approx(estimate(DETECTS, LIMITS).mean)
