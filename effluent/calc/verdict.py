"""Verdicts: what limits say about the readings of a sample or a day, each with its working."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from datetime import date
from math import inf, isnan

from effluent.calc.line import cautions
from effluent.calc.outcome import is_single, outcomes
from effluent.calc.reading import Reading, frame
from effluent.calc.rule import Basis, in_force
from effluent.calc.working import Finding, reason, working
from effluent.domain import Limit, Outcome, Statistic, Verdict

__all__ = ["Reading", "is_single", "judge", "outcomes", "strictest", "without_reading"]

_WORST_FIRST = (Outcome.OVER, Outcome.UNDETERMINED, Outcome.NEAR, Outcome.WITHIN)
_OPEN = "the action level lies below what the reading can show: near or not is not known"


def judge(readings: Sequence[Reading], limits: Sequence[Limit]) -> tuple[Verdict, ...]:
    """Return the verdicts of readings on limits, each with its reason and working.

    An instantaneous limit gives a verdict for each reading, a daily one for each day. A reading of another
    fraction or kind that proves nothing is left aside where its sample has a reading of the limit's own.

    Parameters
    ----------
    readings : sequence of Reading
        Of one discharge point; superseded results left out.
    limits : sequence of Limit
        Those of that point.

    Returns
    -------
    tuple of Verdict
        By day, then by sample, then in the order of the limits.

    Raises
    ------
    NotComputed
        If a limit is not held against single readings.
    ValueRefused
        If a value is not a number.

    Notes
    -----
    Rules: the section "Verdicts" of the documented calculations.
    """
    groups: dict[tuple[int, object], list[Finding]] = {}
    for number, finding in _telling(_findings(readings, limits)):
        daily = finding.limit.statistic == Statistic.DAILY
        key = finding.reading.day if daily else id(finding)
        groups.setdefault((number, key), []).append(finding)
    verdicts = [_verdict(group) for group in groups.values()]
    return tuple(sorted(verdicts, key=lambda verdict: (verdict.day, verdict.samples)))


def strictest(verdicts: Iterable[Verdict]) -> Mapping[str, Verdict]:
    """Return for each sample the verdict that decides: over, then undetermined, near, within.

    Parameters
    ----------
    verdicts : iterable of Verdict
        Of any samples and limits.

    Returns
    -------
    mapping of str to Verdict
        Sample to verdict; of equal outcomes the one with the smaller margin.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    The order is our own: what cannot be shown counts as worse than what is near.
    """
    decided: dict[str, Verdict] = {}
    for verdict in verdicts:
        for sample in verdict.samples:
            held = decided.get(sample)
            if held is None or _severity(verdict) < _severity(held):
                decided[sample] = verdict
    return decided


def without_reading(readings: Sequence[Reading], limits: Sequence[Limit]) -> tuple[Limit, ...]:
    """Return the limits for whose analyte there is no reading of a day on which they are in force.

    Parameters
    ----------
    readings : sequence of Reading
        Of one discharge point.
    limits : sequence of Limit
        Those of that point.

    Returns
    -------
    tuple of Limit
        In the order given.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    A limit without a reading is not met: it is not shown.
    """
    days: dict[str, set[date]] = {}
    for reading in readings:
        days.setdefault(reading.analyte, set()).add(reading.day)
    return tuple(
        limit for limit in limits if not any(in_force(limit, day) for day in days.get(limit.analyte, ()))
    )


def _findings(readings: Sequence[Reading], limits: Sequence[Limit]) -> list[tuple[int, Finding]]:
    table = outcomes(frame(readings), limits)
    columns = (table[name].tolist() for name in table.columns)
    return [
        (
            number,
            Finding(
                reading=readings[row],
                limit=limits[number],
                outcome=Outcome(outcome),
                basis=Basis(known),
                margin=None if isnan(margin) else margin,
                action_open=action_open,
            ),
        )
        for row, number, outcome, known, action_open, margin in zip(*columns, strict=True)
    ]


def _telling(findings: list[tuple[int, Finding]]) -> list[tuple[int, Finding]]:
    """Leave aside what proves nothing where the same sample was read in the limit's own fraction and kind."""
    own = {(number, f.reading.sample) for number, f in findings if _is_own(f)}
    return [
        (number, f)
        for number, f in findings
        if _is_own(f) or f.outcome != Outcome.UNDETERMINED or (number, f.reading.sample) not in own
    ]


def _is_own(finding: Finding) -> bool:
    return finding.basis != Basis.OTHER_KIND and finding.reading.fraction == finding.limit.fraction


def _severity(judged: Verdict | Finding) -> tuple[int, float]:
    return _WORST_FIRST.index(judged.outcome), inf if judged.margin is None else judged.margin


def _verdict(group: list[Finding]) -> Verdict:
    deciding = min(group, key=_severity)
    daily = deciding.limit.statistic == Statistic.DAILY
    notes = _notes(group)
    return Verdict(
        limit=deciding.limit,
        samples=tuple(sorted({finding.reading.sample for finding in group})),
        day=deciding.reading.day,
        outcome=deciding.outcome,
        reason=_reason(deciding, len(group)),
        results=tuple(finding.reading.row for finding in group),
        margin=deciding.margin,
        working=working(deciding, group if daily else (), notes=notes),
        notes=notes,
    )


def _reason(deciding: Finding, count: int) -> str:
    tail = f" (result {deciding.reading.row} decides, of {count} readings of the day)" if count > 1 else ""
    return reason(deciding) + tail


def _notes(group: list[Finding]) -> tuple[str, ...]:
    told = cautions(group[0].limit, [finding.reading for finding in group])
    return (*told, _OPEN) if any(finding.action_open for finding in group) else told
