"""Averages over 4 days as averages over 30 days: the table of 40 CFR 413.04."""

from __future__ import annotations

import functools
from dataclasses import dataclass
from fractions import Fraction

from effluent.domain.quantity import exact
from effluent.errors import RecordMissing
from effluent.reference.table import Source, read

__all__ = ["AverageRow", "average_rows", "thirty_day"]


@dataclass(frozen=True)
class AverageRow:
    """One row: daily maximum, 4-day average and the 30-day average that goes with both.

    In mg/L in the upper part of the table and mg/m2 in the lower one; the table joins them by figure alone.
    """

    daily: str
    four_day: str
    thirty_day: str
    source: Source


@functools.cache
def average_rows() -> tuple[AverageRow, ...]:
    """Return every row of the shipped table, in its order."""
    return tuple(
        AverageRow(row["daily"], row["four_day"], row["thirty_day"], Source.of(row))
        for row in read("averages_413")
    )


def thirty_day(daily: Fraction, four_day: Fraction) -> AverageRow:
    """Return the row for a daily maximum and a 4-day average; both, since one of them is not enough.

    Parameters
    ----------
    daily, four_day : Fraction
        Figures of 40 CFR part 413, in mg/L or mg/m2.

    Raises
    ------
    RecordMissing
        If the table has no such pair; nothing is interpolated.
    """
    for row in average_rows():
        if (exact(row.daily), exact(row.four_day)) == (daily, four_day):
            return row
    raise RecordMissing(
        "pair of averages in 40 CFR 413.04",
        f"{float(daily):g} / {float(four_day):g}",
        "the table joins published figures of part 413 only; ask the authority for a 30-day average",
    )
