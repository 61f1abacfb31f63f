"""Local times of a site, and the rule that nothing is recorded before it happened."""

from __future__ import annotations

from datetime import UTC, date, datetime
from zoneinfo import ZoneInfo

from effluent.domain import Site
from effluent.errors import ValueRefused

__all__ = ["at_site", "local", "local_day", "past", "shown"]


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
    first, second = (moment.replace(tzinfo=zone, fold=fold) for fold in (0, 1))
    if first.utcoffset() == second.utcoffset():
        return first.astimezone(UTC)
    raise ValueRefused("local time", moment.isoformat(sep=" ", timespec="minutes"), _remedy(first, second))


def _remedy(first: datetime, second: datetime) -> str:
    """Say what to write for a time that the clocks skipped, or showed twice."""
    zone = first.tzinfo
    choices = " or ".join(each.isoformat(timespec="minutes") for each in (first, second))
    skipped = first.astimezone(UTC).astimezone(zone).replace(tzinfo=None) != first.replace(tzinfo=None)
    if skipped:
        return f"the clocks of {zone} skipped it that day; give the time that they showed"
    return f"the clocks of {zone} showed it twice that day; write {choices}"


def at_site(instant: datetime, site: Site) -> datetime:
    """Return an instant as the site's clocks show it."""
    return instant.astimezone(ZoneInfo(site.time_zone))


def local_day(instant: datetime, site: Site) -> date:
    """Return the calendar day of an instant at a site."""
    return at_site(instant, site).date()


def shown(instant: datetime) -> str:
    """Return an aware instant as a reader sees it, with its zone named.

    The offset stands there only where the zone's clocks show the same time twice.

    Examples
    --------
    >>> shown(datetime(2026, 3, 2, 10, tzinfo=ZoneInfo("Europe/Lisbon")))
    '2026-03-02 10:00 Europe/Lisbon'
    """
    precision = "seconds" if instant.second else "minutes"
    if not isinstance(instant.tzinfo, ZoneInfo):
        return f"{instant.astimezone(UTC).replace(tzinfo=None).isoformat(' ', precision)} UTC"
    twice = instant.utcoffset() != instant.replace(fold=1 - instant.fold).utcoffset()
    text = (instant if twice else instant.replace(tzinfo=None)).isoformat(" ", precision)
    return f"{text} {instant.tzinfo.key}"


def past(what: str, instant: datetime, now: datetime, *, site: Site) -> datetime:
    """Return an instant that is not in the future.

    Raises
    ------
    ValueRefused
        If it is; the text names both times as the site's clocks show them.
    """
    if instant > now:
        here = shown(at_site(now.replace(second=0, microsecond=0), site))
        raise ValueRefused(
            what, shown(at_site(instant, site)), f"it lies in the future; there it is {here} now"
        )
    return instant
