"""Several processes at one ledger."""

from __future__ import annotations

import sqlite3
import subprocess
import sys
import threading
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.errors import StoreError
from effluent.services.ledger import backup, open_ledger, prove
from effluent.store import database
from effluent.store.ledger import Ledger
from tests.fault.book import SITE, filled_ledger, new_ledger

ADD = [
    "--name",
    "N",
    "--operator",
    "Invented",
    "--address",
    "A",
    "--time-zone",
    "Europe/Lisbon",
    "--by",
    "MS",
]


def add_command(place: str, code: str) -> list[str]:
    return ["site", "add", code, *ADD, "--ledger", place]


def test_two_commands_at_once_both_record(tmp_path: Path) -> None:
    place = str(tmp_path / "ledger.effluent")
    new_ledger(place).close()
    both = [
        subprocess.Popen([sys.executable, "-m", "effluent", *add_command(place, code)], stderr=-1, stdout=-1)
        for code in ("ONE", "TWO")
    ]
    assert [process.communicate()[1] for process in both] == [b"", b""]
    with open_ledger(place) as ledger, ledger.reading() as reading:
        assert {site.code for site in reading.values("site")} == {"ONE", "TWO"}
    report = prove(ledger)
    assert (report.entries, report.findings) == (3, ())


def add_many(ledger: Ledger, prefix: str, failed: list[Exception]) -> None:
    for number in range(5):
        site = replace(SITE, code=f"{prefix}{number}")
        try:
            ledger.write(lambda w, site=site: w.record(site), by="MS", action="add")  # type: ignore[misc]
        except StoreError as error:
            failed.append(error)


def test_writers_take_turns(ledger_place: str) -> None:
    new_ledger(ledger_place).close()
    failed: list[Exception] = []
    writers = [
        threading.Thread(target=add_many, args=(open_ledger(ledger_place), prefix, failed))
        for prefix in "ABC"
    ]
    for writer in writers:
        writer.start()
    for writer in writers:
        writer.join()
    assert failed == []
    with open_ledger(ledger_place) as ledger:
        report = prove(ledger)
    assert (report.entries, report.findings) == (16, ())


def test_locked_ledger_is_told_and_loses_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(database, "BUSY_TIMEOUT_MS", 50)
    place = str(tmp_path / "ledger.effluent")
    new_ledger(place).close()
    with closing(sqlite3.connect(place, isolation_level=None)) as other:
        other.execute("BEGIN IMMEDIATE")
        status = run(add_command(place, "ONE"))
        assert (status, capsys.readouterr().err) == (
            5,
            f"E404: {place} is being written by another process; "
            "nothing was recorded, try again in a moment\n",
        )
        assert run(["ledger", "verify", "--ledger", place]) == 0
    assert run(add_command(place, "ONE")) == 0


def test_backup_is_one_state_while_another_process_writes(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    failed: list[Exception] = []
    writer = threading.Thread(target=add_many, args=(open_ledger(ledger.place), "W", failed))
    writer.start()
    heads = [backup(ledger, str(tmp_path / f"copy{number}")) for number in range(3)]
    writer.join()
    assert failed == []
    for number, head in enumerate(heads):
        with open_ledger(str(tmp_path / f"copy{number}")) as copy:
            report = prove(copy, witness=f"{head.sequence}:{head.digest}")
        assert (report.entries, report.findings) == (head.sequence, ())
    assert ledger.head().sequence == 12


def test_copy_in_the_middle_of_a_transaction_is_the_state_before(tmp_path: Path) -> None:
    ledger = new_ledger(str(tmp_path / "ledger.effluent"))

    def job(writing: object) -> None:
        writing.record(SITE)  # type: ignore[attr-defined]
        backup(ledger, str(tmp_path / "copy"))

    ledger.write(job, by="MS", action="add")
    with open_ledger(str(tmp_path / "copy")) as copy:
        assert prove(copy).entries == 1
    assert prove(ledger).entries == 2
