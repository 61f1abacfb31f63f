"""The suite's own safety nets catch what they are there for."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import pytest

from tests.conftest import SERVER, fresh_database, no_connection_left


def test_open_connection_fails_the_test() -> None:
    with pytest.raises(pytest.fail.Exception, match="1 SQLite connection"), no_connection_left():
        sqlite3.connect(":memory:")


def test_closed_connection_passes() -> None:
    with no_connection_left():
        sqlite3.connect(":memory:").close()


def test_ledger_place_names_something_empty(ledger_place: str) -> None:
    if not ledger_place.startswith("postgresql"):
        assert not Path(ledger_place).exists()
        return
    from sqlalchemy import create_engine, inspect

    engine = create_engine(ledger_place)
    assert inspect(engine).get_table_names() == []
    engine.dispose()


if SERVER:  # the driver is there only with the server

    def test_open_session_fails_the_test() -> None:
        import psycopg

        with pytest.raises(pytest.fail.Exception, match="session was left open"), fresh_database() as place:
            left = psycopg.connect(place.replace("+psycopg", ""))
        left.close()
