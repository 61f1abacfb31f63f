"""Holding times begin, run and end as the table says."""

from datetime import UTC, datetime, timedelta
from zoneinfo import ZoneInfo

import pytest

from effluent.domain.sample import Fraction, Method, Sample
from effluent.errors import ValueRefused
from effluent.reference.holding import HoldingTime, clock_start, deadline, holding, holding_times

NOON = datetime(2026, 1, 31, 12, tzinfo=UTC)


def sample(method, ended_at=None):
    return Sample(code="S-1", method=method, started_at=NOON, ended_at=ended_at, taken_by="AB")


def time_of(key):
    found = holding(key)
    assert isinstance(found, HoldingTime)
    return found


def test_grab_begins_at_collection():
    assert clock_start(sample(Method.GRAB)) == NOON


def test_composite_begins_at_its_end():
    end = NOON + timedelta(hours=24)
    assert clock_start(sample(Method.COMPOSITE, end)) == end


def test_composite_without_end_is_refused():
    with pytest.raises(ValueRefused, match="its end is needed"):
        clock_start(sample(Method.COMPOSITE))


@pytest.mark.parametrize(
    ("key", "last"),
    [
        ("ph", datetime(2026, 1, 31, 12, 15, tzinfo=UTC)),
        ("surfactants", datetime(2026, 2, 2, 12, tzinfo=UTC)),
        ("mercury", datetime(2026, 2, 28, 12, tzinfo=UTC)),
        ("cadmium", datetime(2026, 7, 31, 12, tzinfo=UTC)),
    ],
)
def test_deadline_adds_minutes_hours_days_or_months(key, last):
    assert deadline(NOON, time_of(key)) == last


@pytest.mark.parametrize(
    ("year", "day"), [pytest.param(2026, 28, id="common year"), pytest.param(2027, 29, id="leap year next")]
)
def test_six_months_from_the_end_of_august_end_with_february(year, day):
    collected = datetime(year, 8, 31, 8, tzinfo=UTC)
    assert deadline(collected, time_of("lead")) == datetime(year + 1, 2, day, 8, tzinfo=UTC)


def test_hours_are_elapsed_time_across_a_change_of_clocks():
    lisbon = ZoneInfo("Europe/Lisbon")
    last = deadline(datetime(2026, 3, 28, 12, tzinfo=lisbon), time_of("surfactants"))
    assert last == datetime(2026, 3, 30, 12, tzinfo=UTC)
    assert last.hour == 13


def test_time_without_offset_is_refused():
    with pytest.raises(ValueRefused, match="offset from UTC"):
        deadline(datetime(2026, 1, 1), time_of("ph"))  # noqa: DTZ001


def test_method_with_its_own_time_is_told_apart():
    assert str(holding("mercury", test_method="EPA 1631E")) == "90 days"
    assert str(holding("mercury", test_method="EPA 245.1")) == "28 days"


@pytest.mark.parametrize("key", ["temperature", "flash point", "no such analyte"])
def test_analyte_without_a_published_time_has_none(key):
    assert holding(key) is None


def test_extract_of_the_leaching_test_has_no_time_of_this_table():
    assert holding("cadmium", fraction=Fraction.TCLP) is None
    assert holding("cadmium", fraction=Fraction.DISSOLVED) is not None


def test_every_time_can_be_read_and_said():
    assert all(deadline(NOON, time) > NOON and str(time)[0].isdigit() for time in holding_times())


def test_malformed_duration_is_refused():
    broken = HoldingTime("x", "", "", "", "6 months", "", "", time_of("ph").source)
    with pytest.raises(ValueRefused, match="write P6M"):
        deadline(NOON, broken)
