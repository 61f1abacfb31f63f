"""The rows that an entry brought to one table, held against what the entry says of them."""

from __future__ import annotations

from bisect import bisect_left, bisect_right
from collections.abc import Callable, Iterable, Iterator, Sequence
from itertools import permutations
from typing import Any, NamedTuple

from sqlalchemy import Connection

from effluent.store.digest import Brought, RowDigest

__all__ = ["Finding", "Rows", "Span", "check_spans"]

_CHUNK = 20_000
_FEW = 6  # rows of which every order is tried, to tell a changed row from reordered ones

Row = tuple[Any, ...]


class Finding(NamedTuple):
    """What does not hold, and in which entry; entry 0 stands for the ledger as a whole."""

    entry: int
    kind: str
    detail: str

    def __str__(self) -> str:
        return f"{f'entry {self.entry}' if self.entry else 'ledger'}: {self.kind}: {self.detail}"


class Span(NamedTuple):
    """What one entry says it brought to a table."""

    sequence: int
    brought: Brought

    @property
    def end(self) -> int:
        """The row number after its last."""
        return self.brought.first_row + self.brought.rows


class Rows:
    """The rows of a table in the order of their numbers, a chunk at a time."""

    def __init__(self, connection: Connection, table: str) -> None:
        query = f'SELECT * FROM "{table}" ORDER BY "row"'  # noqa: S608
        self.table = table
        self._fetch = _fetching(connection, query)
        self._held: Sequence[Row] = []
        self._at = 0

    def before(self, end: int | None = None) -> Iterator[Sequence[Row]]:
        """Yield the rows below a number, or all that are left."""
        while self._fill() and (end is None or self._held[self._at][0] < end):
            start, cut = self._at, len(self._held)
            if end is not None:
                cut = bisect_left(self._held, end, start, key=_number)
            self._at = cut
            yield self._held[start:cut]

    def _fill(self) -> bool:
        if self._at == len(self._held):
            self._held, self._at = self._fetch(_CHUNK), 0
        return self._at < len(self._held)


def _fetching(connection: Connection, query: str) -> Callable[[int], Sequence[Row]]:
    """Return what fetches the next rows; SQLite's own cursor does it at half the cost."""
    if connection.dialect.name == "sqlite":
        cursor = connection.connection.cursor()
        cursor.execute(query)
        return cursor.fetchmany
    result = connection.exec_driver_sql(query, execution_options={"stream_results": True})
    return lambda size: [tuple(row) for row in result.fetchmany(size)]


class _Strays:
    """Rows that no entry accounts for, gathered by the entry they name."""

    def __init__(self, table: str, known: Sequence[int]) -> None:
        self._table = table
        self._known = set(known)
        self._found: dict[int, list[int]] = {}

    def take(self, chunks: Iterable[Sequence[Row]]) -> None:
        for chunk in chunks:
            for number, entry, *_ in chunk:
                group = self._found.setdefault(entry, [number, number, 0])
                group[1:] = [number, group[2] + 1]

    def findings(self) -> Iterator[Finding]:
        for entry, (first, last, count) in self._found.items():
            rows = _numbered(self._table, first, last, count)
            if entry in self._known:
                yield Finding(entry, "added row", rows)
            else:
                yield Finding(entry, "missing entry", f"{rows} {'name' if count > 1 else 'names'} it")


def check_spans(rows: Rows, spans: Iterable[Span], known: Sequence[int]) -> Iterator[Finding]:
    """Check a table's rows against what the entries say; `known` are the entries there, in order."""
    strays, next_row, previous = _Strays(rows.table, known), 1, 0
    for span in spans:
        first = span.brought.first_row
        if first < next_row or (first > next_row and _are_all_there(known, previous, span.sequence)):
            yield Finding(span.sequence, "changed entry", f"{rows.table} rows should start at {next_row}")
        strays.take(rows.before(first))
        yield from _check_span(rows, span)
        next_row, previous = max(next_row, span.end), span.sequence
    strays.take(rows.before())
    yield from strays.findings()


def _are_all_there(known: Sequence[int], after: int, before: int) -> bool:
    return bisect_left(known, before) - bisect_right(known, after) == before - after - 1


def _check_span(rows: Rows, span: Span) -> Iterator[Finding]:
    brought = span.brought
    digest, few, numbers = RowDigest(), list[Row](), _Numbers(brought.first_row)
    sound = True
    for chunk in rows.before(span.end):
        numbers.take(chunk)
        few.extend(chunk[: _FEW + 1 - len(few)])
        sound = sound and _digested(digest, chunk, brought.columns)
    gaps = numbers.gaps(span.end)
    for first, last in gaps:
        yield Finding(span.sequence, "missing row", _numbered(rows.table, first, last))
    if not gaps and not (sound and digest.hexdigest() == brought.digest):
        kind = "reordered" if sound and _is_reordered(few, brought) else "changed row"
        last = span.end - 1
        yield Finding(span.sequence, kind, _numbered(rows.table, brought.first_row, last))


class _Numbers:
    """Which row numbers of a span are not there."""

    def __init__(self, first: int) -> None:
        self._next = first
        self._gaps: list[tuple[int, int]] = []

    def take(self, chunk: Sequence[Row]) -> None:
        if chunk[-1][0] - self._next + 1 == len(chunk):
            self._next += len(chunk)
            return
        for number, *_ in chunk:
            self._skip_to(number)
            self._next = number + 1

    def gaps(self, end: int) -> list[tuple[int, int]]:
        self._skip_to(end)
        return self._gaps

    def _skip_to(self, number: int) -> None:
        if number > self._next:
            self._gaps.append((self._next, number - 1))


def _digested(digest: RowDigest, chunk: Sequence[Row], columns: int) -> bool:
    """Take rows in; tell whether they can be what was written (bytes and infinities never are)."""
    later = len(chunk[0]) > columns
    try:
        digest.update([row[:columns] for row in chunk] if later else chunk)
    except (TypeError, ValueError):
        return False
    return True


def _is_reordered(rows: list[Row], brought: Brought) -> bool:
    """Tell reordered rows from changed ones, where there are few enough to try."""
    if not 1 < len(rows) <= _FEW:
        return False
    numbers = [row[:2] for row in rows]
    for order in permutations(rows):
        digest = RowDigest()
        digest.update(
            [(*number, *row[2 : brought.columns]) for number, row in zip(numbers, order, strict=True)]
        )
        if digest.hexdigest() == brought.digest:
            return True
    return False


def _numbered(table: str, first: int, last: int, count: int = 0) -> str:
    if first == last:
        return f"{table} row {first}"
    some = f", {count} of them," if count and count != last - first + 1 else ""
    return f"{table} rows {first} to {last}{some}"


def _number(row: Row) -> int:
    return int(row[0])
