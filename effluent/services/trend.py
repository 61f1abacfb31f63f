"""The trend of an analyte in the water of one engine, one container or at one discharge point."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date
from fractions import Fraction as Rational

from effluent.calc.reading import exact_value
from effluent.calc.trend import Direction, Point, Slope, Trend, mann_kendall, sen_slope
from effluent.domain import Fraction, Qualifier, Result, Sample
from effluent.errors import ValueRefused
from effluent.reference.analyte import Analyte, find
from effluent.services.provenance import samples_of_engine
from effluent.services.water import Water, waters
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading

__all__ = ["Series", "Told", "Trended", "trend"]

_NEVER_AVERAGED = {"pH", "temperature"}
_SECOND = "a pH or a temperature is never averaged; the first of the day counts"
_ABOVE = (
    "nobody knows how far it lies above the measuring range; have the sample diluted and analysed anew, or "
    "leave its day out with since and until"
)
_ALONE = "; a sample of the stream of a wash speaks for its engine alone"
# Common practice, no source: compressor parts of some engines are plated with cadmium or nickel-cadmium.
_QUESTION = (
    "A question to the maintenance supervisor, not a finding: cadmium in the water of engine {engine} rises. "
    "Does the engine have cadmium-plated parts, and could their plating be wearing, or does the cadmium come "
    "from elsewhere: cleaner, rinse water, container, sampling, laboratory? Engine {engine}'s maintenance "
    "manual and licensed staff decide whether anything is to be inspected and how. Cadmium is toxic: do not "
    "scrape or grind a part to find out."
)


@dataclass(frozen=True, kw_only=True)
class Series:
    """Which readings are asked about: those of an engine, a point or a container, by ``noun`` and ``code``.

    Without a fraction it is the one that the analyte's name says, else total; days are local days.
    """

    analyte: str
    noun: str
    code: str
    fraction: Fraction | None = None
    since: date | None = None
    until: date | None = None


@dataclass(frozen=True, kw_only=True)
class Told:
    """A result of the analyte; ``origin`` is what its sample was drawn from, as in ``wash W-0001``.

    ``left_out`` is why it is not in the series; empty if it is.
    """

    day: date
    origin: str
    result: Result
    late: bool
    left_out: str = ""


@dataclass(frozen=True, kw_only=True)
class Trended:
    """What a series shows; values and slope in `unit`, the slope per day.

    ``question`` is what a rise of cadmium asks of the maintenance supervisor; empty if it asks nothing.
    """

    series: Series
    analyte: Analyte
    fraction: Fraction
    unit: str
    used: tuple[Told, ...]
    left_out: tuple[Told, ...]
    test: Trend
    slope: Slope
    question: str

    @property
    def direction(self) -> Direction:
        """What the test shows, at 5 % two-sided."""
        return self.test.direction()


def trend(ledger: Ledger, series: Series, *, as_of: str | None = None) -> Trended:
    """Return the Mann-Kendall test and the Sen slope of a series.

    Several readings of a day count as their mean. An engine is spoken for by the samples of its washes, and
    of containers that held its water alone when they were drawn.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    series : Series
        Which readings.
    as_of : str, optional
        Answer with what was known then.

    Raises
    ------
    ValueRefused
        If there are too few or too many days with a reading, a reading above the measuring range, or the
        analyte is not in the table.
    RecordMissing
        If what is named is not in the ledger.
    """
    named = find(series.analyte)
    fraction = series.fraction or named.fraction or Fraction.TOTAL
    with ledger.reading(as_of) as reading:
        told = _told(reading, series, named.analyte)
    unit = _commonest_unit(told, fraction)
    told = _without_seconds([_fitting(each, fraction, unit) for each in told], named.analyte)
    used, left_out = (tuple(each for each in told if bool(each.left_out) == out) for out in (False, True))
    points = [_point(day, group) for day, group in _by_day(used).items()]
    test, slope = _tested(points, left_out, _ALONE if series.noun == "engine" else "")
    asks = series.noun == "engine" and named.analyte.key == "cadmium" and _is_rising(test)
    return Trended(
        series=series,
        analyte=named.analyte,
        fraction=fraction,
        unit=unit,
        used=used,
        left_out=left_out,
        test=test,
        slope=slope,
        question=_QUESTION.format(engine=series.code) if asks else "",
    )


def _is_rising(test: Trend) -> bool:
    return test.direction() == Direction.RISING


def _told(reading: Reading, series: Series, analyte: Analyte) -> list[Told]:
    """Return the results of the analyte in the order of time, those of mixed water with that reason."""
    samples, mixed = _samples(reading, series)
    first, last = series.since or date.min, series.until or date.max
    held = {
        sample.code: (water, sample)
        for water in waters(reading, samples, points=())
        for sample in water.samples
        if first <= water.day(sample) <= last
    }
    found = [result for result in reading.results(samples=held) if result.analyte == analyte.key]
    found.sort(key=lambda result: held[result.sample][1].started_at)
    return [_one(result, *held[result.sample], mixed.get(result.sample, "")) for result in found]


def _one(result: Result, water: Water, sample: Sample, left_out: str) -> Told:
    late = water.is_late(sample, result)
    return Told(day=water.day(sample), origin=water.label, result=result, late=late, left_out=left_out)


def _samples(reading: Reading, series: Series) -> tuple[tuple[Sample, ...], Mapping[str, str]]:
    """Return the samples asked about, and of those of mixed water with what it was mixed."""
    if series.noun != "engine":
        reading.value(series.noun, series.code)
        return reading.values("sample", **{series.noun: series.code}), {}
    own, mixed = samples_of_engine(reading, series.code)
    reasons = {
        sample.code: f"its water was mixed with that of {', '.join(others)}" for sample, others in mixed
    }
    return (*own, *(sample for sample, _ in mixed)), reasons


def _commonest_unit(told: Sequence[Told], fraction: Fraction) -> str:
    units = Counter(each.result.canonical_unit for each in told if each.result.fraction == fraction)
    return units.most_common(1)[0][0] if units else ""


def _fitting(told: Told, fraction: Fraction, unit: str) -> Told:
    """Return a result with the reason why it does not fit into a series, if there is one."""
    reason = told.left_out
    if not reason and told.result.fraction != fraction:
        reason = f"it is of another fraction: {told.result.fraction}"
    elif not reason and told.result.canonical_unit != unit:
        reason = f"it cannot be turned into {unit}"
    return replace(told, left_out=reason)


def _without_seconds(told: Sequence[Told], analyte: Analyte) -> list[Told]:
    """Leave aside what would have to be averaged with an earlier reading of its day, and may not."""
    if analyte.kind not in _NEVER_AVERAGED:
        return list(told)
    days: set[date] = set()
    kept = []
    for each in told:
        second = not each.left_out and each.day in days
        kept.append(replace(each, left_out=_SECOND) if second else each)
        days |= set() if each.left_out else {each.day}
    return kept


def _by_day(used: Sequence[Told]) -> dict[date, list[Result]]:
    days: dict[date, list[Result]] = {}
    for each in used:
        days.setdefault(each.day, []).append(each.result)
    return days


def _point(day: date, results: Sequence[Result]) -> Point:
    """Return the mean of a day's results between its bounds, every non-detect at zero and at its number."""
    low, high = Rational(0), Rational(0)
    for result in results:
        if result.qualifier == Qualifier.ABOVE:
            raise ValueRefused(f"result {result.row} of sample {result.sample}", result.text, _ABOVE)
        value = exact_value(result.number, result.unit, result.density, canonical_unit=result.canonical_unit)
        high += value / len(results)
        low += 0 if result.qualifier == Qualifier.BELOW else value / len(results)
    return Point(day=day, low=float(low), high=float(high))


def _tested(points: Sequence[Point], left_out: Sequence[Told], hint: str) -> tuple[Trend, Slope]:
    """Return test and slope; where they are refused, the refusal says what was left out."""
    try:
        return mann_kendall(points), sen_slope(points)
    except ValueRefused as error:
        what, value, remedy = error.args
        reasons = Counter(each.left_out for each in left_out)
        told = "".join(f"; left out, {count}: {reason}" for reason, count in reasons.items())
        raise ValueRefused(what, value, remedy + told + hint) from error
