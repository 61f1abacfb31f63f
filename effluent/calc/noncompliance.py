"""Patterns over time: significant noncompliance, and the counting of violations."""

from __future__ import annotations

import calendar
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from fractions import Fraction as Rational

from effluent.calc.figure import Figure
from effluent.calc.observation import Observation
from effluent.domain import BrokenBy
from effluent.errors import ValueRefused

__all__ = [
    "Criteria",
    "Finding",
    "Measurement",
    "MonthCounts",
    "Share",
    "Window",
    "Windows",
    "count_violations",
    "fixed_halves",
    "rolling_quarters",
    "significant_noncompliance",
]

_HUNDRED = 100
_TECHNICAL_FACTOR = Rational("1.2")


class Finding(StrEnum):
    """Whether a criterion is met, as far as the measurements can show."""

    MET = "met"
    NOT_MET = "not met"
    OPEN = "cannot be told"


class MonthCounts(StrEnum):
    """As how many violations a broken monthly average counts; the place says which."""

    ONE = "one"
    EACH_DAY = "each day of the month"


class Windows(StrEnum):
    """Over which windows of six months a place judges."""

    ROLLING_QUARTERS = "rolling quarters"
    FIXED_HALVES = "fixed halves"


@dataclass(frozen=True, kw_only=True)
class Measurement:
    """One result, daily value or average held against one numeric limit of its analyte, in one unit.

    ``day`` is the one it counts for: of an average the last day of its window.
    """

    day: date
    observed: Observation | Figure
    limit: Rational


@dataclass(frozen=True, kw_only=True)
class Criteria:
    """The figures of 40 CFR 403.8(f)(2)(viii)(A) and (B); local codes differ, so each can be changed.

    A percentage is reached by being equalled. ``technical_factor`` is 1.4 for BOD, TSS, fats, oil and
    grease, 1.2 for other pollutants, and `None` for pH, to which (B) does not apply.
    """

    chronic_percent: int = 66
    chronic_broken_by: BrokenBy = BrokenBy.BEYOND
    technical_percent: int = 33
    technical_broken_by: BrokenBy = BrokenBy.REACHING
    technical_factor: Rational | None = _TECHNICAL_FACTOR


@dataclass(frozen=True, kw_only=True)
class Share:
    """How many of ``count`` measurements break a line: ``surely``, and ``possibly`` (those included)."""

    count: int
    surely: int
    possibly: int
    percent: int

    @property
    def finding(self) -> Finding:
        """Whether the percentage is reached, in integers; no measurement reaches none."""
        if not self.count or self.possibly * _HUNDRED < self.percent * self.count:
            return Finding.NOT_MET
        return Finding.MET if self.surely * _HUNDRED >= self.percent * self.count else Finding.OPEN


@dataclass(frozen=True, kw_only=True)
class Window:
    """One window of the period, its first and last day counting, and what was found in it.

    ``technical`` is `None` where the technical review criterion does not apply.
    """

    first: date
    last: date
    chronic: Share
    technical: Share | None

    @property
    def finding(self) -> Finding:
        """Significant noncompliance by (A) or (B): met if one is, open if one is and none is met."""
        findings = {share.finding for share in (self.chronic, self.technical) if share is not None}
        return next(f for f in (Finding.MET, Finding.OPEN, Finding.NOT_MET) if f in findings)


def rolling_quarters(first: date, last: date) -> tuple[tuple[date, date], ...]:
    """Return the six months up to each end of a quarter in a period.

    Parameters
    ----------
    first, last : date
        The period; both count.

    Returns
    -------
    tuple of (date, date)
        First and last day of each window, in order.

    Raises
    ------
    ValueRefused
        If the period ends before it begins.

    Notes
    -----
    Evaluation at the end of each quarter over the six months before it: EPA memorandum of 9 September 1991
    on the definition for industrial users, from memory.
    """
    _refuse_reversed(first, last)
    ends = [_month_end(year, month) for year in range(first.year, last.year + 1) for month in (3, 6, 9, 12)]
    return tuple((_months_before(end, 5), end) for end in ends if first <= end <= last)


def fixed_halves(first: date, last: date) -> tuple[tuple[date, date], ...]:
    """Return the halves of calendar years that end in a period.

    Parameters
    ----------
    first, last : date
        The period; both count.

    Returns
    -------
    tuple of (date, date)
        January to June and July to December, in order.

    Raises
    ------
    ValueRefused
        If the period ends before it begins.

    Notes
    -----
    North Carolina judges fixed half-years [1]_.

    References
    ----------
    .. [1] North Carolina DEQ, audit letter; read on 2026-12-01.
    """
    _refuse_reversed(first, last)
    ends = [_month_end(year, month) for year in range(first.year, last.year + 1) for month in (6, 12)]
    return tuple((_months_before(end, 5), end) for end in ends if first <= end <= last)


def significant_noncompliance(
    measurements: Sequence[Measurement],
    spans: Sequence[tuple[date, date]],
    *,
    criteria: Criteria | None = None,
) -> tuple[Window, ...]:
    """Return for each window how many measurements of one analyte break the lines of (A) and (B).

    Parameters
    ----------
    measurements : sequence of Measurement, length n
        All measurements of one analyte in the period, also those between the limits; each against each of
        its numeric limits, in the unit of that limit.
    spans : sequence of (date, date), length m
        As `rolling_quarters` or `fixed_halves` give them, or any others.
    criteria : Criteria, optional
        Those of the federal rule if not given.

    Returns
    -------
    tuple of Window, length m
        In the order of `spans`.

    Raises
    ------
    ValueRefused
        If a span ends before it begins, or a percentage is not from 1 to 100.

    Notes
    -----
    40 CFR 403.8(f)(2)(viii)(A): 66 % or more of all measurements of a pollutant in six months exceed a
    numeric requirement; (B): 33 % or more equal or exceed the limit times the factor [1]_. Integers and
    exact fractions only. What rests on non-detects breaks a line surely if its lower bound does, and possibly
    if its upper bound lies beyond. (C) to (H) of the rule are judgements and dates, and not computed here.

    References
    ----------
    .. [1] 40 CFR 403.8(f)(2)(viii), 2015 annual edition (as amended by 70 FR 60193); read on 2026-12-01.
    """
    rule = criteria or Criteria()
    for percent in (rule.chronic_percent, rule.technical_percent):
        if not 1 <= percent <= _HUNDRED:
            raise ValueRefused("percentage", str(percent), "give a whole number from 1 to 100")
    return tuple(_window(measurements, first, last, rule) for first, last in spans)


def count_violations(
    daily: Sequence[date], months: Sequence[date], *, month_counts: MonthCounts
) -> tuple[int, int]:
    """Return how many violations daily and monthly limits make.

    Parameters
    ----------
    daily : sequence of date, length n
        One entry for each daily limit broken on a day; concentration and mass limits are separate limits.
    months : sequence of date, length m
        One entry for each monthly limit broken, as any day of its month.
    month_counts : MonthCounts
        As the place counts a broken monthly average.

    Returns
    -------
    (int, int)
        Violations of daily limits, and of monthly limits; they add.

    Raises
    ------
    ValueRefused
        Never; nothing broken is no violation.

    Notes
    -----
    A monthly average broken in a month of 31 days as 31 violations, added to the daily ones: code of Eau
    Claire, Michigan [1]_. Other places count one.

    References
    ----------
    .. [1] Eau Claire, Michigan, code of ordinances, sewer use; read on 2026-12-01.
    """
    if month_counts == MonthCounts.ONE:
        return len(daily), len(months)
    return len(daily), sum(calendar.monthrange(day.year, day.month)[1] for day in months)


def _window(measurements: Sequence[Measurement], first: date, last: date, rule: Criteria) -> Window:
    _refuse_reversed(first, last)
    inside = [one for one in measurements if first <= one.day <= last]
    factor = rule.technical_factor
    technical = None
    if factor is not None:
        technical = _share(inside, factor, rule.technical_broken_by, rule.technical_percent)
    chronic = _share(inside, Rational(1), rule.chronic_broken_by, rule.chronic_percent)
    return Window(first=first, last=last, chronic=chronic, technical=technical)


def _share(measurements: Sequence[Measurement], factor: Rational, broken_by: BrokenBy, percent: int) -> Share:
    hits = [_hits(one.observed, one.limit * factor, broken_by) for one in measurements]
    return Share(
        count=len(hits),
        surely=sum(surely for surely, _ in hits),
        possibly=sum(possibly for _, possibly in hits),
        percent=percent,
    )


def _hits(observed: Observation | Figure, line: Rational, broken_by: BrokenBy) -> tuple[bool, bool]:
    """Return whether the truth surely, and possibly, breaks a line; it never equals an open bound."""
    low, high = observed.low, observed.high
    if high is None:
        return low >= line, True
    surely = low >= line if broken_by == BrokenBy.REACHING else low > line
    return surely, surely if low == high else high > line


def _month_end(year: int, month: int) -> date:
    return date(year, month, calendar.monthrange(year, month)[1])


def _months_before(day: date, months: int) -> date:
    """Return the first day of the month some months before."""
    years, month = divmod(day.year * 12 + day.month - 1 - months, 12)
    return date(years, month + 1, 1)


def _refuse_reversed(first: date, last: date) -> None:
    if last < first:
        raise ValueRefused(
            "period", f"{first} to {last}", "it ends before it begins; name the earlier day first"
        )
