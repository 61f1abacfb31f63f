"""The working of a verdict on an average: every reading, daily value, sum and division."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from fractions import Fraction as Rational
from typing import NamedTuple

from effluent.calc.averaged import Averaged, observed, rule_of
from effluent.calc.figure import Figure, figure_of
from effluent.calc.line import conversion_line, forbidden, holds, limit_lines, reading_line, short
from effluent.calc.rule import limit_unit, place, rounded
from effluent.calc.units import convert
from effluent.domain import Bound, Limit, NonDetectRule, Outcome, Rounding, Statistic

__all__ = ["reason", "working"]

_COUNTED = {
    NonDetectRule.ZERO: "zero",
    NonDetectRule.HALF: "half the number behind <",
    NonDetectRule.FULL: "the number behind <",
}
_LEFT = {
    Outcome.WITHIN: "no average left breaks it",
    Outcome.NEAR: "no average left breaks it",
    Outcome.OVER: "every average left breaks it",
    Outcome.UNDETERMINED: "some averages left break it, some do not",
}


class _Way(NamedTuple):
    """One way of counting what is not known exactly; `pick` takes its number from a figure."""

    label: str
    pick: Callable[[Figure], Rational | None]


def reason(averaged: Averaged) -> str:
    """Return in one sentence why the outcome of an average is what it is.

    Parameters
    ----------
    averaged : Averaged
        Held against its limit.

    Returns
    -------
    str
        Amounts in the unit of the limit as written.

    Raises
    ------
    UnitUnknown
        If a unit cannot be read.

    Notes
    -----
    Rules: the section "Averages in verdicts" of the documented calculations.
    """
    limit = averaged.limit
    subject = f"the average of {_when(averaged)}, {_amount(averaged)},"
    against = f"{forbidden(limit)[0]} the limit {limit.value}"
    if averaged.outcome == Outcome.UNDETERMINED:
        return f"{subject} may or may not be {against}: {_why_open(averaged)}"
    sentence = f"{subject} {'is' if averaged.outcome == Outcome.OVER else 'is not'} {against}"
    if averaged.outcome == Outcome.NEAR:
        sentence += f", but it reaches the action level {limit.action_level}"
    return sentence + ("; another rule could answer otherwise" if averaged.by_rule else "")


def working(averaged: Averaged, *, notes: Sequence[str] = ()) -> tuple[str, ...]:
    """Return the arithmetic of a verdict on an average, line by line.

    Parameters
    ----------
    averaged : Averaged
        Held against its limit.
    notes : sequence of str, optional
        What a reader must know besides.

    Returns
    -------
    tuple of str
        In the unit of the limit as written; exact decimals, one that does not end rounded and marked ``~``.

    Raises
    ------
    UnitUnknown
        If a unit cannot be read.

    Notes
    -----
    Rules: the section "Averages in verdicts" of the documented calculations.
    """
    ways = _ways(averaged)
    return (
        _heading(averaged),
        *_readings(averaged),
        *_counting(averaged),
        *(line for way in ways for line in _sums(averaged, way)),
        *limit_lines(averaged.limit, "average"),
        *_rounding(averaged.limit),
        *_comparison(averaged),
        *_action(averaged),
        f"outcome: {averaged.outcome}: {reason(averaged)}",
        _margin(averaged),
        *(f"note: {note}" for note in notes),
    )


def _when(averaged: Averaged) -> str:
    first, last = averaged.window.first, averaged.window.last
    if averaged.limit.statistic == Statistic.MONTH:
        return f"{first:%Y-%m}"
    if averaged.limit.statistic == Statistic.YEAR:
        return f"{first:%Y}"
    return f"the {averaged.window.days} monitoring days from {first} to {last}"


def _written(value: Rational, limit: Limit) -> Rational:
    """Return a figure of the canonical unit in the limit's own."""
    return convert(value, limit_unit(limit.value), limit.value.unit)


def _number(value: Rational, limit: Limit) -> str:
    exact = _written(value, limit)
    text = short(exact)
    if limit.rounding == Rounding.SIGNIFICANT_FIGURES and rounded(exact, limit.value) != exact:
        text += f" (rounded {short(rounded(exact, limit.value))})"
    return text


def _amount(averaged: Averaged) -> str:
    limit, unit = averaged.limit, averaged.limit.value.unit
    if averaged.by_rule and averaged.ruled is not None:
        counted = f"{_number(averaged.ruled, limit)} {unit} with non-detects counted as"
        return f"{counted} {_COUNTED[limit.nondetects]} ({_range(averaged)} {unit} whatever they are)"
    whatever = "" if averaged.span.high is None or averaged.span.is_exact else " whatever the non-detects are"
    return f"{_range(averaged)} {unit}{whatever}"


def _range(averaged: Averaged) -> str:
    span, limit = averaged.span, averaged.limit
    if span.high is None:
        return f"more than {_number(span.low, limit)}"
    if span.is_exact:
        return _number(span.low, limit)
    return f"from {_number(span.low, limit)} to below {_number(span.high, limit)}"


def _why_open(averaged: Averaged) -> str:
    if averaged.span.high is None:
        return "a reading lies above its measuring range, and nothing bounds the average"
    return "it depends on what the non-detects hide, and the limit names no rule for them"


def _heading(averaged: Averaged) -> str:
    window = averaged.window
    return (
        f"{averaged.limit.statistic}: {window.first} to {window.last}; daily values: {window.days}; "
        f"readings: {len(averaged.used)}, of them not detected: {window.figure.nondetects}"
    )


def _readings(averaged: Averaged) -> Iterable[str]:
    for reading in averaged.used:
        yield reading_line(reading)
        if reading.unit != averaged.limit.value.unit:
            yield conversion_line(reading, averaged.limit)
    yield from (f"not in the average: {reading_line(reading)}" for reading in averaged.left_out)


def _ways(averaged: Averaged) -> list[_Way]:
    span = averaged.span
    if span.is_exact:
        return [_Way("", lambda figure: figure.low)]
    ways = [_Way(" at the least", lambda figure: figure.low)]
    if span.high is not None:
        ways.append(_Way(" at the most", lambda figure: figure.high))
    if averaged.ruled is not None:
        ways.append(_Way(f" under the rule {averaged.limit.nondetects}", lambda figure: figure.value))
    return ways


def _counting(averaged: Averaged) -> list[str]:
    if averaged.span.is_exact:
        return []
    lines = ["at the least: a non-detect counts as 0, a reading > as the number behind it"]
    if averaged.span.high is None:
        return [*lines, "at the most: not known, a reading lies above its measuring range"]
    lines.append("at the most: a non-detect counts as the number behind <")
    if averaged.ruled is None:
        return [*lines, f"rule for non-detects: {averaged.limit.nondetects}"]
    counted = _COUNTED[averaged.limit.nondetects]
    return [*lines, f"under the rule {averaged.limit.nondetects}: a non-detect counts as {counted}"]


def _sums(averaged: Averaged, way: _Way) -> Iterable[str]:
    rule, limit = rule_of(averaged.limit), averaged.limit
    for day, daily in averaged.days.items():
        figures = [figure_of(observed(one), rule) for one in averaged.used if one.day == day]
        yield f"daily value of {day}{way.label}: {_mean(figures, daily, way, limit)}"
    figure = averaged.window.figure
    yield f"average{way.label}: {_mean([*averaged.days.values()], figure, way, limit)}"


def _mean(parts: Sequence[Figure], whole: Figure, way: _Way, limit: Limit) -> str:
    written = [short(_written(way.pick(part) or Rational(0), limit)) for part in (*parts, whole)]
    *terms, answer = written
    sum_of = f"({' + '.join(terms)}) / {len(terms)} = " if len(terms) > 1 else ""
    return f"{sum_of}{answer} {limit.value.unit}"


def _rounding(limit: Limit) -> list[str]:
    if limit.rounding == Rounding.AS_REPORTED:
        return []
    step = short(place(limit.value))
    return [f"rounding: half to even, to a multiple of {step} {limit.value.unit}, of the average alone"]


def _comparison(averaged: Averaged) -> Iterable[str]:
    limit, span = averaged.limit, averaged.span
    if span.is_exact:
        yield _compared("comparison", span.low, limit)
        return
    left = Outcome.UNDETERMINED if averaged.by_rule else averaged.outcome
    edge = f"{forbidden(limit)[1]} {short(limit.value.magnitude)} {limit.value.unit}"
    yield f"known: {_range(averaged)} {limit.value.unit}; the limit is broken by {edge}: {_LEFT[left]}"
    if averaged.by_rule and averaged.ruled is not None:
        yield _compared(f"the rule {limit.nondetects} decides", averaged.ruled, limit)


def _compared(label: str, value: Rational, limit: Limit) -> str:
    number, sign, edge = _written(value, limit), forbidden(limit)[1], limit.value.magnitude
    if limit.rounding == Rounding.SIGNIFICANT_FIGURES:
        number = rounded(number, limit.value)
    answer = "true" if holds(number, sign, edge) else "false"
    return f"{label}: {short(number)} {sign} {short(edge)} {limit.value.unit} is {answer}"


def _action(averaged: Averaged) -> list[str]:
    if averaged.limit.action_level is None or averaged.outcome not in (Outcome.WITHIN, Outcome.NEAR):
        return []
    answer = "reached" if averaged.outcome == Outcome.NEAR else "not reached"
    if averaged.action_open:
        ruled = "" if averaged.ruled is None else f", under the rule {averaged.limit.nondetects} {answer}"
        answer = f"depends on what the non-detects hide{ruled}"
    return [f"action level {averaged.limit.action_level}: {answer}"]


def _margin(averaged: Averaged) -> str:
    limit, share, number = averaged.limit, averaged.margin, averaged.deciding
    if share is None or number is None:
        return "margin: none"
    edge, taken = short(limit.value.magnitude), short(_written(number, limit))
    first, second = (edge, taken) if limit.bound == Bound.MAXIMUM else (taken, edge)
    bounded = not (averaged.by_rule or averaged.span.is_exact)
    more = ("at most " if averaged.outcome == Outcome.OVER else "at least ") if bounded else ""
    scale = short(abs(limit.value.magnitude))
    return f"margin: {more}({first} - {second}) / {scale} = {float(share):.4g}"
