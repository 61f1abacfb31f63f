import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.lognormal import regression
from effluent.calc.nondetect import Anchor, Minimum, check_results, kaplan_meier
from effluent.errors import ValueRefused

DETECTS = [3.0, 7.0, 9.0, 12.0, 15.0]
LIMITS = [1.0, 10.0, 40.0]


@pytest.mark.parametrize("estimate", [kaplan_meier, regression])
def test_too_few_detects_are_refused_with_the_number_needed(estimate):
    with pytest.raises(ValueRefused, match=r"detected values '4' .* needs 5 or more; look at the bounds"):
        estimate(DETECTS[:4], LIMITS)
    assert estimate(DETECTS[:4], LIMITS, minimum=Minimum(detects=4)).detects == 4


def test_two_detects_are_needed_whatever_the_caller_says():
    with pytest.raises(ValueRefused, match="needs 2 or more"):
        check_results([1.0], [], Minimum(detects=0))


def test_too_large_a_share_of_non_detects_is_refused():
    assert check_results(DETECTS, [1.0] * 20, None) == 0
    with pytest.raises(ValueRefused, match=r"'21 of 26' .* at most 80 %"):
        check_results(DETECTS, [1.0] * 21, None)


@pytest.mark.parametrize("number", [0.0, -1.0, float("nan"), float("inf")])
def test_numbers_that_are_no_amounts_are_refused(number):
    with pytest.raises(ValueRefused, match="above zero"):
        kaplan_meier([*DETECTS, number], LIMITS)
    with pytest.raises(ValueRefused, match="above zero"):
        kaplan_meier(DETECTS, [number])


def test_limit_above_every_detect_tells_nothing_and_is_counted():
    found = kaplan_meier(DETECTS, LIMITS)
    assert (found.aside, found.count, found.detects) == (1, 8, 5)
    assert found.mean == kaplan_meier(DETECTS, LIMITS[:2]).mean


def test_anchors_differ_only_below_the_lowest_detect():
    means = [kaplan_meier(DETECTS, LIMITS, anchor=anchor).mean for anchor in Anchor]
    assert means == sorted(means)
    assert means[0] < means[2]
    lowest = [kaplan_meier([0.5, *DETECTS], LIMITS, anchor=anchor).mean for anchor in Anchor]
    assert lowest == pytest.approx([lowest[0]] * 3)
    assert "lowest limit" in kaplan_meier(DETECTS, LIMITS).note


# A detect ranks above a non-detect of the same number: <3 is below 3
def test_detect_ranks_above_the_limit_of_the_same_number():
    tied = kaplan_meier(DETECTS, [3.0, 3.0], anchor=Anchor.ZERO)
    assert tied.mean == pytest.approx((sum(DETECTS)) / 7)


def test_upper_limit_needs_a_standard_error():
    assert kaplan_meier(DETECTS, LIMITS).upper_limit(0.95) > kaplan_meier(DETECTS, LIMITS).mean
    with pytest.raises(ValueRefused, match="gives no confidence limit"):
        regression(DETECTS, LIMITS).upper_limit(0.95)


AMOUNT = st.floats(0.01, 1000)


@given(st.lists(AMOUNT, min_size=5, max_size=12), st.lists(AMOUNT, max_size=10))
@settings(max_examples=40)
def test_mean_lies_between_zero_and_full_substitution(detects, limits):
    known = [limit for limit in limits if limit <= max(detects)]
    found = kaplan_meier(detects, known, anchor=Anchor.LOWEST_LIMIT)
    count = len(detects) + len(known)
    assert sum(detects) / count <= found.mean * (1 + 1e-12)
    assert found.mean <= (sum(detects) + sum(known)) / count * (1 + 1e-12)


@given(st.lists(AMOUNT, min_size=5, max_size=12, unique=True))
@settings(max_examples=20)
def test_without_non_detects_it_is_the_plain_mean_and_its_standard_error(values):
    mean = sum(values) / len(values)
    variance = sum((value - mean) ** 2 for value in values) / (len(values) - 1)
    found = kaplan_meier(values, [])
    assert found.mean == pytest.approx(mean)
    assert found.standard_error == pytest.approx((variance / len(values)) ** 0.5)
