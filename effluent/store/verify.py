"""Whether a ledger still is what its digests say, and if not, where it first departs."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator, Mapping
from itertools import permutations
from typing import Any, NamedTuple

from sqlalchemy import Connection, Table, inspect, select, text

from effluent.store.base import Base, EntryRow
from effluent.store.digest import GENESIS, Brought, RowDigest, entry_digest, read_contents
from effluent.store.noun import table_of
from effluent.store.reading import Entry

__all__ = ["Finding", "verify"]

_CHUNK = 20_000
_FEW = 6  # rows of which every order is tried, to tell a changed row from reordered ones
_ENTRY = table_of(EntryRow)

Row = tuple[Any, ...]


class Finding(NamedTuple):
    """What does not hold, and in which entry."""

    entry: int
    kind: str
    detail: str

    def __str__(self) -> str:
        return f"entry {self.entry}: {self.kind}: {self.detail}"


def verify(connection: Connection) -> tuple[Finding, ...]:
    """Check every entry and every row; return what does not hold, the earliest entry first."""
    entries = [Entry(*row) for row in connection.execute(select(_ENTRY).order_by(_ENTRY.c.sequence))]
    findings = [*_check_entries(entries), *_check_guards(connection)]
    expected = _expected(entries)
    for table in _digested_tables():
        findings.extend(_check_table(connection, table, expected.get(table.name, [])))
    return tuple(sorted(findings))


def _digested_tables() -> Iterator[Table]:
    return (table for name, table in Base.metadata.tables.items() if name != _ENTRY.name)


def _check_entries(entries: list[Entry]) -> Iterator[Finding]:
    by_digest = {entry.digest: entry.sequence for entry in entries}
    previous, expected = GENESIS, 1
    if not entries:
        yield Finding(1, "missing entry", "the ledger holds no entry at all")
    for entry in entries:
        if entry.sequence != expected:
            yield Finding(expected, "missing entry", f"after it comes entry {entry.sequence}")
        elif entry.previous_digest != previous:
            yield _out_of_line(entry, by_digest)
        if entry_digest(entry[:-1]) != entry.digest:
            yield Finding(entry.sequence, "changed entry", "its header does not give its digest")
        previous, expected = entry.digest, entry.sequence + 1


def _out_of_line(entry: Entry, by_digest: Mapping[str, int]) -> Finding:
    after = by_digest.get(entry.previous_digest)
    if after is None:
        return Finding(entry.sequence, "changed entry", "it follows a digest that no entry has")
    return Finding(entry.sequence, "reordered", f"by its digest it follows entry {after}")


def _check_guards(connection: Connection) -> Iterator[Finding]:
    """Look for the triggers that refuse changes; a ledger without them is open to them."""
    names = Base.metadata.tables
    if connection.dialect.name == "sqlite":
        query = "SELECT name FROM sqlite_master WHERE type = 'trigger'"
        wanted = {f"tr_{name}_{change}" for name in names for change in ("update", "delete")}
    else:
        query = "SELECT tgname FROM pg_trigger WHERE tgenabled <> 'D'"
        wanted = {f"tr_{name}_change" for name in names}
    found = {str(name) for name in connection.execute(text(query)).scalars()}
    present = set(inspect(connection).get_table_names())
    for name in sorted(set(names) - present):
        yield Finding(1, "missing table", name)
    if missing := sorted(wanted - found):
        yield Finding(1, "unguarded", f"triggers that refuse changes are gone: {', '.join(missing)}")


def _expected(entries: list[Entry]) -> dict[str, list[tuple[int, Brought]]]:
    expected: dict[str, list[tuple[int, Brought]]] = {}
    for entry in entries:
        for brought in read_contents(entry.contents):
            expected.setdefault(brought.table, []).append((entry.sequence, brought))
    return expected


class _Rows:
    """The rows of a table in the order of their numbers, a chunk at a time."""

    def __init__(self, connection: Connection, table: Table) -> None:
        columns = ", ".join(f'"{column.name}"' for column in table.columns)
        query = f'SELECT {columns} FROM "{table.name}" ORDER BY "row"'  # noqa: S608
        self._cursor = connection.execution_options(stream_results=True).exec_driver_sql(query).cursor
        self._held: list[Row] = []

    def until(self, end: int) -> Iterator[list[Row]]:
        """Yield the rows below a number."""
        while self._fill() and self._held[0][0] < end:
            cut = bisect_left(self._held, end, key=_number)
            yield self._held[:cut]
            self._held = self._held[cut:]

    def rest(self) -> Iterator[Row]:
        """Yield whatever is left."""
        while self._fill():
            yield from self._held
            self._held = []

    def _fill(self) -> bool:
        if not self._held and self._cursor is not None:
            self._held = list(self._cursor.fetchmany(_CHUNK))
        return bool(self._held)


def _check_table(
    connection: Connection, table: Table, expected: list[tuple[int, Brought]]
) -> Iterator[Finding]:
    rows, next_row = _Rows(connection, table), 1
    for sequence, brought in expected:
        if brought.first_row != next_row:
            yield Finding(sequence, "changed entry", f"{table.name} rows would start at {brought.first_row}")
        yield from _check_span(rows, sequence, brought)
        next_row = brought.first_row + brought.rows
    last = expected[-1][0] if expected else 1
    for row in rows.rest():
        yield Finding(_claimed(row, last), "added row", f"{table.name} row {row[0]}")


def _check_span(rows: _Rows, sequence: int, brought: Brought) -> Iterator[Finding]:
    digest, few, expected = RowDigest(), list[Row](), brought.first_row
    end = brought.first_row + brought.rows
    for chunk in rows.until(end):
        early = bisect_left(chunk, expected, key=_number)
        for row in chunk[:early]:
            yield Finding(_claimed(row, sequence), "added row", f"{brought.table} row {row[0]}")
        mine = chunk[early:]
        digest.update(mine)
        few = [*few, *mine][: _FEW + 1]
        yield from _gaps(mine, brought.table, sequence, expected)
        expected = mine[-1][0] + 1 if mine else expected
    if expected < end:
        yield Finding(sequence, "missing row", f"{brought.table} {_span(expected, end - 1)}")
    if digest.count == brought.rows and digest.hexdigest() != brought.digest:
        yield Finding(sequence, *_departure(few, brought))


def _gaps(rows: list[Row], table: str, sequence: int, expected: int) -> Iterator[Finding]:
    if not rows or rows[-1][0] - expected + 1 == len(rows):
        return
    for row in rows:
        if row[0] != expected:
            yield Finding(sequence, "missing row", f"{table} {_span(expected, row[0] - 1)}")
        expected = row[0] + 1


def _span(first: int, last: int) -> str:
    return f"row {first}" if first == last else f"rows {first} to {last}"


def _number(row: Row) -> int:
    return int(row[0])


def _departure(rows: list[Row], brought: Brought) -> tuple[str, str]:
    """Tell reordered rows from changed ones, where there are few enough to try."""
    numbers = [row[:2] for row in rows]
    if 1 < len(rows) == brought.rows:
        for order in permutations(rows):
            digest = RowDigest()
            digest.update([(*number, *row[2:]) for number, row in zip(numbers, order, strict=True)])
            if digest.hexdigest() == brought.digest:
                return "reordered", f"rows of {brought.table} from row {brought.first_row}"
    where = _span(brought.first_row, brought.first_row + brought.rows - 1)
    return "changed row", f"{brought.table} {where}"


def _claimed(row: Row, fallback: int) -> int:
    return row[1] if isinstance(row[1], int) else fallback
