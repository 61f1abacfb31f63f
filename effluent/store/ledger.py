"""A ledger that is open: reading as of any entry, writing one entry at a time."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import UTC, date, datetime
from time import sleep
from typing import TypeVar

from sqlalchemy import Connection, Engine, func, select, text
from sqlalchemy.exc import DBAPIError

from effluent.errors import LedgerBusy, ValueRefused
from effluent.store.base import EntryRow
from effluent.store.column import utc_text
from effluent.store.database import is_server, shown, translated, writes
from effluent.store.noun import table_of
from effluent.store.reading import Entry, Reading
from effluent.store.writing import Writing

__all__ = ["Clock", "Ledger", "view"]

T = TypeVar("T")
Clock = Callable[[], datetime]

_ENTRY = table_of(EntryRow)
_TRIES = 5
_AS_OF = "write an entry number, a date as in 2026-03-01, or an instant as in 2026-03-01T14:30Z"


class Ledger:
    """One ledger file or database.

    Parameters
    ----------
    engine : sqlalchemy.Engine
        From `effluent.store.database`.
    place : str
        Where it is, as the user named it.
    clock : callable
        Returns the aware instant at which an entry is recorded.
    """

    def __init__(self, engine: Engine, place: str, *, clock: Clock) -> None:
        self._engine = engine
        self.place = place
        self.clock = clock

    def __enter__(self) -> Ledger:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    def close(self) -> None:
        """Let go of the database."""
        self._engine.dispose()

    @contextmanager
    def connection(self) -> Iterator[Connection]:
        """Open a connection with one transaction for reading."""
        with translated(self.place), self._engine.connect() as connection, connection.begin():
            yield connection

    @contextmanager
    def reading(self, as_of: str | None = None) -> Iterator[Reading]:
        """Open a consistent view, of now or as of an entry number, a date (UTC) or an instant."""
        with self.connection() as connection:
            yield view(connection, as_of)

    def write(self, job: Callable[[Writing], T], *, by: str, action: str, reason: str = "") -> T:
        """Run a job that adds to the ledger, as one entry, and return what it returns.

        The job may run again when a database server asks for it; it must not do anything else.

        Raises
        ------
        LedgerBusy
            If somebody else kept writing for too long.
        """
        for attempt in range(_TRIES):
            with translated(self.place):
                try:
                    return self._write_once(job, by=by, action=action, reason=reason)
                except DBAPIError as error:
                    if getattr(error.orig, "sqlstate", None) != "40001":
                        raise
                    sleep(0.05 * 2**attempt)
        raise LedgerBusy(shown(self.place))

    def _write_once(self, job: Callable[[Writing], T], *, by: str, action: str, reason: str) -> T:
        with self._engine.connect() as connection, writes(connection).begin():
            if is_server(self.place):
                connection.execute(text("LOCK TABLE entry IN EXCLUSIVE MODE"))
            writing = Writing(connection)
            if writing.as_of > 1:
                writing.value("person", by)
            result = job(writing)
            writing.close(recorded_at=self.clock(), recorded_by=by, action=action, reason=reason)
            return result

    def head(self) -> Entry:
        """Return the newest entry."""
        with self.reading() as reading:
            return reading.head


def view(connection: Connection, as_of: str | None = None) -> Reading:
    """Return what a connection's transaction sees, of now or as of a moment."""
    return Reading(connection, _sequence(connection, as_of))


def _sequence(connection: Connection, as_of: str | None) -> int:
    highest = int(connection.execute(select(func.max(_ENTRY.c.sequence))).scalar_one() or 0)
    if as_of is None:
        return highest
    if as_of.isdecimal() and as_of.isascii():
        if not 1 <= int(as_of[:18]) <= highest:
            raise ValueRefused("as-of", as_of, f"entries run from 1 to {highest}")
        return int(as_of)
    query = select(func.max(_ENTRY.c.sequence)).where(_ENTRY.c.recorded_at <= _latest(as_of))
    found = connection.execute(query).scalar_one()
    if found is None:
        raise ValueRefused("as-of", as_of, "the ledger did not exist yet")
    return int(found)


def _latest(as_of: str) -> str:
    """Return the last instant that counts as `as_of`, as UTC text."""
    try:
        if re.fullmatch(r"\d{4}-\d{2}-\d{2}", as_of):
            return f"{date.fromisoformat(as_of)}T23:59:59.999999Z"
        instant = datetime.fromisoformat(as_of.replace("Z", "+00:00"))
        return utc_text(instant if instant.tzinfo else instant.replace(tzinfo=UTC))
    except (ValueError, OverflowError) as error:
        raise ValueRefused("as-of", as_of, _AS_OF) from error
