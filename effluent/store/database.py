"""Opening a ledger's database with the settings that keep it safe, and its errors in our words."""

from __future__ import annotations

import os
import re
import sqlite3
import stat
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from sqlalchemy import URL, Connection, Engine, create_engine, event
from sqlalchemy.engine import make_url
from sqlalchemy.exc import ArgumentError, DBAPIError, NoSuchModuleError
from sqlalchemy.pool import NullPool

from effluent.errors import (
    FileMissing,
    LedgerBusy,
    LedgerDamaged,
    NotALedger,
    ServerMissing,
    StorageFailed,
    StoreError,
    ValueRefused,
    WouldOverwrite,
)
from effluent.store.base import APPLICATION_ID

__all__ = [
    "connect",
    "finish",
    "initialise",
    "is_server",
    "open_existing",
    "refuse_taken",
    "shown",
    "translated",
    "writes",
]

BUSY_TIMEOUT_MS = 5_000
_SQLITE_HEADER = b"SQLite format 3\0"
_MEANINGS: tuple[tuple[str, type[StoreError]], ...] = (
    ("locked", LedgerBusy),
    ("busy", LedgerBusy),
    ("not a database", NotALedger),
    ('" already exists', NotALedger),
    ("malformed", LedgerDamaged),
    ("disk image", LedgerDamaged),
    ("decode to utf-8", LedgerDamaged),
    ("no such table", LedgerDamaged),
    ("no such column", LedgerDamaged),
    ("unsupported file format", LedgerDamaged),
    ("disk is full", StorageFailed),
    ("no space left", StorageFailed),
    ("disk i/o", StorageFailed),
    ("readonly", StorageFailed),
    ("read-only", StorageFailed),
    ("permission denied", StorageFailed),
    ("unable to open", StorageFailed),
)
_REMEDIES = {
    "not a database": "name the file that `effluent ledger create` made",
    '" already exists': "it holds other tables; name an empty database",
}


def is_server(place: str) -> bool:
    """Tell whether a place is a database server's address rather than a file."""
    return "://" in place


def shown(place: str) -> str:
    """Return a place fit to be shown: without the password."""
    return re.sub(r"(password=)[^&]*", r"\1***", re.sub(r"://([^:/@]*):.*@", r"://\1:***@", place))


def connect(place: str) -> Engine:
    """Return an engine with the settings of `docs/architecture.md`; nothing is opened yet."""
    if not is_server(place):
        return _sqlite(place)
    try:
        url = make_url(place)
        if url.drivername != "postgresql+psycopg":
            raise ValueRefused("ledger", shown(place), "use a file or postgresql+psycopg://…")
        return create_engine(url, poolclass=NullPool, isolation_level="SERIALIZABLE")
    except (ArgumentError, NoSuchModuleError, ValueError) as error:  # a port that is no number
        raise ValueRefused("ledger", shown(place), "use a file or postgresql+psycopg://…") from error
    except ImportError as error:
        raise ServerMissing(shown(place), "its driver is missing; install effluent[postgresql]") from error


def open_existing(place: str) -> Engine:
    """Return an engine for a ledger that is there.

    Raises
    ------
    FileMissing, NotALedger
        If there is no file, or it is something else.
    """
    if not is_server(place):
        _refuse_other_files(Path(place))
    return connect(place)


def refuse_taken(path: Path) -> None:
    """Refuse a place where a new file cannot be put.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
        If something is there, the folder is not, or no file can have that name.
    """
    try:
        os.lstat(path)
    except (FileNotFoundError, NotADirectoryError):
        pass
    except OSError as error:
        raise StorageFailed(path, error.strerror or "no file can have that name") from error
    else:
        raise WouldOverwrite(path)
    if not os.path.isdir(path.absolute().parent):
        raise FileMissing(path.absolute().parent, "make the folder first")


def initialise(engine: Engine, place: str) -> None:
    """Mark a new SQLite file as a ledger."""
    with translated(place), engine.connect() as connection:
        connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.commit()


def finish(engine: Engine, place: str) -> None:
    """Let a new SQLite file be read while it is written, once all is in it."""
    with translated(place), engine.connect() as connection:
        connection.rollback()
        connection.connection.cursor().execute("PRAGMA journal_mode = WAL")


def writes(connection: Connection) -> Connection:
    """Mark a connection so that its transaction takes the write lock at once."""
    return connection.execution_options(effluent_writes=True)


@contextmanager
def translated(place: str) -> Iterator[None]:
    """Turn what the driver raises into errors of our tree."""
    try:
        yield
    except DBAPIError as error:
        raise _meaning(place, error) from error
    except sqlite3.Error as error:
        raise _meaning_of(place, str(error)) from error
    except UnicodeDecodeError as error:
        raise LedgerDamaged(shown(place), "it holds text that is not UTF-8") from error


def _meaning(place: str, error: DBAPIError) -> Exception:
    if is_server(place) and (error.connection_invalidated or getattr(error.orig, "sqlstate", "") is None):
        return ServerMissing(shown(place), " ".join(str(error.orig).split())[:300])
    meaning = _meaning_of(place, str(error.orig))
    if isinstance(meaning, StoreError):
        return meaning
    if "append-only" in str(error.orig):
        return StoreError("the ledger is append-only: nothing in it is changed or deleted")
    return error


def _meaning_of(place: str, message: str) -> Exception:
    lowered = message.lower()
    for phrase, kind in _MEANINGS:
        if phrase in lowered:
            return kind(shown(place), _REMEDIES.get(phrase, message))
    return sqlite3.DatabaseError(message)


def _refuse_other_files(path: Path) -> None:
    create = f"make one with: effluent ledger create --ledger {path}"
    try:
        if path.is_dir():
            raise NotALedger(path, "it is a folder; name the ledger file in it")
        header = _header(path)
    except (FileNotFoundError, NotADirectoryError) as error:
        raise FileMissing(path, create) from error
    except OSError as error:
        raise StorageFailed(path, error.strerror or "cannot be read") from error
    if not header.startswith(_SQLITE_HEADER) or int.from_bytes(header[68:72], "big") != APPLICATION_ID:
        raise NotALedger(path, f"name the ledger file, or {create}")


def _header(path: Path) -> bytes:
    """Return the beginning of a file; a pipe or device has none, and would keep us waiting."""
    if not stat.S_ISREG(path.stat().st_mode):
        return b""
    with path.open("rb") as file:
        return file.read(72)


def _sqlite(place: str) -> Engine:
    url = URL.create("sqlite", database=os.fspath(Path(place).absolute()))
    engine = create_engine(url, poolclass=NullPool)
    event.listen(engine, "connect", _set_up)
    event.listen(engine, "begin", _begin)
    return engine


def _set_up(driver: Any, _record: object) -> None:
    """Leave BEGIN to us (the driver would commit DDL), and set what keeps the file safe."""
    driver.isolation_level = None
    driver.execute(f"PRAGMA busy_timeout = {BUSY_TIMEOUT_MS}")
    driver.execute("PRAGMA foreign_keys = ON")
    driver.execute("PRAGMA synchronous = FULL")


def _begin(connection: Connection) -> None:
    writing = connection.get_execution_options().get("effluent_writes")
    connection.exec_driver_sql("BEGIN IMMEDIATE" if writing else "BEGIN")
