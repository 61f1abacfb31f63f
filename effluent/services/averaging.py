"""Averages of what left a discharge point, for the samples asked about."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace
from datetime import date, timedelta
from typing import NamedTuple

from effluent.calc.average_verdict import judge_averages, unaveraged
from effluent.calc.verdict import without_reading
from effluent.domain import Limit, Sample, Statistic, Verdict
from effluent.services.water import Water, readings_of
from effluent.store.reading import Reading

__all__ = ["Averaging", "Unaveraged", "averaging"]

_CAUGHT = "caught water"
_NOT_CAUGHT = "an average over days is about what leaves a point, not about what a container or a wash holds"


class Unaveraged(NamedTuple):
    """A limit of an average that gives no verdict, and why; `water` as in ``point SEW``."""

    water: str
    limit: Limit
    why: str


class Averaging(NamedTuple):
    """The verdicts on averages that the samples of a water have a part in, and the limits that gave none."""

    verdicts: tuple[Verdict, ...] = ()
    unread: tuple[Limit, ...] = ()
    unaveraged: tuple[Unaveraged, ...] = ()


def averaging(reading: Reading, water: Water, limits: Sequence[Limit]) -> Averaging:
    """Judge the averages that samples of a water have a part in.

    A month has all samples of its point in it, also those that were not asked about. Caught water has no
    average: an average over days is about what leaves a point.
    """
    if not limits:
        return Averaging()
    if water.point is None:
        return Averaging(unaveraged=tuple(Unaveraged(_CAUGHT, limit, _NOT_CAUGHT) for limit in limits))
    readings = readings_of(reading, _whole(reading, water, limits))
    asked = {sample.code for sample in water.samples}
    unread = without_reading([each for each in readings if each.sample in asked], limits)
    reasons = [(limit, unaveraged(readings, limit, samples=asked)) for limit in limits]
    return Averaging(
        verdicts=tuple(v for v in judge_averages(readings, limits) if asked.intersection(v.samples)),
        unread=unread,
        unaveraged=tuple(
            Unaveraged(water.label, limit, why) for limit, why in reasons if why and limit not in unread
        ),
    )


def _whole(reading: Reading, water: Water, limits: Iterable[Limit]) -> Water:
    """Return the water with every sample of its point that a window of the limits can hold."""
    statistics = {limit.statistic for limit in limits}
    spans = {_span(water.day(sample), statistics) for sample in water.samples}
    found: tuple[Sample, ...] = reading.values("sample", point=water.point)
    return replace(
        water,
        samples=tuple(
            sample for sample in found if any(first <= water.day(sample) <= last for first, last in spans)
        ),
    )


def _span(day: date, statistics: set[Statistic]) -> tuple[date, date]:
    """Return the days that share a window with a day; monitoring days may lie any time apart."""
    if Statistic.FOUR_DAY in statistics:
        return date.min, date.max
    if Statistic.YEAR in statistics:
        return date(day.year, 1, 1), date(day.year, 12, 31)
    first = day.replace(day=1)
    return first, (first + timedelta(days=31)).replace(day=1) - timedelta(days=1)
