from datetime import date

import pytest

from effluent.calc.averaged import averages, is_usable, observed, rule_of
from effluent.calc.observation import Substitution
from effluent.domain import Bound, Fraction, NonDetectRule, Outcome, Qualifier
from effluent.errors import ValueRefused
from tests.unit.calc.test_average_verdict import limit, reading


def test_the_days_of_a_window_are_its_own():
    given = [
        reading(1, date(2026, 4, 2), "0.02 mg/L"),
        reading(2, 3, "0.01 mg/L"),
        reading(3, 3, "0.03 mg/L"),
    ]
    march, april = averages(given, limit())
    assert [one.row for one in march.used] == [2, 3]
    assert [*march.days] == [date(2026, 3, 3)]
    assert (april.window.first, april.window.days) == (date(2026, 4, 1), 1)


def test_a_mean_of_ph_is_refused():
    with pytest.raises(ValueRefused, match="logarithm"):
        averages([], limit("7", analyte="pH"))


def test_the_bounds_are_never_mistaken_for_the_rule():
    (one,) = averages([reading(1, 1, "<0.1 mg/L")], limit())
    assert (one.span.low, one.span.high * 10, one.ruled, one.deciding, one.margin) == (0, 1, None, None, None)


def test_behind_a_non_detect_of_nothing_nothing_is_hidden():
    (one,) = averages([reading(1, 1, "<0 mg/L"), reading(2, 2, "0.14 mg/L")], limit(bound=Bound.MINIMUM))
    assert (one.span.is_exact, one.span.high_open, one.outcome) == (True, False, Outcome.WITHIN)


def test_readings_of_another_fraction_are_not_usable():
    assert is_usable(reading(1, 1, "5 ug/L"), limit())
    assert not is_usable(reading(1, 1, "5 ug/L", fraction=Fraction.DISSOLVED), limit())
    assert not is_usable(reading(1, 1, "5 mg/kg"), limit())


def test_a_reading_is_observed_in_its_canonical_unit():
    one = observed(reading(1, 1, "<5 ug/L"))
    assert (one.value * 200, one.qualifier) == (1, Qualifier.BELOW)


@pytest.mark.parametrize("name", ["zero", "half", "full"])
def test_rules_keep_their_names(name):
    assert rule_of(limit(nondetects=NonDetectRule(name))) == Substitution(name)
