"""The outcome of every reading against every limit, exact at vectorised speed."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from effluent.calc.reading import exact_value
from effluent.calc.rule import Basis, Cut, action_cut, basis, cut, limit_unit, on_the_cut, proof, written_cut
from effluent.domain import Bound, Fraction, Limit, Outcome, Qualifier, Statistic
from effluent.errors import NotComputed, ValueRefused

__all__ = ["is_single", "outcomes"]

_SINGLE = frozenset({Statistic.INSTANTANEOUS, Statistic.DAILY})
_CODE = {outcome: code for code, outcome in enumerate(Outcome)}

Ints = NDArray[np.int8]
Rows = NDArray[np.intp]
Flags = NDArray[np.bool_]
Floats = NDArray[np.float64]


def is_single(limit: Limit) -> bool:
    """Say whether a limit is held against single readings, each alone or those of a day."""
    return limit.statistic in _SINGLE


def outcomes(readings: pd.DataFrame, limits: Sequence[Limit]) -> pd.DataFrame:
    """Return the outcome of every reading against every limit of its analyte in force on its day.

    The fast path under `effluent.calc.verdict.judge`. Doubles that differ are in the right order, because
    each is the one nearest to its exact value; where two are equal, the number texts decide with rational
    arithmetic.

    Parameters
    ----------
    readings : pandas.DataFrame, n rows
        ``analyte`` (spelled as in the limits), ``fraction``, ``qualifier``, ``canonical_unit``, ``number``,
        ``unit``, ``density`` (texts, best as categories; ``density`` empty where none was used),
        ``value`` (float64, in the canonical unit, for ``<`` and ``>`` the bound) and ``day`` (datetime64,
        local day of the site). Other columns are ignored. `effluent.calc.reading.frame` makes one.
    limits : sequence of Limit
        Those of the discharge point; daily limits are held against each reading.

    Returns
    -------
    pandas.DataFrame
        One row for each pair that applies: ``reading`` (position of the row, int64), ``limit`` (position in
        `limits`, int16), ``outcome`` (category), ``basis`` (int8, a `effluent.calc.rule.Basis`),
        ``action_open`` (bool: within, but near or not is not known), ``margin`` (float64, share of the limit
        still free, negative when over; NaN when undetermined or the limit is zero). Ordered by limit,
        then by reading.

    Raises
    ------
    NotComputed
        If a limit is not held against single readings.
    ValueRefused
        If a value is not a number, or a text is missing.

    Notes
    -----
    Comparison of correctly rounded doubles: rounding is monotone (IEEE 754-2019, clause 4.3).
    """
    for limit in limits:
        _refuse_uncomputed(limit)
    table = _Table(readings)
    parts = [_held(table, limit) for limit in limits]
    sizes = [part.rows.size for part in parts]
    codes: Ints = _joined([part.outcome for part in parts], np.int8)
    return pd.DataFrame(
        {
            "reading": _joined([part.rows for part in parts], np.int64),
            "limit": np.repeat(np.arange(len(parts), dtype=np.int16), sizes),
            "outcome": pd.Categorical.from_codes(codes, categories=pd.Index([str(o) for o in Outcome])),
            "basis": _joined([part.basis for part in parts], np.int8),
            "action_open": _joined([part.action_open for part in parts], np.bool_),
            "margin": _joined([part.margin for part in parts], np.float64),
        },
        copy=False,
    )


class _Held(NamedTuple):
    """One limit against its readings."""

    rows: Rows
    outcome: Ints
    basis: Ints
    action_open: Flags
    margin: Floats


class _Group(NamedTuple):
    """The readings of one analyte; ``what`` is qualifier and fraction as one small number."""

    rows: Rows
    value: Floats
    what: Ints
    unit: NDArray[np.integer[Any]]

    def only(self, keep: Flags) -> _Group:
        return _Group(self.rows[keep], self.value[keep], self.what[keep], self.unit[keep])


class _Table:
    """The columns of a frame as arrays, grouped by analyte once."""

    def __init__(self, readings: pd.DataFrame) -> None:
        self._analyte = readings["analyte"]
        self._texts = [readings[name].array for name in ("number", "unit", "density")]
        self._value = readings["value"].to_numpy(dtype=np.float64)
        if np.isnan(self._value).any():
            raise ValueRefused("reading", "nan", "every reading needs a number; check the column 'value'")
        self._day = readings["day"].to_numpy()
        self._ends = np.array([self._day.min(), self._day.max()]) if self._day.size else self._day
        self._what = _codes(readings, "qualifier", tuple(Qualifier)) * np.int8(len(Fraction))
        self._what += _codes(readings, "fraction", tuple(Fraction))
        unit = readings["canonical_unit"].astype("category").cat
        self._unit = unit.codes.to_numpy()
        self._units = {str(name): code for code, name in enumerate(unit.categories)}
        self._groups: dict[str, _Group] = {}

    @cached_property
    def _order(self) -> dict[str, Rows]:
        """Positions of each analyte, in the order of the frame."""
        analyte = self._analyte.astype("category").cat
        codes = analyte.codes.to_numpy()
        order = np.argsort(codes, kind="stable")
        ends = np.searchsorted(codes[order], np.arange(len(analyte.categories) + 1))
        return {str(name): order[ends[n] : ends[n + 1]] for n, name in enumerate(analyte.categories)}

    def group(self, analyte: str) -> _Group:
        if analyte not in self._groups:
            rows = self._order.get(analyte, np.empty(0, dtype=np.intp))
            self._groups[analyte] = _Group(
                rows, self._value.take(rows), self._what.take(rows), self._unit.take(rows)
            )
        return self._groups[analyte]

    def in_force(self, limit: Limit) -> _Group:
        """Return the readings of a limit's analyte on the days on which it is in force."""
        group = self.group(limit.analyte)
        if _covers(limit, self._ends).all():
            return group
        return group.only(_covers(limit, self._day.take(group.rows)))

    def unit_code(self, unit: str) -> int:
        return self._units.get(unit, -1)

    def signs(self, rows: Rows, against: Cut, unit: str) -> Ints:
        """Return -1, 0 or 1: how the exact values of some rows stand to a cut."""
        texts = (column.take(rows).tolist() for column in self._texts)
        keys = list(zip(*texts, strict=True))
        sign = {key: _sign(key, against, unit) for key in set(keys)}
        return np.array([sign[key] for key in keys], dtype=np.int8)


def _covers(limit: Limit, days: NDArray[np.datetime64]) -> Flags:
    covered: Flags = days >= np.datetime64(limit.effective_from)
    if limit.effective_to is not None:
        covered &= days <= np.datetime64(limit.effective_to)
    return covered


def _sign(texts: tuple[str, str, str], against: Cut, unit: str) -> int:
    value = exact_value(*texts, canonical_unit=unit)
    return (value > against.value) - (value < against.value)


def _codes(readings: pd.DataFrame, name: str, order: tuple[Qualifier, ...] | tuple[Fraction, ...]) -> Ints:
    """Return the place of each text in an enumeration."""
    column = readings[name].astype("category").cat
    places = {str(member): place for place, member in enumerate(order)}
    unknown = [str(text) for text in column.categories if str(text) not in places]
    codes = column.codes.to_numpy()
    if unknown or (codes < 0).any():
        found = unknown[0] if unknown else ""
        raise ValueRefused(name, found, f"every reading needs one of {', '.join(places)}")
    lookup = np.array([places[str(text)] for text in column.categories], dtype=np.int8)
    return lookup[codes]


def _refuse_uncomputed(limit: Limit) -> None:
    if not is_single(limit):
        raise NotComputed(
            f"limit {limit.code} ({limit.statistic}, {limit.analyte})",
            "work it out by hand, and check the other limits without it",
        )


def _joined(parts: list[NDArray[Any]], kind: type[np.generic]) -> NDArray[Any]:
    return np.concatenate([np.empty(0, dtype=kind), *parts])


def _held(table: _Table, limit: Limit) -> _Held:
    group = table.in_force(limit)
    bases = _bases(table, group, limit)
    broken = _broken(table, group, limit, bases, cut(limit))
    outcome = _proofs(limit.bound)[bases * np.int8(2) + broken]
    action_open = _near(table, group, limit, bases, outcome)
    return _Held(group.rows, outcome, bases, action_open, _margins(group, limit, outcome))


def _bases(table: _Table, group: _Group, limit: Limit) -> Ints:
    lookup = np.array([basis(f, q, limit.fraction) for q in Qualifier for f in Fraction], dtype=np.int8)
    bases = lookup[group.what]
    bases[group.unit != table.unit_code(limit_unit(limit.value))] = Basis.OTHER_KIND
    return bases


def _broken(table: _Table, group: _Group, limit: Limit, bases: Ints, against: Cut) -> Flags:
    """Return which numbers pass a cut; equal doubles are decided by the exact values."""
    maximum = limit.bound == Bound.MAXIMUM
    broken: Flags = group.value > against.double if maximum else group.value < against.double
    ties = np.flatnonzero(group.value == against.double)
    ties = ties[bases[ties] < Basis.OTHER_FRACTION]
    if ties.size:
        signs = table.signs(group.rows[ties], against, limit_unit(limit.value))
        lookup = np.array([on_the_cut(b, limit.bound, inclusive=against.inclusive) for b in Basis])
        broken[ties] = (signs > 0 if maximum else signs < 0) | ((signs == 0) & lookup[bases[ties]])
    return broken


def _proofs(bound: Bound) -> Ints:
    return np.array(
        [_CODE[proof(b, bound, broken=hit)] for b in Basis for hit in (False, True)], dtype=np.int8
    )


def _near(table: _Table, group: _Group, limit: Limit, bases: Ints, outcome: Ints) -> Flags:
    """Mark in place what is near; return where that is not known."""
    level = action_cut(limit)
    if level is None:
        return np.zeros(outcome.size, dtype=np.bool_)
    reached = _broken(table, group, limit, bases, level) & (outcome == _CODE[Outcome.WITHIN])
    valued = bases == Basis.VALUE
    outcome[reached & valued] = _CODE[Outcome.NEAR]
    unsure: Flags = reached & ~valued
    return unsure


def _margins(group: _Group, limit: Limit, outcome: Ints) -> Floats:
    edge = written_cut(limit).double
    if not edge:
        return np.full(outcome.size, np.nan)
    free = edge - group.value if limit.bound == Bound.MAXIMUM else group.value - edge
    free /= abs(edge)
    free[outcome == _CODE[Outcome.UNDETERMINED]] = np.nan
    return free
