"""Local times of a site, and the rule that nothing is recorded before it happened."""

from __future__ import annotations

from datetime import UTC, date, datetime
from zoneinfo import ZoneInfo

from effluent.domain import Site
from effluent.errors import ValueRefused

__all__ = ["local", "local_day", "past"]


def local(moment: datetime, site: Site) -> datetime:
    """Return an aware instant; a time without an offset is the site's own.

    Raises
    ------
    ValueRefused
        If the site's clocks skipped that time, or showed it twice.
    """
    if moment.tzinfo is not None:
        return moment.astimezone(UTC)
    zone = ZoneInfo(site.time_zone)
    first, second = (moment.replace(tzinfo=zone, fold=fold).astimezone(UTC) for fold in (0, 1))
    if first == second:
        return first
    remedy = f"clocks at {site.code} changed then; give the offset, as in {moment.isoformat()}+01:00"
    raise ValueRefused("local time", moment.isoformat(sep=" "), remedy)


def local_day(instant: datetime, site: Site) -> date:
    """Return the calendar day of an instant at a site."""
    return instant.astimezone(ZoneInfo(site.time_zone)).date()


def past(what: str, instant: datetime, now: datetime) -> datetime:
    """Return an instant that is not in the future.

    Raises
    ------
    ValueRefused
        If it is.
    """
    if instant > now:
        raise ValueRefused(
            what, instant.isoformat(), f"it lies in the future; it is now {now:%Y-%m-%dT%H:%M:%SZ}"
        )
    return instant
