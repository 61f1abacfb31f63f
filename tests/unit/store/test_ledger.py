from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from datetime import timedelta
from pathlib import Path

import pytest
from sqlalchemy import text
from sqlalchemy.exc import DBAPIError, IntegrityError

from effluent.domain import Person
from effluent.errors import (
    AlreadyRecorded,
    LedgerBusy,
    RecordMissing,
    StoreError,
    ValueRefused,
)
from effluent.services.ledger import prove
from effluent.store import database
from effluent.store.base import Base
from effluent.store.ledger import Ledger
from effluent.store.writing import Writing
from tests.conftest import SERVER, fresh_database
from tests.fault.book import DRUM, LAB, MIRA, NOON, SITE, filled_ledger, new_ledger, result

EVERY_TABLE = sorted(Base.metadata.tables)
# SQLite asks its triggers row by row, so an empty table refuses nothing.
WITH_ROWS = [
    "company",
    "container",
    "engine",
    "entry",
    "ledger",
    "person",
    "record",
    "result",
    "sample",
    "site",
]


@pytest.fixture(scope="module", params=["sqlite", "postgresql"] if SERVER else ["sqlite"])
def filled(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Ledger]:
    """One ledger for all tests that only read."""
    if request.param == "sqlite":
        yield filled_ledger(str(tmp_path_factory.mktemp("ledger") / "ledger.effluent"))
        return
    with fresh_database() as place:
        yield filled_ledger(place)


@pytest.fixture
def ledger(ledger_place: str) -> Ledger:
    return new_ledger(ledger_place)


@pytest.mark.parametrize("change", ['UPDATE "{0}" SET {1} = {1}', 'DELETE FROM "{0}"'])
def test_every_table_refuses_changes(filled: Ledger, change: str) -> None:
    for table in EVERY_TABLE if "://" in filled.place else WITH_ROWS:
        with pytest.raises(StoreError, match="append-only"), filled.connection() as connection:
            connection.execute(text(change.format(table, number_of_row(table))))


def number_of_row(table: str) -> str:
    return '"sequence"' if table == "entry" else '"row"'


def _fitting(name: str, kind: str) -> str:
    return "''" if kind == "TEXT" else "1"


@pytest.fixture(scope="module")
def crowded(tmp_path_factory: pytest.TempPathFactory) -> Iterator[sqlite3.Connection]:
    """A file with a row in every table, opened by another tool that looks at no keys."""
    path = tmp_path_factory.mktemp("raw") / "ledger.effluent"
    filled_ledger(str(path)).close()
    with closing(sqlite3.connect(path, isolation_level=None)) as raw:
        raw.execute("PRAGMA ignore_check_constraints = ON")
        for table in EVERY_TABLE:
            if not raw.execute(f'SELECT 1 FROM "{table}"').fetchone():
                columns = raw.execute(f'PRAGMA table_info("{table}")').fetchall()
                values = ", ".join(_fitting(name, kind) for _, name, kind, *_ in columns)
                raw.execute(f'INSERT INTO "{table}" VALUES ({values})')
        yield raw


@pytest.mark.parametrize("table", EVERY_TABLE)
@pytest.mark.parametrize(
    "statement",
    [
        'DELETE FROM "{0}"',
        'UPDATE "{0}" SET {1} = {1}',
        'UPDATE OR REPLACE "{0}" SET {1} = 1',
        'REPLACE INTO "{0}" SELECT * FROM "{0}"',
        'INSERT INTO "{0}" SELECT * FROM "{0}" WHERE true ON CONFLICT DO UPDATE SET {1} = 1',
    ],
)
def test_other_tools_cannot_change_a_table(crowded: sqlite3.Connection, table: str, statement: str) -> None:
    with pytest.raises(sqlite3.IntegrityError, match="append-only"):
        crowded.execute(statement.format(table, number_of_row(table)))


@pytest.mark.parametrize(
    ("table", "renumbered"),
    [("person", '"row" + 100'), ("record", '"row" + 100'), ("entry", "sequence + 100")],
)
def test_row_with_the_same_key_is_no_way_round(
    crowded: sqlite3.Connection, table: str, renumbered: str
) -> None:
    columns = [name for _, name, *_ in crowded.execute(f'PRAGMA table_info("{table}")')]
    values = ", ".join([renumbered, *(f'"{name}"' for name in columns[1:])])
    with pytest.raises(sqlite3.IntegrityError, match="append-only"):
        crowded.execute(f'REPLACE INTO "{table}" SELECT {values} FROM "{table}"')


def test_code_is_recorded_once(ledger: Ledger) -> None:
    ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    with pytest.raises(AlreadyRecorded, match="choose another code"):
        ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    assert ledger.head().sequence == 2


def test_entries_form_a_chain(filled: Ledger) -> None:
    with filled.reading() as reading:
        entries = reading.entries()
    assert [entry.sequence for entry in entries] == list(range(1, 8))
    assert [e.previous_digest for e in entries] == ["0" * 64, *(e.digest for e in entries[:-1])]
    assert [e.recorded_at for e in entries] == sorted(e.recorded_at for e in entries)


def test_clock_that_goes_back_does_not_reorder_entries(ledger: Ledger) -> None:
    ledger.clock = lambda: NOON - timedelta(days=400)
    ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    with ledger.reading() as reading:
        first, second = reading.entries()
    assert second.recorded_at == first.recorded_at


@pytest.mark.parametrize(
    ("moment", "name", "sequence"),
    [
        ("1", "Mira Sand (invented)", 1),
        ("5", "Mira Sand (invented)", 5),
        ("6", "Mira Sand-Dune (invented)", 6),
        ("2026-03-01", "Mira Sand-Dune (invented)", 7),
        ("2026-03-01T12:00Z", "Mira Sand (invented)", 1),
        ("2026-03-01T12:04:59", "Mira Sand (invented)", 5),
        ("2026-03-01T12:05Z", "Mira Sand-Dune (invented)", 6),
        ("2026-03-01T14:05+02:00", "Mira Sand-Dune (invented)", 6),
        ("2099-01-01", "Mira Sand-Dune (invented)", 7),
    ],
)
def test_question_is_answered_as_of_a_moment(filled: Ledger, moment: str, name: str, sequence: int) -> None:
    with filled.reading(moment) as reading:
        assert (reading.value("person", "MS").name, reading.as_of) == (name, sequence)


def test_what_came_later_is_not_known_earlier(filled: Ledger) -> None:
    with filled.reading("4") as reading:
        assert reading.results() == ()
        assert len(reading.versions("person", "MS")) == 1
        with pytest.raises(RecordMissing):
            reading.entry(5)
    with filled.reading("1") as reading, pytest.raises(RecordMissing):
        reading.value("site", "NOR")


@pytest.mark.parametrize("moment", ["0", "8", "99999999999999999999", "-1", "yesterday", "2026-13-01", "²"])
def test_moment_that_is_none_is_refused(filled: Ledger, moment: str) -> None:
    with pytest.raises(ValueRefused, match="as-of"), filled.reading(moment):
        pass


def test_moment_before_the_ledger_is_refused(filled: Ledger) -> None:
    with pytest.raises(ValueRefused, match="did not exist yet"), filled.reading("2026-02-28"):
        pass


def test_job_that_fails_leaves_nothing(ledger: Ledger) -> None:
    def job(writing: Writing) -> None:
        writing.record(SITE)
        raise ValueRefused("a", "b", "c")

    with pytest.raises(ValueRefused):
        ledger.write(job, by="MS", action="add")
    assert ledger.head().sequence == 1
    ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    assert prove(ledger).findings == ()


def test_writer_must_be_on_record(ledger: Ledger) -> None:
    with pytest.raises(RecordMissing, match="no person 'XX'"):
        ledger.write(lambda w: w.record(SITE), by="XX", action="add")


def test_voided_writer_cannot_write(ledger: Ledger) -> None:
    ledger.write(lambda w: w.record(Person(code="XX", name="Invented")), by="MS", action="add")
    ledger.write(lambda w: w.void("person", "XX"), by="MS", action="void", reason="left")
    with pytest.raises(RecordMissing, match="it was voided"):
        ledger.write(lambda w: w.record(SITE), by="XX", action="add")


def test_second_writer_waits_and_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(database, "BUSY_TIMEOUT_MS", 50)
    ledger = new_ledger(str(tmp_path / "ledger.effluent"))
    with closing(sqlite3.connect(ledger.place, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(LedgerBusy, match="nothing was recorded, try again"):
            ledger.write(lambda w: w.record(SITE), by="MS", action="add")
        assert ledger.head().sequence == 1
        other.execute("ROLLBACK")
    assert ledger.write(lambda w: w.record(SITE), by="MS", action="add") == "NOR"


def test_reader_sees_one_state_while_another_writes(ledger: Ledger) -> None:
    with ledger.reading() as reading:
        assert reading.values("site") == ()
        ledger.write(lambda w: w.record(SITE), by="MS", action="add")
        assert reading.values("site") == ()
    with ledger.reading() as reading:
        assert reading.values("site") == (SITE,)


def test_job_that_the_server_turned_down_runs_again(ledger: Ledger) -> None:
    tries = []

    def job(writing: Writing) -> str:
        tries.append(writing.as_of)
        if len(tries) < 3:
            raise DBAPIError("COMMIT", None, Turned())
        return writing.record(SITE)

    assert ledger.write(job, by="MS", action="add") == "NOR"
    assert tries == [2, 2, 2]


def test_job_that_the_server_turns_down_for_ever_is_given_up(ledger: Ledger) -> None:
    def job(writing: Writing) -> None:
        raise DBAPIError("COMMIT", None, Turned())

    with pytest.raises(LedgerBusy):
        ledger.write(job, by="MS", action="add")
    assert ledger.head().sequence == 1


class Turned(Exception):
    """What PostgreSQL's driver raises when two transactions cannot be put in an order."""

    sqlstate = "40001"


def test_voided_and_amended_stay_readable(ledger: Ledger) -> None:
    ledger.write(lambda w: w.record(LAB), by="MS", action="add")
    ledger.write(lambda w: w.amend(replace(LAB, phone="+00 1")), by="MS", action="amend", reason="new")
    ledger.write(lambda w: w.void("company", "LAB"), by="MS", action="void", reason="closed")
    with ledger.reading() as reading:
        versions = reading.versions("company", "LAB")
        assert reading.values("company") == ()
    assert [(v.number, v.voided, v.value.phone, v.entry.reason) for v in versions] == [
        (1, False, "", ""),
        (2, False, "+00 1", "new"),
        (3, True, "+00 1", "closed"),
    ]


def test_reference_to_what_is_not_there_is_refused(ledger: Ledger) -> None:
    with pytest.raises(RecordMissing, match="no site 'NOR'"):
        ledger.write(lambda w: w.record(DRUM), by="MS", action="add")
    with pytest.raises(RecordMissing, match="no sample 'S-0001'"):
        ledger.write(lambda w: w.add_result(result("1")), by="MS", action="add")
    assert ledger.head().sequence == 1


def test_reference_to_what_was_voided_is_refused(ledger: Ledger) -> None:
    ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    ledger.write(lambda w: w.void("site", "NOR"), by="MS", action="void", reason="twice")
    with pytest.raises(RecordMissing, match="it was voided"):
        ledger.write(lambda w: w.record(DRUM), by="MS", action="add")


@pytest.mark.parametrize("code", [" MS", "MS ", "a\nb", "x" * 65, ""])
def test_code_that_nobody_could_type_is_refused(ledger: Ledger, code: str) -> None:
    with pytest.raises(ValueRefused, match="person code"):
        ledger.write(lambda w: w.record(replace(MIRA, code=code)), by="MS", action="add")


def test_database_itself_refuses_the_key_of_another_noun(ledger: Ledger) -> None:
    ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    statement = "INSERT INTO point VALUES (1, 1, 'site/NOR', 1, 0, 'person/MS', 'n', 'k', '', '')"
    with pytest.raises(IntegrityError, match="ck_point_site"), ledger.connection() as connection:
        connection.execute(text(statement))
