"""The working of a verdict: enough for a person with a calculator to reach the same answer."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction as Rational

from effluent.calc.line import conversion_line, forbidden, holds, limit_lines, reading_line, short
from effluent.calc.reading import Reading
from effluent.calc.rule import Basis, action_cut, limit_unit, place, rounded, written_cut
from effluent.calc.units import KINDS, convert, kind_of
from effluent.domain import Bound, Fraction, Limit, Outcome, Rounding

__all__ = ["Finding", "reason", "working"]

_KNOWN = {
    Basis.VALUE: ("", "="),
    Basis.AT_MOST: ("at most ", "<="),
    Basis.BELOW: ("less than ", "<"),
    Basis.AT_LEAST: ("at least ", ">="),
    Basis.ABOVE: ("more than ", ">"),
}
_LEFT = {
    Outcome.WITHIN: "no value left breaks it",
    Outcome.OVER: "every value left breaks it",
    Outcome.UNDETERMINED: "some values left break it, some do not",
}


@dataclass(frozen=True, kw_only=True)
class Finding:
    """One reading held against one limit.

    ``margin`` is the share of the limit still free. ``action_open`` says that the reading is within the
    limit without showing on which side of the site's action level the truth lies.
    """

    reading: Reading
    limit: Limit
    outcome: Outcome
    basis: Basis
    margin: float | None = None
    action_open: bool = False


def reason(finding: Finding) -> str:
    """Return in one sentence why the outcome is what it is.

    Parameters
    ----------
    finding : Finding
        One reading held against one limit.

    Returns
    -------
    str
        Amounts in the units as written.

    Raises
    ------
    UnitUnknown
        If a unit cannot be read.

    Notes
    -----
    Rules: the section "Verdicts" of the documented calculations.
    """
    reading, limit = finding.reading, finding.limit
    if finding.basis == Basis.OTHER_KIND:
        return _kinds_differ(reading, limit)
    if finding.basis == Basis.OTHER_FRACTION:
        return f"a reading {reading} of {reading.fraction} proves nothing about a limit for {limit.fraction}"
    if finding.outcome == Outcome.UNDETERMINED:
        return _not_shown(finding)
    verb = "is" if finding.outcome == Outcome.OVER else "is not"
    sentence = f"{_subject(finding)} {verb} {forbidden(limit)[0]} the {_named(limit)}"
    if finding.outcome == Outcome.NEAR:
        sentence += f", but it reaches the action level {limit.action_level}"
    return sentence


def working(
    finding: Finding, beside: Sequence[Finding] = (), *, notes: Sequence[str] = ()
) -> tuple[str, ...]:
    """Return the arithmetic of a verdict, line by line.

    Parameters
    ----------
    finding : Finding
        The reading that decides.
    beside : sequence of Finding, optional
        All readings of the day, for a daily limit.
    notes : sequence of str, optional
        What a reader must know besides.

    Returns
    -------
    tuple of str
        Exact decimals; one that does not end is rounded to ten digits and marked ``~``.

    Raises
    ------
    UnitUnknown
        If a unit cannot be read.

    Notes
    -----
    Rules: the section "Verdicts" of the documented calculations.
    """
    lines = [*_day(finding, beside), reading_line(finding.reading), _conversion(finding)]
    lines += limit_lines(finding.limit)
    if finding.basis in _KNOWN:
        lines += [*_rounding(finding), *_comparison(finding), *_action(finding)]
    lines += [f"outcome: {finding.outcome}: {reason(finding)}", _margin(finding)]
    return (*lines, *(f"note: {note}" for note in notes))


def _named(limit: Limit) -> str:
    return f"limit {limit.value}"


def _kinds_differ(reading: Reading, limit: Limit) -> str:
    kinds = kind_of(reading.unit or KINDS["pH"]), kind_of(limit.value.unit or KINDS["pH"])
    sentence = f"the reading {reading} is a {kinds[0]}, the {_named(limit)} a {kinds[1]}: nothing is proved"
    if set(kinds) == {"mass ratio", "concentration"}:
        sentence += "; the density of the liquid would join them"
    return sentence


def _not_shown(finding: Finding) -> str:
    reading, limit = finding.reading, finding.limit
    below = finding.basis == Basis.BELOW and reading.fraction == limit.fraction
    if below and limit.bound == Bound.MAXIMUM:
        return f"{_subject(finding)} proves nothing: the limit is {limit.value}"
    what = f"the truth is {forbidden(limit)[0]} the {_named(limit)}"
    sentence = f"{_subject(finding)}: whether {what} is not shown"
    if {reading.fraction, limit.fraction} == {Fraction.TOTAL, Fraction.TOTAL_RECOVERABLE}:
        sentence += f"; if the limit's document takes both as one, enter it for {reading.fraction} too"
    return sentence


def _subject(finding: Finding) -> str:
    reading, limit = finding.reading, finding.limit
    subject = f"{_KNOWN[finding.basis][0]}{reading.number} {reading.unit}".rstrip()
    if reading.fraction != limit.fraction:
        subject += f" (the reading is of {reading.fraction}, the limit for {limit.fraction})"
    if finding.basis == Basis.VALUE and limit.rounding == Rounding.SIGNIFICANT_FIGURES:
        after = short(rounded(_in_limit_unit(finding), limit.value))
        subject += f", rounded to {f'{after} {limit.value.unit}'.rstrip()},"
    return subject


def _day(finding: Finding, beside: Sequence[Finding]) -> list[str]:
    if not beside:
        return []
    listed = "; ".join(f"result {f.reading.row}: {f.reading} {f.outcome}" for f in beside)
    return [f"readings of {finding.reading.day}: {listed}", f"deciding: result {finding.reading.row}"]


def _conversion(finding: Finding) -> str:
    if finding.basis != Basis.OTHER_KIND:
        return conversion_line(finding.reading, finding.limit)
    unit, wanted = finding.reading.unit or KINDS["pH"], finding.limit.value.unit or KINDS["pH"]
    return f"conversion: none from {unit} to {wanted}"


def _in_limit_unit(finding: Finding) -> Rational:
    reading, unit = finding.reading, finding.limit.value.unit or KINDS["pH"]
    return convert(reading.exact, reading.canonical_unit, unit)


def _rounding(finding: Finding) -> list[str]:
    limit = finding.limit
    if limit.rounding == Rounding.AS_REPORTED:
        return []
    line = f"rounding: half to even, to a multiple of {short(place(limit.value))} {limit.value.unit}".rstrip()
    if finding.basis == Basis.VALUE:
        value = _in_limit_unit(finding)
        line += f": {short(value)} -> {short(rounded(value, limit.value))}"
    return [line]


def _comparison(finding: Finding) -> list[str]:
    limit, value = finding.limit, _in_limit_unit(finding)
    symbol, edge = forbidden(limit)[1], short(limit.value.magnitude)
    if finding.basis != Basis.VALUE:
        known = f"known: truth {_KNOWN[finding.basis][1]} {short(value)} {limit.value.unit}".rstrip()
        return [f"{known}; the limit is broken by {symbol} {edge}: {_LEFT[finding.outcome]}"]
    if limit.rounding == Rounding.SIGNIFICANT_FIGURES:
        value = rounded(value, limit.value)
    broken = "true" if holds(value, symbol, limit.value.magnitude) else "false"
    return [f"comparison: {short(value)} {symbol} {edge} {limit.value.unit}".rstrip() + f" is {broken}"]


def _action(finding: Finding) -> list[str]:
    limit, level = finding.limit, action_cut(finding.limit)
    if level is None or finding.basis != Basis.VALUE:
        return []
    symbol = ">=" if limit.bound == Bound.MAXIMUM else "<="
    reached = "true" if holds(finding.reading.exact, symbol, level.value) else "false"
    shown = f"{short(finding.reading.exact)} {symbol} {short(level.value)} {limit_unit(limit.value)}"
    return [f"action level {limit.action_level}: {shown} is {reached}"]


def _margin(finding: Finding) -> str:
    if finding.margin is None:
        return "margin: none"
    limit, value = written_cut(finding.limit).value, finding.reading.exact
    first, second = (limit, value) if finding.limit.bound == Bound.MAXIMUM else (value, limit)
    more = (
        ""
        if finding.basis == Basis.VALUE
        else "at least "
        if finding.outcome == Outcome.WITHIN
        else "at most "
    )
    unit = limit_unit(finding.limit.value)
    share = f"({short(first)} - {short(second)}) / {short(abs(limit))} in {unit}"
    return f"margin: {more}{share} = {finding.margin:.4g}"
