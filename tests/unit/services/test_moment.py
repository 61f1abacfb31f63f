"""Local times. The changes of clocks are those of the IANA time zone database, 2026."""

from __future__ import annotations

from datetime import UTC, date, datetime, timedelta, timezone
from zoneinfo import ZoneInfo

import pytest

from effluent.errors import ValueRefused
from effluent.services.moment import at_site, local, local_day, past, shown
from tests.world import SITE

LISBON = ZoneInfo("Europe/Lisbon")


@pytest.mark.parametrize(
    ("typed", "hour"),
    [
        (datetime.fromisoformat("2026-01-05 10:00"), 10),
        (datetime.fromisoformat("2026-07-05 10:00"), 9),
        (datetime(2026, 7, 5, 10, tzinfo=timezone(timedelta(hours=-5))), 15),
    ],
)
def test_time_without_offset_is_the_site_s(typed: datetime, hour: int) -> None:
    assert local(typed, SITE) == typed.replace(hour=hour, tzinfo=UTC)


def test_skipped_time_is_refused() -> None:
    with pytest.raises(ValueRefused, match=r"'2026-03-29 01:30'.*clocks of Europe/Lisbon skipped it"):
        local(datetime.fromisoformat("2026-03-29 01:30"), SITE)


def test_doubled_time_is_refused_with_both_ways_to_write_it() -> None:
    remedy = r"showed it twice that day; write 2026-10-25T01:30\+01:00 or 2026-10-25T01:30\+00:00"
    with pytest.raises(ValueRefused, match=remedy):
        local(datetime.fromisoformat("2026-10-25 01:30"), SITE)


def test_day_is_the_site_s() -> None:
    assert local_day(datetime(2026, 7, 5, 23, 30, tzinfo=UTC), SITE) == date(2026, 7, 6)


@pytest.mark.parametrize(
    ("instant", "text"),
    [
        (datetime(2026, 7, 5, 10, tzinfo=LISBON), "2026-07-05 10:00 Europe/Lisbon"),
        (datetime(2026, 7, 5, 10, 0, 7, tzinfo=LISBON), "2026-07-05 10:00:07 Europe/Lisbon"),
        (datetime(2026, 10, 25, 1, 30, tzinfo=LISBON), "2026-10-25 01:30+01:00 Europe/Lisbon"),
        (datetime(2026, 10, 25, 1, 30, fold=1, tzinfo=LISBON), "2026-10-25 01:30+00:00 Europe/Lisbon"),
        (datetime(2026, 7, 5, 10, tzinfo=UTC), "2026-07-05 10:00 UTC"),
        (datetime(2026, 7, 5, 10, tzinfo=timezone(timedelta(hours=2))), "2026-07-05 08:00 UTC"),
    ],
)
def test_instant_is_shown_with_its_zone(instant: datetime, text: str) -> None:
    assert shown(instant) == text


def test_future_is_refused_in_local_time() -> None:
    now = datetime(2026, 7, 5, 9, tzinfo=UTC)
    assert past("time", now, now, site=SITE) == now
    with pytest.raises(ValueRefused) as refused:
        past("time of the wash", now + timedelta(minutes=1), now, site=SITE)
    assert str(refused.value) == (
        "time of the wash '2026-07-05 10:01 Europe/Lisbon' is not accepted: it lies in the future; "
        "there it is 2026-07-05 10:00 Europe/Lisbon now"
    )


def test_at_site_keeps_the_instant() -> None:
    instant = datetime(2026, 7, 5, 9, tzinfo=UTC)
    assert at_site(instant, SITE) == instant
    assert at_site(instant, SITE).hour == 10
