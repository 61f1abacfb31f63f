"""Averages of daily values over monitoring days, months, rolling days and years."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import date, timedelta

from effluent.calc.figure import Figure, mean_figure
from effluent.calc.observation import Substitution
from effluent.errors import ValueRefused

__all__ = ["Average", "average", "calendar_months", "monitoring_days", "rolling_days", "years"]


@dataclass(frozen=True, kw_only=True)
class Average:
    """The average of the daily values of a window; first and last day count.

    ``days`` is how many daily values it has. ``is_short``: fewer than the least number asked for.
    ``is_single``: one daily value is the whole average.
    """

    first: date
    last: date
    days: int
    figure: Figure
    is_short: bool

    @property
    def is_single(self) -> bool:
        """Whether one daily value is the average."""
        return self.days == 1


def average(days: Mapping[date, Figure], *, rule: Substitution, least: int = 1) -> Average:
    """Return the average of the daily values given: of daily values, not of results.

    Parameters
    ----------
    days : mapping of date to Figure, length n >= 1
        Daily values in one unit, made under the same `rule`.
    rule : Substitution
        As for the daily values.
    least : int
        Daily values that the place wants at least; fewer are averaged all the same and flagged.

    Returns
    -------
    Average
        From the first to the last day given.

    Raises
    ------
    ValueRefused
        If there is no daily value.

    Notes
    -----
    Arithmetic mean, each daily value counting the same. Some places weight it by flow [1]_; that is not
    this average.

    References
    ----------
    .. [1] Oklahoma Administrative Code 252:606-11-1; read on 2026-12-01.
    """
    _refuse_nothing(days)
    return _window(dict(sorted(days.items())), min(days), max(days), rule, least)


def monitoring_days(
    days: Mapping[date, Figure], *, rule: Substitution, length: int = 4
) -> tuple[Average, ...]:
    """Return the average of every `length` consecutive monitoring days.

    Consecutive in the list of days on which samples were taken, not in the calendar.

    Parameters
    ----------
    days : mapping of date to Figure, length n
        Daily values in one unit, made under the same `rule`.
    rule : Substitution
        As for the daily values.
    length : int
        Number of monitoring days, 1 or more.

    Returns
    -------
    tuple of Average, length max(0, n - length + 1)
        In order of time; fewer days than `length` make none.

    Raises
    ------
    ValueRefused
        If `length` is below 1.

    Notes
    -----
    "Average of daily values for 4 consecutive monitoring days", 40 CFR 413.14 [1]_.

    References
    ----------
    .. [1] 40 CFR 413.14, 2015 annual edition; read on 2026-12-01.
    """
    _refuse_length(length)
    order = sorted(days)
    chosen = [order[n : n + length] for n in range(len(order) - length + 1)]
    return tuple(_window({d: days[d] for d in run}, run[0], run[-1], rule, length) for run in chosen)


def calendar_months(
    days: Mapping[date, Figure], *, rule: Substitution, least: int = 1
) -> tuple[Average, ...]:
    """Return the average of each calendar month that has a daily value.

    Parameters
    ----------
    days : mapping of date to Figure, length n
        Daily values in one unit.
    rule : Substitution
        As for the daily values.
    least : int
        Daily values wanted in a month.

    Returns
    -------
    tuple of Average
        From the first to the last day of each month, in order.

    Raises
    ------
    ValueRefused
        Never; a month without a daily value is not in the answer.

    Notes
    -----
    Arithmetic mean, as `average`. Whether a month is over is for the caller to say.
    """
    return _grouped(days, _month, rule, least)


def years(days: Mapping[date, Figure], *, rule: Substitution, least: int = 1) -> tuple[Average, ...]:
    """Return the average of each calendar year that has a daily value.

    Parameters
    ----------
    days : mapping of date to Figure, length n
        Daily values in one unit.
    rule : Substitution
        As for the daily values.
    least : int
        Daily values wanted in a year.

    Returns
    -------
    tuple of Average
        From 1 January to 31 December of each year, in order.

    Raises
    ------
    ValueRefused
        Never; a year without a daily value is not in the answer.

    Notes
    -----
    Arithmetic mean, as `average`.
    """
    return _grouped(days, lambda day: (date(day.year, 1, 1), date(day.year, 12, 31)), rule, least)


def rolling_days(
    days: Mapping[date, Figure], *, rule: Substitution, least: int = 1, length: int = 30
) -> tuple[Average, ...]:
    """Return for each monitoring day the average of the calendar days up to and with it.

    Parameters
    ----------
    days : mapping of date to Figure, length n
        Daily values in one unit.
    rule : Substitution
        As for the daily values.
    least : int
        Daily values wanted in a window.
    length : int
        Calendar days, 1 or more.

    Returns
    -------
    tuple of Average, length n
        Windows of `length` calendar days, in order of their last day.

    Raises
    ------
    ValueRefused
        If `length` is below 1.

    Notes
    -----
    Arithmetic mean, as `average`.
    """
    _refuse_length(length)
    order = sorted(days)
    found, start = [], 0
    for end, last in enumerate(order):
        first = last - timedelta(days=length - 1)
        while order[start] < first:
            start += 1
        found.append(_window({d: days[d] for d in order[start : end + 1]}, first, last, rule, least))
    return tuple(found)


def _grouped(
    days: Mapping[date, Figure],
    span: Callable[[date], tuple[date, date]],
    rule: Substitution,
    least: int,
) -> tuple[Average, ...]:
    groups: dict[tuple[date, date], dict[date, Figure]] = {}
    for day in sorted(days):
        groups.setdefault(span(day), {})[day] = days[day]
    return tuple(_window(inside, *ends, rule, least) for ends, inside in groups.items())


def _month(day: date) -> tuple[date, date]:
    first = day.replace(day=1)
    return first, (first + timedelta(days=31)).replace(day=1) - timedelta(days=1)


def _window(days: Mapping[date, Figure], first: date, last: date, rule: Substitution, least: int) -> Average:
    figure = mean_figure([*days.values()], rule)
    return Average(first=first, last=last, days=len(days), figure=figure, is_short=len(days) < least)


def _refuse_nothing(given: Mapping[date, Figure]) -> None:
    if not given:
        raise ValueRefused("average", "", "there is no result in it; no number is invented")


def _refuse_length(length: int) -> None:
    if length < 1:
        raise ValueRefused("window", str(length), "it needs one day or more")
