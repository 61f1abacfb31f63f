from datetime import date
from fractions import Fraction as Rational

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.figure import Figure
from effluent.calc.noncompliance import (
    Criteria,
    Finding,
    Measurement,
    MonthCounts,
    Share,
    count_violations,
    fixed_halves,
    rolling_quarters,
    significant_noncompliance,
)
from effluent.calc.observation import Observation, Standing
from effluent.domain import BrokenBy, Qualifier
from effluent.errors import ValueRefused

DAY = date(2026, 5, 4)
SPAN = (date(2026, 1, 1), date(2026, 6, 30))


def measured(*values, limit="0.11", qualifier=Qualifier.EQUAL):
    return [
        Measurement(
            day=DAY, observed=Observation(value=Rational(v), qualifier=qualifier), limit=Rational(limit)
        )
        for v in values
    ]


def found(measurements, **changed):
    (window,) = significant_noncompliance(measurements, [SPAN], criteria=Criteria(**changed))
    return window


def counts(share):
    return share.surely, share.possibly, share.count


def test_federal_criteria_hold_if_none_are_given():
    (window,) = significant_noncompliance(measured("0.12", "0.132"), [SPAN])
    assert (counts(window.chronic), counts(window.technical)) == ((2, 2, 2), (1, 1, 2))
    assert window.finding == Finding.MET


def test_only_measurements_of_the_window_count():
    (window,) = significant_noncompliance(measured("0.12"), [(date(2026, 7, 1), date(2026, 12, 31))])
    assert (counts(window.chronic), window.finding) == ((0, 0, 0), Finding.NOT_MET)


def test_every_window_is_listed_in_its_order():
    spans = rolling_quarters(date(2026, 1, 1), date(2026, 12, 31))
    windows = significant_noncompliance(measured("0.12"), spans)
    assert [(w.first, w.last) for w in windows] == list(spans)
    assert [w.chronic.count for w in windows] == [0, 1, 1, 0]


def test_non_detect_beyond_the_line_leaves_the_finding_open():
    window = found(measured("0.2", qualifier=Qualifier.BELOW))
    assert (counts(window.chronic), window.finding) == ((0, 1, 1), Finding.OPEN)
    assert found(measured("0.11", qualifier=Qualifier.BELOW)).finding == Finding.NOT_MET


def test_some_sure_hits_and_enough_possible_ones_leave_it_open():
    assert Share(count=4, surely=1, possibly=4, percent=66).finding == Finding.OPEN


@pytest.mark.parametrize("day", SPAN)
def test_first_and_last_day_of_a_window_count(day):
    one = Measurement(day=day, observed=Observation(value=Rational(2)), limit=Rational(1))
    assert counts(found([one]).chronic) == (1, 1, 1)


def test_window_of_one_day_is_a_window():
    (window,) = significant_noncompliance(measured("0.12"), [(DAY, DAY)])
    assert window.chronic.count == 1


def test_result_above_range_breaks_the_line_it_reaches():
    window = found(measured("0.11", qualifier=Qualifier.ABOVE))
    assert (counts(window.chronic), counts(window.technical)) == ((1, 1, 1), (0, 1, 1))


def test_average_with_non_detects_counts_by_its_bounds():
    def average(low, high):
        figure = Figure(
            low=Rational(low),
            high=None if high is None else Rational(high),
            value=None,
            standing=Standing.QUANTIFIED,
            count=4,
            nondetects=2,
        )
        return [Measurement(day=DAY, observed=figure, limit=Rational("0.07"))]

    assert counts(found(average("0.071", "0.09")).chronic) == (1, 1, 1)
    assert counts(found(average("0.07", "0.09")).chronic) == (0, 1, 1)
    assert counts(found(average("0.05", "0.07")).chronic) == (0, 0, 1)
    assert counts(found(average("0.07", None)).chronic) == (1, 1, 1)


def test_ph_has_no_technical_review_criterion():
    window = found(measured("12", limit="11"), technical_factor=None)
    assert (window.technical, window.finding) == (None, Finding.MET)


def test_operator_and_factor_are_data():
    assert found(measured("0.11"), chronic_broken_by=BrokenBy.REACHING).finding == Finding.MET
    assert counts(found(measured("0.14"), technical_factor=Rational("1.4")).technical) == (0, 0, 1)
    beyond = found(measured("0.132", "0.1", "0.1"), technical_broken_by=BrokenBy.BEYOND)
    assert beyond.finding == Finding.NOT_MET


@pytest.mark.parametrize(("percent", "finding"), [(1, Finding.MET), (100, Finding.NOT_MET)])
def test_percentage_may_be_1_to_100(percent, finding):
    half_over = measured("0.12", "0.1")
    assert found(half_over, chronic_percent=percent, technical_factor=None).finding == finding


@pytest.mark.parametrize("percent", [0, 101])
def test_percentage_outside_1_to_100_is_refused(percent):
    with pytest.raises(ValueRefused, match="from 1 to 100"):
        found([], technical_percent=percent)


@pytest.mark.parametrize("spans", [rolling_quarters, fixed_halves])
def test_period_that_ends_before_it_begins_is_refused(spans):
    with pytest.raises(ValueRefused, match="ends before it begins"):
        spans(date(2026, 2, 1), date(2026, 1, 1))
    with pytest.raises(ValueRefused):
        significant_noncompliance([], [(date(2026, 2, 1), date(2026, 1, 1))])


@pytest.mark.parametrize("spans", [rolling_quarters, fixed_halves])
def test_window_that_ends_on_the_only_day_is_in_the_period(spans):
    assert spans(SPAN[1], SPAN[1]) == (SPAN,)


def test_halves_are_those_of_the_calendar():
    assert fixed_halves(date(2026, 1, 1), date(2026, 12, 31)) == (
        (date(2026, 1, 1), date(2026, 6, 30)),
        (date(2026, 7, 1), date(2026, 12, 31)),
    )


@pytest.mark.parametrize(("counts", "monthly"), [(MonthCounts.ONE, 2), (MonthCounts.EACH_DAY, 59)])
def test_monthly_violations_count_as_the_place_says(counts, monthly):
    broken = [date(2026, 1, 9), date(2026, 2, 9)]
    assert count_violations([DAY, DAY], broken, month_counts=counts) == (2, monthly)


@given(st.integers(1, 200), st.integers(0, 200), st.integers(1, 100))
@settings(max_examples=50)
def test_finding_equals_rational_arithmetic(count, hits, percent):
    hits = min(hits, count)
    share = Share(count=count, surely=hits, possibly=hits, percent=percent)
    reached = Rational(hits, count) >= Rational(percent, 100)
    assert share.finding == (Finding.MET if reached else Finding.NOT_MET)
