"""One entry in the making: rows are inserted as they come, the entry closes over their digests."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from datetime import datetime
from itertools import repeat
from typing import Any

from sqlalchemy import Connection, Table, func, insert, select

from effluent.domain import Manifest, Result
from effluent.errors import AlreadyRecorded, RecordMissing, StateRefused, ValueRefused
from effluent.store.base import EntryRow, LedgerRow, RecordRow
from effluent.store.column import Plain, key_of, plain, plain_fields, utc_text
from effluent.store.digest import GENESIS, Brought, RowDigest, contents_text, entry_digest
from effluent.store.noun import NOUNS, Noun, noun_of, table_of
from effluent.store.reading import Entry, Reading
from effluent.store.schema import ManifestCarrierRow, ManifestLineRow, ResultRow, ResultVoidRow

__all__ = ["RESULT_COLUMNS", "Writing"]

FORMAT = 1
_LONGEST_CODE = 64


class Writing(Reading):
    """A view of the ledger that can also add to it; everything added becomes one entry."""

    def __init__(self, connection: Connection) -> None:
        self._previous = _last_entry(connection)
        super().__init__(connection, (self._previous.sequence if self._previous else 0) + 1)
        self._next_rows: dict[str, int] = {}
        self._first_rows: dict[str, int] = {}
        self._digests: dict[str, RowDigest] = {}
        self._explanations: list[str] = []

    def record(self, value: Any) -> str:
        """Add a new record and return its code; one is made up where none was given."""
        noun = noun_of(value)
        code = self._free_code(noun, value.code)
        self._insert(table_of(RecordRow), [(key_of(noun.name, code), noun.name)])
        self._insert_version(noun, replace(value, code=code), version=1, voided=False)
        return code

    def amend(self, value: Any) -> str:
        """Add a version of a record that stands and return its code."""
        noun = noun_of(value)
        self.value(noun.name, value.code)
        self._insert_version(noun, value, version=self._last_version(noun, value.code) + 1, voided=False)
        return str(value.code)

    def void(self, noun: str, code: str) -> None:
        """Add a version that says the record does not stand.

        Raises
        ------
        StateRefused
            If something that stands refers to it.
        """
        kind = NOUNS[noun]
        value = self.value(noun, code)
        if referring := self.referring(noun, code):
            named = ", ".join(referring[:3]) + (
                f" and {len(referring) - 3} more" if len(referring) > 3 else ""
            )
            raise StateRefused(f"{noun} {code}", f"referred to by {named}", "void or amend that first")
        self._insert_version(kind, value, version=self._last_version(kind, code) + 1, voided=True)

    def add_result(self, result: Result) -> int:
        """Add one result and return its number."""
        self._check_references(result)
        return self.add_results([tuple(plain(getattr(result, name)) for name in RESULT_COLUMNS)])

    def add_results(self, rows: Sequence[Sequence[Plain]]) -> int:
        """Add results given as plain values of `RESULT_COLUMNS`; return the number of the first.

        References hold codes, as in the domain; the caller has checked that they exist.
        """
        return self._insert(table_of(ResultRow), [self._with_keys(row) for row in rows])

    def add_result_columns(self, columns: Mapping[str, Sequence[Plain]]) -> int:
        """Add results given as one sequence for each of `RESULT_COLUMNS`; return the number of the first.

        References hold codes, as in the domain; the caller has checked that they exist.
        """
        table = table_of(ResultRow)
        first, count = self._next_row(table), len(columns["sample"])
        keyed = {
            **columns,
            "sample": [f"sample/{code}" for code in columns["sample"]],
            "file": [None if code is None else f"file/{code}" for code in columns["file"]],
        }
        numbers = (range(first, first + count), repeat(self.as_of, count))
        self._insert_whole(table, [*zip(*numbers, *(keyed[name] for name in RESULT_COLUMNS), strict=True)])
        return first

    def void_result(self, number: int) -> None:
        """Withdraw a result without another in its place."""
        if not self.results(row=number):
            raise RecordMissing("result", number, "see: effluent result list")
        self._insert(table_of(ResultVoidRow), [(number,)])

    def explain(self, text: str) -> None:
        """Add to the reason that the entry will keep."""
        self._explanations.append(text)

    def number_ledger(self, number: str) -> None:
        """Give a new ledger its number; once, in its first entry."""
        self._insert(table_of(LedgerRow), [(number, FORMAT)])

    def close(self, *, recorded_at: datetime, recorded_by: str, action: str, reason: str) -> Entry:
        """Write the entry itself over all that was added, and return it."""
        previous = self._previous
        stamp = max(utc_text(recorded_at), previous.recorded_at if previous else "")
        header: tuple[Plain, ...] = (
            self.as_of,
            stamp,
            recorded_by,
            action,
            "; ".join(filter(None, [reason, *self._explanations])),
            contents_text(self._brought()),
            previous.digest if previous else GENESIS,
        )
        entry = Entry._make((*header, entry_digest(header)))
        self._connection.execute(insert(table_of(EntryRow)).values(entry._asdict()))
        return entry

    def _brought(self) -> Iterable[Brought]:
        for table, digest in self._digests.items():
            yield Brought(table, self._first_rows[table], digest.count, digest.columns, digest.hexdigest())

    def _free_code(self, noun: Noun, code: str) -> str:
        if not code:
            return self._next_code(noun)
        if code != code.strip() or not code.isprintable() or len(code) > _LONGEST_CODE:
            remedy = f"use up to {_LONGEST_CODE} printable characters without spaces at the ends"
            raise ValueRefused(f"{noun.name} code", code, remedy)
        if self.holds(noun.name, code):
            remedy = f"choose another code, or change it with: effluent {noun.name} amend"
            raise AlreadyRecorded(f"{noun.name} {code}", remedy)
        return code

    def _next_code(self, noun: Noun) -> str:
        if not noun.prefix:
            raise ValueRefused(f"{noun.name} code", "", "name one")
        number = self.count(noun.name) + 1
        while self.holds(noun.name, f"{noun.prefix}-{number:04}"):
            number += 1
        return f"{noun.prefix}-{number:04}"

    def _last_version(self, noun: Noun, code: str) -> int:
        query = select(func.max(noun.table.c.version)).where(noun.table.c.key == key_of(noun.name, code))
        return int(self._connection.execute(query).scalar_one())

    def _insert_version(self, noun: Noun, value: Any, *, version: int, voided: bool) -> None:
        self._check_references(value)
        key = key_of(noun.name, value.code)
        self._insert(noun.table, [(key, version, int(voided), *_columns(value))])
        if isinstance(value, Manifest):
            self._insert_parts(value, key, version)

    def _insert_parts(self, manifest: Manifest, key: str, version: int) -> None:
        carriers = [(key, version, n, key_of("company", c)) for n, c in enumerate(manifest.carriers, 1)]
        lines = [(key, version, n, *_columns(line)) for n, line in enumerate(manifest.lines, 1)]
        for code in manifest.carriers:
            self.value("company", code)
        for line in manifest.lines:
            self._check_references(line)
        self._insert(table_of(ManifestCarrierRow), carriers)
        self._insert(table_of(ManifestLineRow), lines)

    def _check_references(self, value: object) -> None:
        for field in plain_fields(type(value)):
            code = getattr(value, field.name)
            if field.metadata.get("refers") and code is not None:
                self.value(field.metadata["refers"], code)

    def _with_keys(self, row: Sequence[Plain]) -> tuple[Plain, ...]:
        plain_row = list(row)
        plain_row[0] = f"sample/{row[0]}"
        if row[_FILE] is not None:
            plain_row[_FILE] = f"file/{row[_FILE]}"
        return tuple(plain_row)

    def _insert(self, table: Table, rows: Sequence[Sequence[Plain]]) -> int:
        """Insert rows given without their row number and entry; return the first row number."""
        first = self._next_row(table)
        self._insert_whole(table, [(number, self.as_of, *row) for number, row in enumerate(rows, first)])
        return first

    def _insert_whole(self, table: Table, rows: Sequence[tuple[Plain, ...]]) -> None:
        """Insert rows that have their numbers and the entry."""
        if rows:
            first = self._next_row(table)
            self._connection.exec_driver_sql(self._statement(table), list(rows))
            self._digests.setdefault(table.name, RowDigest()).update(rows)
            self._first_rows.setdefault(table.name, first)
            self._next_rows[table.name] = first + len(rows)

    def _next_row(self, table: Table) -> int:
        if table.name not in self._next_rows:
            highest = self._connection.execute(select(func.max(table.c.row))).scalar_one()
            self._next_rows[table.name] = (highest or 0) + 1
        return self._next_rows[table.name]

    def _statement(self, table: Table) -> str:
        mark = "?" if self._connection.dialect.paramstyle == "qmark" else "%s"
        return f'INSERT INTO "{table.name}" VALUES ({", ".join([mark] * len(table.columns))})'  # noqa: S608


def _columns(value: object) -> tuple[Plain, ...]:
    """Return a value's own columns, references as keys."""
    return tuple(_column(value, field) for field in plain_fields(type(value)))


def _column(value: Any, field: Any) -> Plain:
    held = getattr(value, field.name)
    noun = field.metadata.get("refers")
    return key_of(noun, held) if noun and held is not None else plain(held)


def _last_entry(connection: Connection) -> Entry | None:
    entry = table_of(EntryRow)
    row = connection.execute(select(entry).order_by(entry.c.sequence.desc()).limit(1)).one_or_none()
    return Entry(*row) if row else None


RESULT_COLUMNS = tuple(field.name for field in plain_fields(Result) if field.name != "row")
_FILE = RESULT_COLUMNS.index("file")
