"""Verdicts on averages over monitoring days, months and years."""

from __future__ import annotations

from collections.abc import Container, Iterable, Sequence

from effluent.calc.average_working import reason, working
from effluent.calc.averaged import Averaged, averages, is_average, is_usable
from effluent.calc.daily import refuse_mean
from effluent.calc.line import cautions
from effluent.calc.reading import Reading
from effluent.calc.rule import in_force, limit_unit
from effluent.domain import Limit, Statistic, Verdict
from effluent.errors import ValueRefused

__all__ = ["is_average", "judge_averages", "unaveraged"]

_PERIOD = {Statistic.MONTH: "month", Statistic.YEAR: "year", Statistic.FOUR_DAY: "four monitoring days"}
_OPEN = "whether the average reaches the action level depends on what the non-detects hide"
_NEEDED = 4


def judge_averages(readings: Iterable[Reading], limits: Iterable[Limit]) -> tuple[Verdict, ...]:
    """Return the verdicts of averages of readings on limits, each with its reason and working.

    Parameters
    ----------
    readings : iterable of Reading
        All of one discharge point; superseded results left out.
    limits : iterable of Limit
        Those of averages at that point; one for pH or temperature gives no verdict.

    Returns
    -------
    tuple of Verdict
        One for each window; its day is the last of the window.

    Raises
    ------
    KeyError
        If a limit is not one of an average.

    Notes
    -----
    Rules: the section "Averages in verdicts" of the documented calculations.
    """
    known = tuple(readings)
    judged = [limit for limit in limits if not _refusal(limit)]
    return tuple(_verdict(averaged) for limit in judged for averaged in averages(known, limit))


def unaveraged(readings: Sequence[Reading], limit: Limit, *, samples: Container[str]) -> str:
    """Return why a limit of an average gives no verdict on samples; empty where it gives one.

    Parameters
    ----------
    readings : sequence of Reading
        All of one discharge point.
    limit : Limit
        Of an average.
    samples : container of str
        Those asked about.

    Returns
    -------
    str
        One sentence.

    Raises
    ------
    UnitUnknown
        If the unit of the limit cannot be read.

    Notes
    -----
    No number is invented for a window that is not full; no source needed.
    """
    if refused := _refusal(limit):
        return refused
    usable = [
        each
        for each in readings
        if each.analyte == limit.analyte and in_force(limit, each.day) and is_usable(each, limit)
    ]
    if not any(each.sample in samples for each in usable):
        return f"no reading counts: {_only(limit)}"
    days = {each.day for each in usable}
    if limit.statistic == Statistic.FOUR_DAY and len(days) < _NEEDED:
        return f"an average over {_NEEDED} monitoring days needs {_NEEDED} of them; so far: {len(days)}"
    return ""


def _refusal(limit: Limit) -> str:
    try:
        refuse_mean(limit_unit(limit.value))
    except ValueRefused as refused:
        return str(refused.args[-1])
    return ""


def _only(limit: Limit) -> str:
    return f"only readings of {limit.fraction} in a unit of the limit's kind do"


def _verdict(averaged: Averaged) -> Verdict:
    margin, notes = averaged.margin, _notes(averaged)
    return Verdict(
        limit=averaged.limit,
        samples=tuple(sorted({reading.sample for reading in averaged.used})),
        day=averaged.window.last,
        outcome=averaged.outcome,
        reason=reason(averaged),
        results=tuple(reading.row for reading in averaged.used),
        margin=None if margin is None else float(margin),
        working=working(averaged, notes=notes),
        notes=notes,
    )


def _notes(averaged: Averaged) -> tuple[str, ...]:
    period = _PERIOD[averaged.limit.statistic]
    said = {
        f"one sample in the {period} is the average": len({one.sample for one in averaged.used}) == 1,
        f"the limit was in force for part of the {period} only": not _is_whole(averaged),
        f"readings not in the average: {len(averaged.left_out)}; {_only(averaged.limit)}": bool(
            averaged.left_out
        ),
        _OPEN: averaged.action_open,
    }
    return (
        *cautions(averaged.limit, averaged.used),
        *(note for note, applies in said.items() if applies),
    )


def _is_whole(averaged: Averaged) -> bool:
    return all(in_force(averaged.limit, day) for day in (averaged.window.first, averaged.window.last))
