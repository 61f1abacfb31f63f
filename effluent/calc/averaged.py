"""An average of readings held against one limit: the daily values, the window, the outcome."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from fractions import Fraction as Rational

from effluent.calc.average import Average, calendar_months, monitoring_days, years
from effluent.calc.daily import Several, daily_value, refuse_mean
from effluent.calc.figure import Figure
from effluent.calc.observation import Observation, Substitution
from effluent.calc.reading import Reading
from effluent.calc.rule import action_cut, cut, in_force, limit_unit, written_cut
from effluent.calc.span import Span, proven
from effluent.domain import Bound, Limit, NonDetectRule, Outcome, Qualifier, Statistic

__all__ = ["Averaged", "averages", "is_average", "is_usable", "observed", "rule_of"]

_WINDOWS: Mapping[Statistic, Callable[..., tuple[Average, ...]]] = {
    Statistic.FOUR_DAY: monitoring_days,
    Statistic.MONTH: calendar_months,
    Statistic.YEAR: years,
}
# Where the limit names no rule, the figure under this one is not looked at: the bounds alone decide.
_RULES = {
    NonDetectRule.BOUNDS: Substitution.FULL,
    NonDetectRule.ZERO: Substitution.ZERO,
    NonDetectRule.HALF: Substitution.HALF,
    NonDetectRule.FULL: Substitution.FULL,
}


@dataclass(frozen=True, kw_only=True)
class Averaged:
    """One window of readings averaged and held against one limit; figures in the limit's canonical unit.

    ``days`` are the daily values of the window, ``used`` their readings, ``left_out`` those of the same
    analyte that say nothing about the average. ``by_rule``: the bounds lie astride the limit, and the rule
    for non-detects decided. ``action_open``: whether the action level is reached depends on non-detects.
    """

    limit: Limit
    window: Average
    days: Mapping[date, Figure]
    used: tuple[Reading, ...]
    left_out: tuple[Reading, ...]
    outcome: Outcome
    by_rule: bool
    action_open: bool

    @property
    def span(self) -> Span:
        """Every average that the readings leave possible."""
        return _span(self.window.figure, self.used)

    @property
    def ruled(self) -> Rational | None:
        """The average under the limit's rule for non-detects; `None` where it names none or it is open."""
        return _ruled(self.limit, self.window.figure)

    @property
    def deciding(self) -> Rational | None:
        """The number the margin is taken of: within a limit the worse bound, over it the milder one."""
        if self.outcome == Outcome.UNDETERMINED:
            return None
        if self.by_rule:
            return self.ruled
        is_maximum, is_over = self.limit.bound == Bound.MAXIMUM, self.outcome == Outcome.OVER
        return self.span.low if is_maximum == is_over else self.span.high

    @property
    def margin(self) -> Rational | None:
        """The share of the limit still free; `None` when undetermined or the limit is zero."""
        edge, number = written_cut(self.limit).value, self.deciding
        if number is None or not edge:
            return None
        free = edge - number if self.limit.bound == Bound.MAXIMUM else number - edge
        return free / abs(edge)


def is_average(limit: Limit) -> bool:
    """Say whether a limit is held against averages over monitoring days, months or years."""
    return limit.statistic in _WINDOWS


def is_usable(reading: Reading, limit: Limit) -> bool:
    """Say whether a reading can be averaged for a limit: of its own fraction and kind of unit."""
    return reading.fraction == limit.fraction and reading.canonical_unit == limit_unit(limit.value)


def rule_of(limit: Limit) -> Substitution:
    """Return which number stands for a non-detect under the rule of a limit."""
    return _RULES[limit.nondetects]


def observed(reading: Reading) -> Observation:
    """Return a reading as an observation in its canonical unit."""
    return Observation(value=reading.exact, qualifier=reading.qualifier)


def averages(readings: Iterable[Reading], limit: Limit) -> tuple[Averaged, ...]:
    """Return every average of readings that a limit asks for.

    Parameters
    ----------
    readings : iterable of Reading
        Of one discharge point; those of other analytes, and of days on which the limit is not in force,
        do not count.
    limit : Limit
        Of an average.

    Returns
    -------
    tuple of Averaged
        In order of time; none where no window is full.

    Raises
    ------
    ValueRefused
        If pH or temperature is to be averaged.
    KeyError
        If the limit is not one of an average.

    Notes
    -----
    The daily value is the mean of all readings of a day, the average that of the daily values: rules in
    `effluent.calc.daily` and `effluent.calc.average`. Bounds first, then the limit's rule: our own order.
    """
    refuse_mean(limit_unit(limit.value))
    asked = sorted(_asked(readings, limit), key=lambda reading: (reading.day, reading.row))
    used = [reading for reading in asked if is_usable(reading, limit)]
    others = [reading for reading in asked if not is_usable(reading, limit)]
    days = {day: _daily(group, limit) for day, group in _by_day(used).items()}
    found = _WINDOWS[limit.statistic](days, rule=rule_of(limit))
    return tuple(
        _averaged(limit, window, days, (_within(used, window), _within(others, window))) for window in found
    )


def _asked(readings: Iterable[Reading], limit: Limit) -> Iterable[Reading]:
    return (each for each in readings if each.analyte == limit.analyte and in_force(limit, each.day))


def _by_day(readings: Iterable[Reading]) -> dict[date, list[Reading]]:
    days: dict[date, list[Reading]] = {}
    for reading in readings:
        days.setdefault(reading.day, []).append(reading)
    return days


def _daily(readings: Sequence[Reading], limit: Limit) -> Figure:
    observations = [observed(reading) for reading in readings]
    return daily_value(observations, Several.MEAN, rule=rule_of(limit), unit=limit_unit(limit.value))


def _within(readings: Sequence[Reading], window: Average) -> tuple[Reading, ...]:
    """Return the readings of a window's days; they are in order of time."""
    first = bisect_left(readings, window.first, key=lambda reading: reading.day)
    return tuple(readings[first : bisect_right(readings, window.last, key=lambda reading: reading.day)])


def _averaged(
    limit: Limit,
    window: Average,
    days: Mapping[date, Figure],
    parted: tuple[tuple[Reading, ...], tuple[Reading, ...]],
) -> Averaged:
    used, left_out = parted
    outcome, by_rule, action_open = _outcome(limit, _span(window.figure, used), _ruled(limit, window.figure))
    return Averaged(
        limit=limit,
        window=window,
        days={reading.day: days[reading.day] for reading in used},
        used=used,
        left_out=left_out,
        outcome=outcome,
        by_rule=by_rule,
        action_open=action_open,
    )


def _span(figure: Figure, used: Iterable[Reading]) -> Span:
    known = tuple(used)
    return Span(
        low=figure.low,
        high=figure.high,
        low_open=any(reading.qualifier == Qualifier.ABOVE for reading in known),
        # Behind <0 nothing is hidden: the truth is 0, and the end belongs to the span.
        high_open=any(reading.qualifier == Qualifier.BELOW and reading.exact > 0 for reading in known),
    )


def _ruled(limit: Limit, figure: Figure) -> Rational | None:
    return None if limit.nondetects == NonDetectRule.BOUNDS else figure.value


def _outcome(limit: Limit, span: Span, ruled: Rational | None) -> tuple[Outcome, bool, bool]:
    """Return the outcome, whether the rule decided it, and whether the action level stays open."""
    stand_in = span if ruled is None else Span(low=ruled, high=ruled)
    outcome = proven(span, cut(limit), limit.bound)
    by_rule = outcome == Outcome.UNDETERMINED and ruled is not None
    if by_rule:
        outcome = proven(stand_in, cut(limit), limit.bound)
    level = action_cut(limit)
    if outcome != Outcome.WITHIN or level is None:
        return outcome, by_rule, False
    action_open = proven(span, level, limit.bound) == Outcome.UNDETERMINED
    near = proven(stand_in if action_open else span, level, limit.bound) == Outcome.OVER
    return Outcome.NEAR if near else Outcome.WITHIN, by_rule, action_open
