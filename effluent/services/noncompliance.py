"""Significant noncompliance at a discharge point, by the figures that the place gives."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from fractions import Fraction as Rational

from effluent.calc.noncompliance import (
    Criteria,
    Finding,
    Window,
    Windows,
    fixed_halves,
    rolling_quarters,
    significant_noncompliance,
)
from effluent.calc.rule import in_force
from effluent.domain import Bound, BrokenBy, Fraction, Limit, Point, Result
from effluent.errors import ValueRefused
from effluent.reference.analyte import by_key
from effluent.services.measured import Measured, Subject, is_judged, measured
from effluent.services.moment import local_day
from effluent.services.water import waters
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading

__all__ = ["Code", "Judged", "Noncompliance", "Unread", "judge_point"]

Span = tuple[date, date]

# 40 CFR 403.8(f)(2)(viii)(B), 2015 annual edition: 1.4 for BOD, TSS, fats, oil and grease. Non-polar
# material is the part of oil and grease that silica gel leaves.
_OILS = frozenset({"biochemical oxygen demand", "total suspended solids", "oil and grease", "sgt-hem"})
# pH as the rule says; of a temperature a multiple means nothing, because it depends on the unit.
_WITHOUT_FACTOR = frozenset({"pH", "temperature"})
_WINDOWS = {Windows.ROLLING_QUARTERS: rolling_quarters, Windows.FIXED_HALVES: fixed_halves}


@dataclass(frozen=True, kw_only=True)
class Code:
    """The figures by which a place judges; without others, those of 40 CFR 403.8(f)(2)(viii)(A) and (B)."""

    windows: Windows = Windows.ROLLING_QUARTERS
    chronic_share: int = 66
    exceeding: BrokenBy = BrokenBy.BEYOND
    review_share: int = 33
    reviewing: BrokenBy = BrokenBy.REACHING
    factor: Rational = Rational("1.2")
    factor_oils: Rational = Rational("1.4")


@dataclass(frozen=True, kw_only=True)
class Judged:
    """One analyte in one window: the limits its measurements were held against, the counts, the finding.

    ``factor`` is that of the review, `None` where it does not apply.
    """

    analyte: str
    fraction: Fraction
    limits: tuple[str, ...]
    factor: Rational | None
    window: Window


@dataclass(frozen=True, kw_only=True)
class Unread:
    """An analyte with a limit in force in a window, and no measurement."""

    analyte: str
    fraction: Fraction
    limits: tuple[str, ...]
    first: date
    last: date


@dataclass(frozen=True, kw_only=True)
class Noncompliance:
    """What every window of a period shows.

    ``today`` is the day at the site; a window that ends then or later can still change. ``without_limit``
    counts for each analyte the results that no instantaneous or daily limit in force is written for.
    """

    point: Point
    code: Code
    today: date
    judged: tuple[Judged, ...]
    unread: tuple[Unread, ...]
    without_limit: Mapping[str, int]
    not_judged: tuple[Limit, ...]

    @property
    def is_clear(self) -> bool:
        """Whether something was judged, and the criteria are met nowhere, nor open."""
        return bool(self.judged) and all(one.window.finding == Finding.NOT_MET for one in self.judged)


def judge_point(
    ledger: Ledger, point: str, period: Span, code: Code | None = None, *, as_of: str | None = None
) -> Noncompliance:
    """Return what the samples drawn at a point show in every window that ends in a period.

    Each result is one measurement (laboratory duplicates of a sample one, by their worst), held against the
    strictest instantaneous or daily limit of its analyte and fraction in force on its local day.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    point : str
        A discharge point.
    period : (date, date)
        First and last day.
    code : Code, optional
        Without it, the federal figures.
    as_of : str, optional
        Answer with what was known then.

    Raises
    ------
    RecordMissing
        If there is no such point.
    ValueRefused
        If no window ends in the period, or a share is none.
    """
    rule = code or Code()
    spans = _spans(period, rule.windows)
    with ledger.reading(as_of) as reading:
        place: Point = reading.value("point", point)
        limits: tuple[Limit, ...] = reading.values("limit", point=point)
        results, days = _results(reading, place, spans)
        today = local_day(ledger.clock(), reading.value("site", place.site))
    found, without_limit = measured(results, days, limits)
    groups = _grouped(found)
    return Noncompliance(
        point=place,
        code=rule,
        today=today,
        judged=tuple(one for group in groups.values() for one in _judged(group, spans, rule)),
        unread=tuple(_unread(groups, [span for span in spans if span[0] <= today], limits)),
        without_limit=dict(sorted(without_limit.items())),
        not_judged=tuple(limit for limit in limits if not is_judged(limit) and _overlaps(limit, spans)),
    )


def _spans(period: Span, windows: Windows) -> tuple[Span, ...]:
    spans = _WINDOWS[windows](*period)
    if not spans:
        ends = (
            "March, June, September and December"
            if windows == Windows.ROLLING_QUARTERS
            else "June and December"
        )
        raise ValueRefused(
            "period", f"{period[0]} to {period[1]}", f"no window ends in it; {windows} end with {ends}"
        )
    return spans


def _results(
    reading: Reading, point: Point, spans: Sequence[Span]
) -> tuple[tuple[Result, ...], dict[str, date]]:
    """Return the results of samples drawn at the point within the windows, and the day of each sample."""
    first, last = spans[0][0], spans[-1][1]
    drawn = waters(reading, reading.values("sample", point=point.code))
    days = {sample.code: water.day(sample) for water in drawn for sample in water.samples}
    within = {sample: day for sample, day in days.items() if first <= day <= last}
    return reading.results(samples=within), within


def _grouped(found: Sequence[Measured]) -> dict[Subject, list[Measured]]:
    groups: dict[Subject, list[Measured]] = {}
    for one in sorted(found, key=lambda one: one.subject):
        groups.setdefault(one.subject, []).append(one)
    return groups


def _judged(group: Sequence[Measured], spans: Sequence[Span], rule: Code) -> Iterator[Judged]:
    """Yield the windows of one analyte that have a measurement."""
    factor = _factor(group, rule)
    criteria = Criteria(
        chronic_percent=rule.chronic_share,
        chronic_broken_by=rule.exceeding,
        technical_percent=rule.review_share,
        technical_broken_by=rule.reviewing,
        technical_factor=factor,
    )
    analyte, fraction = group[0].subject
    windows = significant_noncompliance([one.measurement for one in group], spans, criteria=criteria)
    for window in windows:
        inside = [one for one in group if window.first <= one.measurement.day <= window.last]
        limits = tuple(sorted({one.limit.code for one in inside}))
        if inside:
            yield Judged(analyte=analyte, fraction=fraction, limits=limits, factor=factor, window=window)


def _factor(group: Sequence[Measured], rule: Code) -> Rational | None:
    analyte = group[0].limit.analyte
    turned = any(one.limit.bound == Bound.MINIMUM for one in group)
    if turned or by_key(analyte).kind in _WITHOUT_FACTOR:
        return None
    return rule.factor_oils if analyte in _OILS else rule.factor


def _unread(
    groups: Mapping[Subject, Sequence[Measured]], spans: Sequence[Span], limits: Sequence[Limit]
) -> Iterator[Unread]:
    for first, last in spans:
        wanted: dict[Subject, list[str]] = {}
        for limit in filter(is_judged, limits):
            if _overlaps(limit, [(first, last)]):
                wanted.setdefault((limit.analyte, limit.fraction), []).append(limit.code)
        for subject, codes in wanted.items():
            days = [one.measurement.day for one in groups.get(subject, ())]
            if not any(first <= day <= last for day in days):
                yield Unread(
                    analyte=subject[0], fraction=subject[1], limits=tuple(codes), first=first, last=last
                )


def _overlaps(limit: Limit, spans: Sequence[Span]) -> bool:
    """Say whether a limit is in force on a day of any window."""
    return any(in_force(limit, max(first, min(limit.effective_from, last))) for first, last in spans)
