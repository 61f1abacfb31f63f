from datetime import date, timedelta
from fractions import Fraction as Rational

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.average import average, calendar_months, monitoring_days, rolling_days, years
from effluent.calc.figure import figure_of
from effluent.calc.observation import Observation, Substitution
from effluent.domain import Qualifier
from effluent.errors import ValueRefused

RULE = Substitution.HALF
START = date(2026, 1, 30)


def days(*values, step=1, start=START):
    return {
        start + timedelta(days=step * n): figure_of(Observation(value=Rational(value)), RULE)
        for n, value in enumerate(values)
    }


def values(averages):
    return [one.figure.value for one in averages]


# 0.07 mg/L, the monthly limit for cadmium of 40 CFR 433.17: a mean of binary doubles is above it
def test_average_on_the_limit_is_exact():
    assert average(days("0.07", "0.07", "0.07"), rule=RULE).figure.value == Rational("0.07")
    assert average(days("0.06", "0.07", "0.08"), rule=RULE).figure.value == Rational("0.07")


def test_average_is_of_days_in_any_order_and_says_how_many():
    given_days = dict(reversed(days("1", "2", "6").items()))
    found = average(given_days, rule=RULE, least=4)
    assert (found.first, found.last, found.days) == (START, START + timedelta(days=2), 3)
    assert (found.figure.value, found.is_short, found.is_single) == (3, True, False)


def test_one_sample_is_the_average_and_is_flagged():
    found = average(days("0.2"), rule=RULE)
    assert (found.figure.value, found.is_single, found.is_short) == (Rational("0.2"), True, False)


def test_nothing_is_averaged_to_nothing():
    with pytest.raises(ValueRefused, match="no number is invented"):
        average({}, rule=RULE)


def test_four_monitoring_days_need_not_follow_in_the_calendar():
    found = monitoring_days(days("1", "2", "3", "6", "9", step=10), rule=RULE)
    assert values(found) == [3, 5]
    assert (found[1].first, found[1].last) == (START + timedelta(days=10), START + timedelta(days=40))
    assert monitoring_days(days("1", "2", "3"), rule=RULE) == ()


def test_months_and_years_are_those_of_the_calendar():
    given_days = days("1", "3", "5", "7")
    found = calendar_months(given_days, rule=RULE, least=3)
    assert values(found) == [2, 6]
    assert [(one.first, one.last) for one in found] == [
        (date(2026, 1, 1), date(2026, 1, 31)),
        (date(2026, 2, 1), date(2026, 2, 28)),
    ]
    assert [one.is_short for one in found] == [True, True]
    (year,) = years(given_days, rule=RULE)
    assert (year.figure.value, year.first, year.last) == (4, date(2026, 1, 1), date(2026, 12, 31))


def test_december_ends_on_the_31st():
    (found,) = calendar_months(days("1", start=date(2026, 12, 5)), rule=RULE)
    assert found.last == date(2026, 12, 31)


def test_rolling_window_holds_thirty_calendar_days():
    found = rolling_days(days("2", "4", "6", step=29), rule=RULE)
    assert values(found) == [2, 3, 5]
    assert values(rolling_days(days("2", "4", step=30), rule=RULE)) == [2, 4]
    assert (found[0].last - found[0].first).days == 29


@pytest.mark.parametrize("window", [monitoring_days, rolling_days])
def test_window_of_one_day_is_the_day(window):
    assert values(window(days("1", "2"), rule=RULE, length=1)) == [1, 2]


@pytest.mark.parametrize("window", [monitoring_days, rolling_days])
def test_window_of_no_day_is_refused(window):
    with pytest.raises(ValueRefused, match="one day or more"):
        window(days("1"), rule=RULE, length=0)


OBSERVATION = st.builds(
    lambda value, below: Observation(value=value, qualifier=Qualifier.BELOW if below else Qualifier.EQUAL),
    st.fractions(0, 10, max_denominator=1000),
    st.booleans(),
)


@given(st.lists(OBSERVATION, min_size=1, max_size=8), st.sampled_from(["zero", "half", "full"]))
@settings(max_examples=40)
def test_value_lies_between_the_bounds_whatever_the_rule(observations, name):
    rule = Substitution(name)
    daily = {START + timedelta(days=n): figure_of(one, rule) for n, one in enumerate(observations)}
    figure = average(daily, rule=rule).figure
    assert figure.low <= figure.value <= figure.high
    assert figure.low == sum(one.low for one in observations) / len(observations)
    assert figure.high == sum(one.high for one in observations) / len(observations)
