"""How long a sample keeps: containers, preservation and maximum holding times of 40 CFR 136.3 Table II."""

from __future__ import annotations

import calendar
import functools
import re
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

from effluent.domain.sample import Fraction, Method, Sample
from effluent.errors import ValueRefused
from effluent.reference.table import Source, read

__all__ = ["HoldingTime", "clock_start", "deadline", "holding", "holding_times"]

_HOLD = re.compile(r"P(?:(?P<months>\d+)M|(?P<days>\d+)D|T(?P<hours>\d+)H|T(?P<minutes>\d+)M)")


@dataclass(frozen=True)
class HoldingTime:
    """How a sample for one analyte is kept, and for how long at most.

    ``hold`` and ``extract_within`` are ISO 8601 durations of one part: ``P6M`` calendar months,
    ``P28D``, ``PT48H``, ``PT15M``. ``hold`` runs to the start of analysis; where the rule sets a time
    to extraction and another after it, ``hold`` is their sum and ``extract_within`` the first.
    ``test_method`` is empty for the rule that holds unless a method has its own.
    """

    analyte: str
    test_method: str
    container: str
    preservation: str
    hold: str
    extract_within: str
    note: str
    source: Source

    def __str__(self) -> str:
        return _words(self.hold)


@functools.cache
def holding_times() -> tuple[HoldingTime, ...]:
    """Return every holding time of the shipped table, in its order."""
    return tuple(
        HoldingTime(
            analyte=row["analyte"],
            test_method=row["test_method"],
            container=row["container"],
            preservation=row["preservation"],
            hold=row["hold"],
            extract_within=row["extract_within"],
            note=row["note"],
            source=Source.of(row),
        )
        for row in read("holding")
    )


def holding(
    analyte_key: str, *, test_method: str = "", fraction: Fraction | None = None
) -> HoldingTime | None:
    """Return the holding time for an analyte, or ``None`` where Table II sets none that is shipped.

    Parameters
    ----------
    analyte_key : str
        Key of an analyte, as in ``cadmium``.
    test_method : str, optional
        The laboratory's method; a few (EPA 1631 for mercury, Winkler for oxygen) have their own time.
    fraction : Fraction, optional
        A TCLP extract is not a water sample: Table II says nothing of it.
    """
    if fraction is Fraction.TCLP:
        return None
    found = [time for time in holding_times() if time.analyte == analyte_key]
    for time in found:
        if time.test_method and time.test_method in test_method.casefold():
            return time
    return next((time for time in found if not time.test_method), None)


def clock_start(sample: Sample) -> datetime:
    """Return when the holding time of a sample begins: a grab's collection, a composite's end.

    Raises
    ------
    ValueRefused
        If a composite has no end.

    References
    ----------
    .. [1] 40 CFR 136.3 Table II, footnote 4; 2015 annual edition; read on 2026-12-01.
    """
    if sample.method is Method.GRAB:
        return sample.started_at
    if sample.ended_at is None:
        raise ValueRefused(
            "composite sample", sample.code, "its end is needed; the holding time begins there"
        )
    return sample.ended_at


def deadline(collected: datetime, hold: HoldingTime) -> datetime:
    """Return the last instant at which analysis may start.

    Months are calendar months in the offset given (31 August and six months is the last day of
    February); days, hours and minutes are elapsed time.

    Parameters
    ----------
    collected : datetime
        Start of the clock, with its offset from UTC.
    hold : HoldingTime
        As returned by `holding`.

    Raises
    ------
    ValueRefused
        If the time has no offset.

    References
    ----------
    .. [1] 40 CFR 136.3 Table II and footnote 4; 2015 annual edition; read on 2026-12-01. That months
       are calendar months is our reading; the rule does not say.
    """
    if collected.tzinfo is None:
        raise ValueRefused("collection time", collected.isoformat(), "give its offset from UTC, as in +01:00")
    parts = _parts(hold.hold)
    if "months" in parts:
        return _later_month(collected, parts["months"])
    return (collected.astimezone(UTC) + timedelta(**parts)).astimezone(collected.tzinfo)


def _later_month(collected: datetime, months: int) -> datetime:
    years, month = divmod(collected.month - 1 + months, 12)
    last = calendar.monthrange(collected.year + years, month + 1)[1]
    return collected.replace(year=collected.year + years, month=month + 1, day=min(collected.day, last))


def _parts(hold: str) -> dict[str, int]:
    """Read the one part of a duration."""
    match = _HOLD.fullmatch(hold)
    if match is None:
        raise ValueRefused("holding time", hold, "write P6M, P28D, PT48H or PT15M")
    return {unit: int(count) for unit, count in match.groupdict().items() if count is not None}


def _words(hold: str) -> str:
    ((unit, count),) = _parts(hold).items()
    return f"{count} {unit if count != 1 else unit.removesuffix('s')}"
