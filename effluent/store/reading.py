"""What the ledger said as of an entry."""

from __future__ import annotations

import difflib
import functools
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NamedTuple

from sqlalchemy import (
    Connection,
    FromClause,
    Integer,
    Select,
    String,
    Table,
    and_,
    bindparam,
    func,
    literal_column,
    not_,
    or_,
    select,
)

from effluent.domain import Manifest, ManifestLine, Result
from effluent.errors import RecordMissing
from effluent.store.base import EntryRow, LedgerRow, RecordRow
from effluent.store.column import key_of, plain, revive
from effluent.store.noun import NOUNS, Noun, table_of
from effluent.store.schema import ManifestCarrierRow, ManifestLineRow, ResultRow, ResultVoidRow

__all__ = ["Entry", "Reading", "Version"]

_ENTRY = table_of(EntryRow)
_RECORD = table_of(RecordRow)
_RESULT = table_of(ResultRow)
_VOID = table_of(ResultVoidRow)
_CHUNK = 5_000  # well below the number of parameters either database takes


class Entry(NamedTuple):
    """The header of one entry."""

    sequence: int
    recorded_at: str
    recorded_by: str
    action: str
    reason: str
    contents: str
    previous_digest: str
    digest: str


class Version(NamedTuple):
    """One version of a record, and the entry that brought it."""

    number: int
    voided: bool
    entry: Entry
    value: Any


@functools.cache
def _later(table: Table) -> FromClause:
    """Return a table under the name by which later versions are looked for; making it anew is slow."""
    return table.alias("later")


def _standing(table: Table, as_of: Any) -> Select[Any]:
    """Return the query for the versions that stand as of an entry."""
    later = _later(table)
    newer = select(later.c.row).where(
        later.c.key == table.c.key, later.c.version > table.c.version, later.c.entry <= as_of
    )
    return select(table).where(table.c.entry <= as_of, not_(newer.exists()))


@functools.cache
def _one_standing(kind: Noun) -> Select[Any]:
    """Return the query for one record, its key and the entry left open; it is asked over and over."""
    table = kind.table
    standing = _standing(table, bindparam("as_of", type_=Integer))
    return standing.where(table.c.voided == 0, table.c.key == bindparam("key", type_=String))


class Reading:
    """A consistent view of the ledger up to one entry."""

    def __init__(self, connection: Connection, as_of: int) -> None:
        self._connection = connection
        self.as_of = as_of

    @property
    def head(self) -> Entry:
        """The entry this view ends with."""
        return self.entry(self.as_of)

    @property
    def ledger_number(self) -> str:
        """The number the ledger was given when it was created."""
        return str(self._connection.execute(select(table_of(LedgerRow).c.number)).scalar_one())

    def entry(self, sequence: int) -> Entry:
        """Return one entry."""
        row = self._connection.execute(select(_ENTRY).where(_ENTRY.c.sequence == sequence)).one_or_none()
        if row is None or sequence > self.as_of:
            raise RecordMissing("entry", sequence, f"entries run from 1 to {self.as_of}")
        return Entry(*row)

    def entries(self) -> tuple[Entry, ...]:
        """Return all entries up to this view's."""
        query = select(_ENTRY).where(_ENTRY.c.sequence <= self.as_of).order_by(_ENTRY.c.sequence)
        return tuple(Entry(*row) for row in self._connection.execute(query))

    def holds(self, noun: str, code: str) -> bool:
        """Tell whether a record of that code exists, voided or not."""
        query = select(_RECORD.c.row).where(
            _RECORD.c.key == key_of(noun, code), _RECORD.c.entry <= self.as_of
        )
        return self._connection.execute(query).first() is not None

    def count(self, noun: str) -> int:
        """Return how many records of a noun exist, voided ones too."""
        query = select(func.count()).where(_RECORD.c.noun == noun, _RECORD.c.entry <= self.as_of)
        return int(self._connection.execute(query).scalar_one())

    def value(self, noun: str, code: str) -> Any:
        """Return the record as it stands; a voided one is not there."""
        kind = NOUNS[noun]
        wanted = {"key": key_of(noun, code), "as_of": self.as_of}
        row = self._connection.execute(_one_standing(kind), wanted).mappings().one_or_none()
        if row is None:
            raise self._missing(noun, code)
        return self._revive(kind, row)

    def values(self, noun: str, **where: object) -> tuple[Any, ...]:
        """Return the records that stand, in the order they were first recorded.

        Keyword arguments name columns; a tuple or list matches any of its members.
        """
        kind = NOUNS[noun]
        query = self._standing(kind).where(kind.table.c.voided == 0)
        for name, wanted in where.items():
            query = query.where(self._matches(kind, name, wanted))
        order = select(_RECORD.c.row).where(_RECORD.c.key == kind.table.c.key).scalar_subquery()
        rows = self._connection.execute(query.order_by(order)).mappings().all()
        return tuple(self._revive(kind, row) for row in rows)

    def referring(self, noun: str, code: str) -> tuple[str, ...]:
        """Return the records that stand and refer to a record, as ``wash W-0001``."""
        found = [
            f"{kind.name} {value.code}"
            for kind in NOUNS.values()
            for column in kind.table.columns
            if column.info.get("noun") == noun
            for value in self.values(kind.name, **{column.name: code})
        ]
        for manifest in self.values("manifest") if noun in ("container", "company") else ():
            if code in (*manifest.carriers, *(line.container for line in manifest.lines)):
                found.append(f"manifest {manifest.code}")
        if noun == "sample" and (results := self.results(samples=[code])):
            found.extend(f"result {result.row}" for result in results)
        return tuple(dict.fromkeys(found))

    def in_record_order(self, noun: str, codes: Iterable[str]) -> tuple[str, ...]:
        """Return codes in the order they were first recorded."""
        keys = [key_of(noun, code) for code in codes]
        query = select(_RECORD.c.row, _RECORD.c.key)
        found = [
            tuple(row)
            for start in range(0, len(keys), _CHUNK)
            for row in self._connection.execute(query.where(_RECORD.c.key.in_(keys[start : start + _CHUNK])))
        ]
        return tuple(key.partition("/")[2] for _, key in sorted(found))

    def versions(self, noun: str, code: str) -> tuple[Version, ...]:
        """Return every version of a record, oldest first, voided ones too."""
        kind = NOUNS[noun]
        query = (
            select(kind.table)
            .where(kind.table.c.key == key_of(noun, code), kind.table.c.entry <= self.as_of)
            .order_by(kind.table.c.version)
        )
        rows = self._connection.execute(query).mappings().all()
        if not rows:
            raise self._missing(noun, code)
        return tuple(
            Version(r["version"], bool(r["voided"]), self.entry(r["entry"]), self._revive(kind, r))
            for r in rows
        )

    def results(
        self, *, samples: Iterable[str] | None = None, superseded: bool = False, row: int | None = None
    ) -> tuple[Result, ...]:
        """Return results that stand, by sample or by number; with `superseded`, replaced ones too."""
        columns = [c for c in _RESULT.c if c.name != "entry"]
        return tuple(
            Result(**revive(Result, dict(found._mapping)))
            for query in self._result_queries(columns, samples)
            for found in self._connection.execute(self._narrowed(query, superseded=superseded, row=row))
        )

    def result_columns(
        self, names: Sequence[str], *, samples: Iterable[str] | None = None
    ) -> dict[str, list[Any]]:
        """Return columns of the results that stand, for arithmetic on many at once."""
        columns = [_RESULT.c[name] for name in names]
        rows: list[Any] = []
        for query in self._result_queries(columns, samples):
            rows.extend(self._connection.execute(self._narrowed(query, superseded=False, row=None)))
        return (
            dict(zip(names, map(list, zip(*rows, strict=True)), strict=True))
            if rows
            else {n: [] for n in names}
        )

    def record_columns(
        self, noun: str, names: Sequence[str], *, codes: Sequence[str]
    ) -> list[tuple[Any, ...]]:
        """Return columns of the records that stand, as stored: codes and references as their keys."""
        table = NOUNS[noun].table
        columns = [table.c[name] for name in names]
        keys = [key_of(noun, code) for code in codes]
        query = self._standing(NOUNS[noun]).where(table.c.voided == 0).with_only_columns(*columns)
        return [
            tuple(row)
            for start in range(0, len(keys), _CHUNK)
            for row in self._connection.execute(query.where(table.c.key.in_(keys[start : start + _CHUNK])))
        ]

    def latest_samples(
        self, *, point: str | None = None, site: str | None = None, most: int
    ) -> tuple[str, ...]:
        """Return the samples last drawn at a point, or of caught water at a site, read before this entry."""
        sample = NOUNS["sample"].table
        if point is not None:
            drawn: Any = sample.c.point == key_of("point", point)
        else:
            drawn = or_(
                *(
                    sample.c[noun].in_(
                        select(NOUNS[noun].table.c.key).where(
                            NOUNS[noun].table.c.site == key_of("site", site or "")
                        )
                    )
                    for noun in ("container", "wash")
                )
            )
        read = select(_RESULT.c.row).where(_RESULT.c.sample == sample.c.key, _RESULT.c.entry < self.as_of)
        query = self._standing(NOUNS["sample"]).where(drawn, read.exists()).with_only_columns(sample.c.key)
        query = query.order_by(sample.c.started_at.desc()).limit(most)
        return tuple(key.partition("/")[2] for key in self._connection.execute(query).scalars())

    def near_codes(self, noun: str, code: str) -> list[str]:
        """Return codes that look like the one asked for."""
        query = select(_RECORD.c.key).where(_RECORD.c.noun == noun, _RECORD.c.entry <= self.as_of)
        codes = [key.partition("/")[2] for key in self._connection.execute(query.limit(_CHUNK)).scalars()]
        by_case = {known.casefold(): known for known in codes}
        return [by_case[match] for match in difflib.get_close_matches(code.casefold(), by_case, n=3)]

    def _missing(self, noun: str, code: str) -> RecordMissing:
        if self.holds(noun, code):
            return RecordMissing(noun, code, f"it was voided; see: effluent {noun} show {code} --json")
        near = self.near_codes(noun, code)
        return RecordMissing(
            noun, code, f"did you mean {' or '.join(near)}?" if near else "none looks like it"
        )

    def _standing(self, kind: Noun) -> Select[Any]:
        return _standing(kind.table, self.as_of)

    def _matches(self, kind: Noun, name: str, wanted: object) -> Any:
        column = kind.table.c[name]
        noun = kind.name if name == "key" else column.info.get("noun")

        def stored(one: object) -> object:
            return key_of(noun, str(one)) if noun and one is not None else plain(one)

        if isinstance(wanted, tuple | list | frozenset | set):
            parts = list(wanted)
            groups = [parts[i : i + _CHUNK] for i in range(0, len(parts), _CHUNK)] or [[]]
            return or_(*(column.in_([stored(one) for one in group]) for group in groups))
        return column == stored(wanted)

    def _revive(self, kind: Noun, row: Mapping[Any, Any]) -> Any:
        parts = self._manifest_parts(row) if kind.cls is Manifest else {}
        return kind.cls(code=row["key"].partition("/")[2], **revive(kind.cls, row), **parts)

    def _manifest_parts(self, row: Mapping[Any, Any]) -> dict[str, Any]:
        carriers = self._parts(table_of(ManifestCarrierRow), row)
        lines = self._parts(table_of(ManifestLineRow), row)
        return {
            "carriers": tuple(part["company"].partition("/")[2] for part in carriers),
            "lines": tuple(ManifestLine(**revive(ManifestLine, part)) for part in lines),
        }

    def _parts(self, table: Any, row: Mapping[Any, Any]) -> Sequence[Mapping[Any, Any]]:
        mine = and_(table.c.manifest == row["key"], table.c.version == row["version"])
        return self._connection.execute(select(table).where(mine).order_by(table.c.position)).mappings().all()

    def _result_queries(self, columns: Sequence[Any], samples: Iterable[str] | None) -> Iterable[Select[Any]]:
        query = select(*columns).where(_RESULT.c.entry <= self.as_of).order_by(_RESULT.c.row)
        if samples is None:
            return [query]
        keys = [key_of("sample", code) for code in samples]
        return [query.where(_RESULT.c.sample.in_(keys[i : i + _CHUNK])) for i in range(0, len(keys), _CHUNK)]

    def _narrowed(self, query: Select[Any], *, superseded: bool, row: int | None) -> Select[Any]:
        if row is not None:
            query = query.where(_RESULT.c.row == row)
        if superseded:
            return query
        newer, voided = _RESULT.alias("newer"), _VOID.alias("voided")
        replaced: Select[Any] = select(literal_column("1")).where(
            newer.c.supersedes == _RESULT.c.row, newer.c.supersedes.is_not(None), newer.c.entry <= self.as_of
        )
        gone: Select[Any] = select(literal_column("1")).where(
            voided.c.result == _RESULT.c.row, voided.c.entry <= self.as_of
        )
        return query.where(not_(replaced.exists()), not_(gone.exists()))
