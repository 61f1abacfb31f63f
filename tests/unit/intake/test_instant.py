from datetime import UTC, datetime, timedelta

import pytest

from effluent.errors import ValueRefused
from effluent.intake.instant import Clock
from effluent.intake.layout import zone

LISBON = zone("Europe/Lisbon")


@pytest.mark.parametrize(
    ("written", "instant"),
    [
        ("2026-01-05 14:30", "2026-01-05T14:30:00.000000Z"),
        ("2026-07-05T14:30:15", "2026-07-05T13:30:15.000000Z"),
        ("2026-07-05T14:30:15.25", "2026-07-05T13:30:15.250000Z"),
        ("2026-07-05 14:30Z", "2026-07-05T14:30:00.000000Z"),
        ("2026-07-05 14:30 +05:30", "2026-07-05T09:00:00.000000Z"),
    ],
)
def test_iso_times_come_as_utc(written, instant):
    assert Clock(LISBON).read(written) == instant


def test_date_alone_is_the_last_minute_of_that_local_day():
    assert Clock(LISBON).read("2026-07-05") == "2026-07-05T22:59:00.000000Z"
    assert Clock(LISBON, "%d.%m.%Y").read("05.07.2026") == "2026-07-05T22:59:00.000000Z"


def test_declared_format_is_read_and_iso_beside_it():
    clock = Clock(LISBON, "%d/%m/%Y %H:%M")
    assert (
        clock.read("05/01/2026 14:30") == clock.read("2026-01-05T14:30:00") == "2026-01-05T14:30:00.000000Z"
    )


def test_time_that_the_clocks_showed_twice_is_the_later_one():
    # EU summer time ended on 2025-10-26 at 01:00 UTC (Directive 2000/84/EC: last Sunday of October).
    assert Clock(LISBON).read("2025-10-26 01:30") == "2025-10-26T01:30:00.000000Z"


def test_time_that_the_clocks_skipped_is_refused():
    # EU summer time began on 2026-03-29 at 01:00 UTC (Directive 2000/84/EC: last Sunday of March).
    with pytest.raises(ValueRefused, match="clocks in Europe/Lisbon skipped that time"):
        Clock(LISBON).read("2026-03-29 01:30")


@pytest.mark.parametrize(
    "written", ["5.7.2026", "20260705", "2026-02-30", "2026-07-05 25:00", "yesterday", "46000"]
)
def test_what_is_no_date_is_refused_with_the_way_out(written):
    with pytest.raises(ValueRefused, match="or declare date_format"):
        Clock(LISBON).read(written)


def test_text_in_neither_format_names_both():
    with pytest.raises(ValueRefused, match=r"write it in the format %d\.%m\.%Y or ISO 8601"):
        Clock(LISBON, "%d.%m.%Y").read("31.02.2026")


def test_year_of_another_century_is_refused():
    with pytest.raises(ValueRefused, match="1950 to 2199"):
        Clock(LISBON).read("0026-07-05")


@pytest.mark.parametrize(
    "name", ["Europe/Lisbon", "America/New_York", "Australia/Lord_Howe", "Asia/Kathmandu"]
)
def test_every_half_hour_of_a_year_agrees_with_the_zone(name):
    clock, start = Clock(zone(name)), datetime.fromisoformat("2026-01-01T00:15+00:00")
    for half_hours in range(365 * 48):
        instant = start + timedelta(minutes=30 * half_hours)
        local = instant.astimezone(clock.zone)
        if local.replace(fold=1).astimezone(UTC) == instant:
            assert clock.read(f"{local:%Y-%m-%d %H:%M}") == f"{instant:%Y-%m-%dT%H:%M:%S.%fZ}"
