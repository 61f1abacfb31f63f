"""What every test gets: a clean environment, a place for a ledger, a failure when it leaks a connection."""

from __future__ import annotations

import os
import sqlite3
import sys
import uuid
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import hypothesis
import pytest

from effluent.settings import LEDGER_VARIABLE, PERSON_VARIABLE

SERVER_VARIABLE = "EFFLUENT_TEST_POSTGRESQL"
SERVER = os.environ.get(SERVER_VARIABLE, "")

hypothesis.settings.register_profile("here", deadline=None)
hypothesis.settings.register_profile("ci", deadline=None, derandomize=True, print_blob=True)
hypothesis.settings.load_profile("ci" if os.environ.get("CI") else "here")

_opened: list[sqlite3.Connection] = []


def _note(event: str, args: tuple[Any, ...]) -> None:
    if event == "sqlite3.connect/handle":
        _opened.append(args[0])


sys.addaudithook(_note)


def is_open(connection: sqlite3.Connection) -> bool:
    """Python 3.11 does not warn of a connection that is dropped without being closed, so ask it."""
    try:
        _ = connection.total_changes
    except sqlite3.ProgrammingError:
        return False
    return True


@contextmanager
def no_connection_left() -> Iterator[None]:
    """Close what the block left open, and fail."""
    before = len(_opened)
    yield
    left = [connection for connection in _opened[before:] if is_open(connection)]
    del _opened[before:]
    for connection in left:
        connection.close()
    if left:
        pytest.fail(f"{len(left)} SQLite connection(s) left open")


@pytest.fixture(autouse=True)
def _closes_what_it_opens() -> Iterator[None]:
    with no_connection_left():
        yield


@pytest.fixture(autouse=True)
def _no_settings_from_outside(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv(LEDGER_VARIABLE, raising=False)
    monkeypatch.delenv(PERSON_VARIABLE, raising=False)


def _order(statement: str) -> None:
    """Run one statement on the server's maintenance database; no server is an error of the test."""
    import psycopg
    from sqlalchemy import make_url

    url = make_url(SERVER).set(drivername="postgresql")
    with psycopg.connect(url.render_as_string(hide_password=False), autocommit=True) as connection:
        connection.execute(statement)


@contextmanager
def fresh_database() -> Iterator[str]:
    """Give the place of an empty database; a session still open when the test ends fails it."""
    import psycopg
    from sqlalchemy import make_url

    name = f"effluent_{uuid.uuid4().hex}"
    _order(f"CREATE DATABASE {name} TEMPLATE template0")
    yield make_url(SERVER).set(database=name).render_as_string(hide_password=False)
    try:
        _order(f"DROP DATABASE {name}")
    except psycopg.errors.ObjectInUse:
        _order(f"DROP DATABASE {name} WITH (FORCE)")
        pytest.fail("a PostgreSQL session was left open")


@pytest.fixture(params=["sqlite", "postgresql"] if SERVER else ["sqlite"])
def ledger_place(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[str]:
    """The place of a ledger yet to be created, on each database at hand."""
    if request.param == "sqlite":
        yield str(tmp_path / "ledger.effluent")
        return
    with fresh_database() as place:
        yield place
