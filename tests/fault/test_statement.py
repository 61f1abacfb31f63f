"""The n-th statement fails, for every n until the work is done."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest
from sqlalchemy import Engine, event

from effluent.errors import StoreError
from effluent.services.ledger import backup, create, open_ledger, prove
from effluent.store.ledger import Ledger
from tests.fault.book import JOBS, MIRA, SITE, filled_ledger, new_ledger

HOOKS = ("do_execute", "do_executemany", "do_execute_no_params", "commit")


class Fault:
    """What goes wrong, and when."""

    def __init__(self, at: int, message: str) -> None:
        self.left = at
        self.message = message

    def __call__(self, *_: object) -> None:
        self.left -= 1
        if self.left == 0:
            raise sqlite3.OperationalError(self.message)

    @property
    def happened(self) -> bool:
        return self.left <= 0


@contextmanager
def failing(at: int, message: str = "disk I/O error") -> Iterator[Fault]:
    fault = Fault(at, message)
    for hook in HOOKS:
        event.listen(Engine, hook, fault)
    try:
        yield fault
    finally:
        for hook in HOOKS:
            event.remove(Engine, hook, fault)


def sweep(
    job: Callable[[], object], unchanged: Callable[[], object], numbers: Iterable[int] = range(1, 1000)
) -> int:
    """Run a job with its n-th statement failing until it passes; return how many statements it has."""
    for at in numbers:
        with failing(at) as fault:
            try:
                job()
            except StoreError:
                assert fault.happened
            else:
                assert not fault.happened, f"statement {at} failed and nobody was told"
                return at - 1
        unchanged()
    raise AssertionError("it never ends")


def holds(ledger: Ledger, entries: int) -> None:
    report = prove(ledger)
    assert (report.entries, report.findings) == (entries, ())


@pytest.mark.parametrize("number", range(len(JOBS)))
def test_entry_is_recorded_whole_or_not_at_all(tmp_path: Path, number: int) -> None:
    ledger = new_ledger(str(tmp_path / "ledger.effluent"))
    for job in JOBS[:number]:
        ledger.write(job, by="MS", action="test")
    before = ledger.head().sequence
    statements = sweep(
        lambda: ledger.write(JOBS[number], by="MS", action="test"), lambda: holds(ledger, before)
    )
    assert statements >= 7
    holds(ledger, before + 1)


def test_ledger_is_created_whole_or_not_at_all(tmp_path: Path) -> None:
    place = tmp_path / "ledger.effluent"
    # The tables and triggers of the one migration are much alike: every ninth of them will do.
    numbers = [*range(1, 12), *range(12, 120, 9), *range(120, 1000)]
    statements = sweep(lambda: create(str(place), MIRA), lambda: is_empty(tmp_path), numbers)
    assert statements > 100
    assert [path.name for path in tmp_path.iterdir()] == ["ledger.effluent"]
    with open_ledger(str(place)) as ledger:
        holds(ledger, 1)


def is_empty(folder: Path) -> None:
    assert list(folder.iterdir()) == []


def test_reading_that_fails_says_so(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    assert sweep(lambda: open_ledger(ledger.place).head(), lambda: holds(ledger, 7)) > 2
    assert sweep(lambda: prove(ledger), lambda: holds(ledger, 7)) > 5


def test_backup_that_cannot_be_read_back_is_an_error(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    with failing(1), pytest.raises(StoreError):
        backup(ledger, str(tmp_path / "copy"))
    holds(ledger, 7)


@pytest.mark.parametrize(
    ("message", "code"),
    [
        ("database is locked", "E404"),
        ("database disk image is malformed", "E405"),
        ("file is not a database", "E401"),
        ("no such table: wash", "E405"),
        ("Could not decode to UTF-8 column 'name' with text 'x'", "E405"),
        ("database or disk is full", "E406"),
        ("disk I/O error", "E406"),
        ("attempt to write a readonly database", "E406"),
        ("unable to open database file", "E406"),
    ],
)
def test_what_the_driver_says_becomes_an_error_of_ours(tmp_path: Path, message: str, code: str) -> None:
    ledger = new_ledger(str(tmp_path / "ledger.effluent"))
    with failing(3, message), pytest.raises(StoreError) as caught:
        ledger.write(lambda w: w.record(SITE), by="MS", action="add")
    assert caught.value.code == code
    assert ledger.place in str(caught.value)
    holds(ledger, 1)
