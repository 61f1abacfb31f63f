"""Published limits, to be adopted by a user who answers for it; none of them is in force by being here."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from dataclasses import dataclass

from effluent.domain.limit import Bound, BrokenBy, Statistic
from effluent.domain.quantity import Quantity
from effluent.domain.sample import Fraction
from effluent.errors import RecordMissing
from effluent.reference.table import Source, near_names, read

__all__ = ["ReferenceLimit", "row", "rows", "tables"]


@dataclass(frozen=True)
class ReferenceLimit:
    """One value of a published table.

    ``applies`` says to whom it is addressed; ``waste_code`` is the code that a waste breaking it
    carries, or empty.
    """

    key: str
    table: str
    analyte: str
    fraction: Fraction
    statistic: Statistic
    bound: Bound
    value: Quantity
    broken_by: BrokenBy
    applies: str
    waste_code: str
    source: Source


def rows(table: str | None = None) -> tuple[ReferenceLimit, ...]:
    """Return every published limit, or those of one table.

    Parameters
    ----------
    table : str, optional
        A name of `tables`, as in ``40CFR433.17``.

    Raises
    ------
    RecordMissing
        If there is no such table.
    """
    if table is None:
        return tuple(_by_key().values())
    if table not in tables():
        raise RecordMissing("reference table", table, f"the tables are {', '.join(tables())}")
    return tuple(limit for limit in _by_key().values() if limit.table == table)


def row(key: str) -> ReferenceLimit:
    """Return one published limit.

    Parameters
    ----------
    key : str
        As in ``40CFR433.17/cadmium/daily``.

    Raises
    ------
    RecordMissing
        If there is no such row; the text lists near ones.
    """
    try:
        return _by_key()[key]
    except KeyError:
        near = near_names(key, _by_key()) or ", ".join(tables())
        raise RecordMissing("reference limit", key, f"near ones are {near}") from None


@functools.cache
def tables() -> tuple[str, ...]:
    """Return the names of the published tables, in the order of the data file."""
    return tuple(dict.fromkeys(limit.table for limit in _by_key().values()))


@functools.cache
def _by_key() -> dict[str, ReferenceLimit]:
    return {cells["key"]: _limit(cells) for cells in read("limits")}


def _limit(cells: Mapping[str, str]) -> ReferenceLimit:
    return ReferenceLimit(
        key=cells["key"],
        table=cells["table"],
        analyte=cells["analyte"],
        fraction=Fraction(cells["fraction"]),
        statistic=Statistic(cells["statistic"]),
        bound=Bound(cells["bound"]),
        value=Quantity(cells["value"], cells["unit"]),
        broken_by=BrokenBy(cells["broken_by"]),
        applies=cells["applies"],
        waste_code=cells["waste_code"],
        source=Source.of(cells),
    )
