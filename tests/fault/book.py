"""A small ledger to harm: how it is made, and how somebody with other tools would change it."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from datetime import UTC, datetime, timedelta
from itertools import count
from typing import Any

from sqlalchemy import Connection, CursorResult

from effluent.domain import (
    Company,
    CompanyRole,
    Container,
    ContainerKind,
    Engine,
    Fraction,
    Method,
    Person,
    Quantity,
    Result,
    Sample,
    Site,
)
from effluent.services.ledger import create, open_ledger
from effluent.store.digest import RowDigest, entry_digest
from effluent.store.ledger import Ledger
from effluent.store.writing import Writing

NUMBER = "0123456789ab"
NOON = datetime(2026, 3, 1, 12, tzinfo=UTC)
MIRA = Person(code="MS", name="Mira Sand (invented)", role="environmental officer")
SITE = Site(
    code="NOR",
    name="North station (invented)",
    operator="Invented Airways",
    address="1 Apron Road",
    time_zone="Europe/Lisbon",
)
ENGINE = Engine(code="E-100", type_label="IT-7 (invented)", site="NOR")
DRUM = Container(code="D-1", kind=ContainerKind.DRUM, site="NOR", capacity=Quantity("200", "L"))
LAB = Company(code="LAB", name="Invented Laboratory", role=CompanyRole.LABORATORY)
SAMPLE = Sample(
    code="S-0001", container="D-1", method=Method.GRAB, started_at=NOON, taken_by="MS", laboratory="LAB"
)


def result(text: str, **changes: Any) -> Result:
    given = {
        "sample": "S-0001",
        "analyte": "Cadmium",
        "fraction": Fraction.TOTAL,
        "unit": "mg/L",
        "number": text,
        "value": float(text),
        "canonical_unit": "mg/L",
    }
    return Result(text=text, **{**given, **changes})


def ticking() -> Callable[[], datetime]:
    """A clock that a minute passes on each time it is asked; the first answer is noon."""
    minutes = count()
    return lambda: NOON + timedelta(minutes=next(minutes))


def new_ledger(place: str) -> Ledger:
    """A ledger with one entry, of noon."""
    clock = ticking()
    create(place, MIRA, number=NUMBER, clock=clock)
    return open_ledger(place, clock=clock)


JOBS: tuple[Callable[[Writing], object], ...] = (
    lambda w: w.record(SITE),
    lambda w: [w.record(value) for value in (ENGINE, DRUM, LAB)],
    lambda w: w.record(SAMPLE),
    lambda w: [w.add_result(result(text)) for text in ("0.05", "0.11", "110")],
    lambda w: w.amend(Person(code="MS", name="Mira Sand-Dune (invented)")),
    lambda w: w.add_result(result("0.07")),
)


def fill(ledger: Ledger) -> None:
    """Add entries 2 to 7."""
    for job in JOBS:
        ledger.write(job, by="MS", action="test", reason="because")


def filled_ledger(place: str) -> Ledger:
    ledger = new_ledger(place)
    fill(ledger)
    return ledger


Run = Callable[[str], list[tuple[Any, ...]]]


@contextmanager
def unguarded(ledger: Ledger) -> Iterator[tuple[Connection, Run]]:
    """Give a transaction that may change anything, and a way to run a statement in it.

    `guard` puts the triggers back, as if nothing had been; what is not committed is rolled back.
    """
    with ledger._engine.connect() as connection:
        if connection.dialect.name == "sqlite":
            connection.connection.cursor().execute("PRAGMA foreign_keys = OFF")
        _unguard(connection)
        yield connection, lambda statement: _rows(connection.exec_driver_sql(statement))
        connection.rollback()


def _rows(result: CursorResult[Any]) -> list[tuple[Any, ...]]:
    return [tuple(row) for row in result] if result.returns_rows else []


def _unguard(connection: Connection) -> None:
    if connection.dialect.name != "sqlite":
        connection.exec_driver_sql("SET LOCAL session_replication_role = replica")
        return
    query = "SELECT name, sql FROM sqlite_master WHERE type = 'trigger'"
    connection.info["guards"] = connection.exec_driver_sql(query).all()
    for name, _ in connection.info["guards"]:
        connection.exec_driver_sql(f'DROP TRIGGER "{name}"')


def guard(connection: Connection) -> None:
    if connection.dialect.name != "sqlite":
        connection.exec_driver_sql("SET LOCAL session_replication_role = origin")
        return
    for _, definition in connection.info["guards"]:
        connection.exec_driver_sql(definition)


def tamper(ledger: Ledger, *statements: str) -> None:
    """Change a ledger for good."""
    with unguarded(ledger) as (connection, run):
        for statement in statements:
            run(statement)
        guard(connection)
        connection.commit()


def forge(ledger: Ledger, statement: str) -> None:
    """Change the ledger and compute every digest anew, as somebody would who knows how."""
    with unguarded(ledger) as (connection, run):
        run(statement)
        _digest_anew(run)
        guard(connection)
        connection.commit()


def _digest_anew(run: Run) -> None:
    previous = "0" * 64
    for entry in run("SELECT * FROM entry ORDER BY sequence"):
        parts = [_digested(run, *part) for part in json.loads(entry[5])]
        header = [*entry[:5], json.dumps(parts, separators=(",", ":")), previous]
        previous = entry_digest(header)
        run(
            f"UPDATE entry SET contents = '{header[5]}', previous_digest = '{header[6]}', "
            f"digest = '{previous}' WHERE sequence = {entry[0]}"
        )


def _digested(run: Run, table: str, first: int, rows: int, columns: int, _old: str) -> list[Any]:
    digest = RowDigest()
    last = first + rows - 1
    digest.update(run(f'SELECT * FROM "{table}" WHERE "row" BETWEEN {first} AND {last} ORDER BY "row"'))
    return [table, first, rows, columns, digest.hexdigest()]
