"""The results of a discharge point as measurements, each held against the strictest limit of its day."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from fractions import Fraction as Rational

from effluent.calc.figure import Figure, greatest_figure
from effluent.calc.noncompliance import Measurement
from effluent.calc.observation import Observation, Standing
from effluent.calc.reading import exact_value
from effluent.calc.rule import in_force, limit_unit, written_cut
from effluent.domain import Bound, Fraction, Limit, Result, Statistic

__all__ = ["Measured", "Subject", "is_judged", "measured"]

_JUDGED = frozenset({Statistic.INSTANTANEOUS, Statistic.DAILY})

Subject = tuple[str, Fraction]
"""An analyte and the fraction that its limits are written for."""


@dataclass(frozen=True, kw_only=True)
class Measured:
    """One measurement and what it rests on; the results are laboratory duplicates where there are several.

    A measurement held against a minimum has its signs turned, so that going below is going beyond.
    """

    limit: Limit
    results: tuple[Result, ...]
    measurement: Measurement

    @property
    def subject(self) -> Subject:
        """Analyte and fraction."""
        return self.limit.analyte, self.limit.fraction


def is_judged(limit: Limit) -> bool:
    """Say whether single results are held against a limit: an instantaneous or a daily one."""
    return limit.statistic in _JUDGED


def measured(
    results: Sequence[Result], days: Mapping[str, date], limits: Sequence[Limit]
) -> tuple[tuple[Measured, ...], Counter[str]]:
    """Return the measurements, and the analytes of results that no limit in force is written for.

    Parameters
    ----------
    results : sequence of Result
        Of one discharge point; superseded ones left out.
    days : mapping of str to date
        Sample to the local day it counts for.
    limits : sequence of Limit
        Those of that point.

    Raises
    ------
    ValueRefused
        If a number cannot be read.
    """
    held: dict[str, list[Limit]] = {}
    for limit in filter(is_judged, limits):
        held.setdefault(limit.analyte, []).append(limit)
    found, aside = [], Counter[str]()
    for group in _duplicates(results):
        one, day = group[0], days[group[0].sample]
        fitting = [limit for limit in held.get(one.analyte, ()) if _fits(limit, one, day)]
        if fitting:
            found.append(_strictest(group, day, fitting))
        else:
            aside[one.analyte] += 1
    return tuple(found), aside


def _duplicates(results: Sequence[Result]) -> Iterator[tuple[Result, ...]]:
    """Yield the results that are runs of one analyte in one fraction of one sample."""
    groups: dict[tuple[object, ...], list[Result]] = {}
    for result in results:
        key = (result.sample, result.analyte, result.fraction, result.canonical_unit)
        groups.setdefault(key, []).append(result)
    return map(tuple, groups.values())


def _fits(limit: Limit, result: Result, day: date) -> bool:
    same = limit.fraction == result.fraction and limit_unit(limit.value) == result.canonical_unit
    return same and in_force(limit, day)


def _strictest(group: tuple[Result, ...], day: date, limits: Sequence[Limit]) -> Measured:
    """Hold runs against the lowest maximum, or against the highest minimum if they may lie below it."""
    figures = [_figure(result) for result in group]
    maxima = [limit for limit in limits if limit.bound == Bound.MAXIMUM]
    minima = [limit for limit in limits if limit.bound == Bound.MINIMUM]
    floor = max(minima, key=_value, default=None)
    if floor is not None and (not maxima or min(each.low for each in figures) <= _value(floor)):
        turned = greatest_figure([_turned(each, _value(floor)) for each in figures])
        against = Measurement(day=day, observed=turned, limit=-_value(floor))
        return Measured(limit=floor, results=group, measurement=against)
    top = min(maxima, key=_value)
    against = Measurement(day=day, observed=greatest_figure(figures), limit=_value(top))
    return Measured(limit=top, results=group, measurement=against)


def _value(limit: Limit) -> Rational:
    return written_cut(limit).value


def _figure(result: Result) -> Figure:
    value = exact_value(result.number, result.unit, result.density, canonical_unit=result.canonical_unit)
    seen = Observation(value=value, qualifier=result.qualifier)
    return _bounded(seen.low, seen.high, seen.standing)


def _turned(figure: Figure, floor: Rational) -> Figure:
    """Return a figure with its signs turned; where nothing bounds it, as far above the floor as matters."""
    high = max(floor, figure.low) + 1 if figure.high is None else figure.high
    return _bounded(-high, -figure.low, figure.standing)


def _bounded(low: Rational, high: Rational | None, standing: Standing) -> Figure:
    missing = standing == Standing.NOT_DETECTED
    return Figure(low=low, high=high, value=None, standing=standing, count=1, nondetects=int(missing))
