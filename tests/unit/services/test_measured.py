from __future__ import annotations

from datetime import date
from fractions import Fraction as Rational

import pytest

from effluent.domain import Bound, Fraction, Limit, Qualifier, Quantity, Result, Statistic
from effluent.services.measured import Measured, is_judged, measured

DAY = date(2026, 3, 2)


def limit(value: str, **given: object) -> Limit:
    standard = {
        "code": value,
        "point": "SEW",
        "analyte": "ph",
        "value": Quantity.parse(value),
        "effective_from": date(2020, 1, 1),
        "authority": "Invented Water Board",
        "document": "permit 7 (invented)",
        "entered_by": "RS",
    }
    return Limit(**{**standard, **given})  # type: ignore[arg-type]


def ph(number: str, qualifier: Qualifier = Qualifier.EQUAL) -> Result:
    return Result(
        sample="S-1", analyte="ph", fraction=Fraction.TOTAL, text=number, number=number, unit="",
        canonical_unit="s.u.", qualifier=qualifier,
    )  # fmt: skip


def against(*limits: Limit, result: Result) -> Measured:
    (one,), _ = measured([result], {"S-1": DAY}, limits)
    return one


@pytest.mark.parametrize(
    ("number", "chosen"), [("5.9", "6.0"), ("6.0", "6.0"), ("6.1", "9.0"), ("9.1", "9.0")]
)
def test_side_that_a_reading_can_break_is_chosen(number: str, chosen: str) -> None:
    sides = limit("6.0", bound=Bound.MINIMUM), limit("9.0"), limit("5.0", bound=Bound.MINIMUM), limit("10.0")
    assert against(*sides, result=ph(number)).limit.code == chosen


def test_minimum_is_held_with_its_signs_turned() -> None:
    one = against(limit("6.0", bound=Bound.MINIMUM), result=ph("5.9"))
    assert (one.measurement.limit, one.measurement.observed.low) == (Rational(-6), Rational("-5.9"))


def test_reading_above_the_range_may_lie_on_either_side_of_a_minimum() -> None:
    seen = against(limit("6.0", bound=Bound.MINIMUM), result=ph("5.0", Qualifier.ABOVE)).measurement.observed
    assert seen.high is not None
    assert seen.low < -6 < seen.high == -5


def test_only_single_results_are_held_against_limits() -> None:
    assert [statistic for statistic in Statistic if is_judged(limit("9", statistic=statistic))] == [
        Statistic.INSTANTANEOUS,
        Statistic.DAILY,
    ]
