"""A disk that is full, and one that cannot be written."""

from __future__ import annotations

import os
import resource
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pytest
from sqlalchemy import Engine, event

from effluent.__main__ import run
from effluent.errors import StorageFailed
from effluent.services.ledger import backup, create, open_ledger, prove, restore
from effluent.store.ledger import Ledger
from tests.fault.book import MIRA, SITE, filled_ledger, new_ledger, result

FULL = r"cannot be written \(.*\); nothing was recorded"
CREATE = ["ledger", "create", "--by", "MS", "--name", "Mira Sand", "--ledger"]
ADD = ["person", "add", "XX", "--name", "X", "--by", "MS", "--ledger"]


@contextmanager
def room_for(pages: int) -> Iterator[None]:
    """Have SQLite find the disk full beyond that many pages."""

    def limit(driver: Any, _record: object) -> None:
        driver.execute(f"PRAGMA max_page_count = {pages}")

    event.listen(Engine, "connect", limit)
    try:
        yield
    finally:
        event.remove(Engine, "connect", limit)


def test_ledger_is_not_begun_where_there_is_no_room_for_it(tmp_path: Path) -> None:
    for pages in (2, 10, 40):
        with room_for(pages), pytest.raises(StorageFailed, match="full"):
            create(str(tmp_path / "ledger"), MIRA)
        assert list(tmp_path.iterdir()) == []


def test_results_that_find_no_room_are_not_recorded(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger"))
    with room_for(1), pytest.raises(StorageFailed, match="full"):
        ledger.write(lambda w: [w.add_result(result("1")) for _ in range(300)], by="MS", action="enter")
    assert prove(ledger).entries == 7
    ledger.write(lambda w: w.add_result(result("1")), by="MS", action="enter")
    report = prove(ledger)
    assert (report.entries, report.findings) == (8, ())


def command(*arguments: object, most: int | None = None) -> tuple[int, str]:
    """Run the command; no file may grow beyond `most` bytes, which needs no rights to arrange."""
    limit: Callable[[], object] | None = None
    if most is not None:
        limit = lambda: resource.setrlimit(resource.RLIMIT_FSIZE, (most, most))  # noqa: E731
    done = subprocess.run(
        [sys.executable, "-B", "-m", "effluent", *map(str, arguments)],
        capture_output=True,
        text=True,
        check=False,
        preexec_fn=limit,
    )
    return done.returncode, done.stderr


@pytest.mark.parametrize("most", [3_000, 100_000])
def test_file_that_cannot_grow_is_an_error_in_our_words(tmp_path: Path, most: int) -> None:
    place = tmp_path / "ledger"
    status, said = command(*CREATE, place, most=most)
    assert (status, said[:5], said.count("\n")) == (5, "E406:", 1)
    assert list(tmp_path.iterdir()) == []


def test_entry_that_cannot_be_written_leaves_the_ledger_alone(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger"))
    status, said = command(*ADD, ledger.place, most=2_000)
    assert (status, said[:5], said.count("\n")) == (5, "E406:", 1)
    report = prove(ledger)
    assert (report.entries, report.findings) == (7, ())


def test_copy_that_cannot_be_written_leaves_nothing(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger"))
    for arguments in (
        ["ledger", "backup", tmp_path / "copy", "--ledger", ledger.place],
        ["ledger", "restore", ledger.place, "--ledger", tmp_path / "copy"],
    ):
        status, said = command(*arguments, most=40_000)
        assert (status, said[:5], said.count("\n")) == (5, "E406:", 1)
        assert not [path for path in tmp_path.iterdir() if "copy" in path.name]


@contextmanager
def mounted(folder: Path, size: str) -> Iterator[Path]:
    """A small disk of its own; only root may have one."""
    folder.mkdir()
    mount = ["mount", "-t", "tmpfs", "-o", f"size={size}", "none", str(folder)]
    if os.geteuid() != 0 or shutil.which("mount") is None:
        pytest.skip("only root can mount")
    if subprocess.run(mount, capture_output=True, check=False).returncode:
        pytest.skip("mounting is not allowed here")
    try:
        yield folder
    finally:
        subprocess.run(["umount", str(folder)], check=True)


def amend_many(ledger: Ledger) -> None:
    for _ in range(100):
        ledger.write(lambda w: w.amend(SITE), by="MS", action="amend", reason="x" * 50_000)


def test_small_disk_fills_up_and_nothing_is_lost(tmp_path: Path) -> None:
    with mounted(tmp_path / "disk", "900k") as disk:
        ledger = new_ledger(str(disk / "ledger"))
        ledger.write(lambda w: w.record(SITE), by="MS", action="add")
        with pytest.raises(StorageFailed, match=FULL):
            amend_many(ledger)
        report = prove(ledger)
        assert report.findings == ()
        assert report.entries > 2
        with pytest.raises(StorageFailed, match=FULL):
            backup(ledger, str(disk / "copy"))
        assert {path.name for path in disk.iterdir()} <= {"ledger", "ledger-wal", "ledger-shm"}


def test_disk_that_cannot_be_written_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    with mounted(tmp_path / "disk", "4m") as disk:
        with new_ledger(str(disk / "ledger")) as ledger:
            backup(ledger, str(disk / "copy"))
        subprocess.run(["mount", "-o", "remount,ro", str(disk)], check=True)
        for arguments in (
            [*ADD, str(disk / "ledger")],
            [*CREATE, str(disk / "other")],
            ["ledger", "backup", str(disk / "other"), "--ledger", str(tmp_path / "ledger")],
        ):
            if "backup" in arguments:
                new_ledger(str(tmp_path / "ledger")).close()
            capsys.readouterr()
            assert run(arguments) == 5
            assert capsys.readouterr().err.startswith("E406: ")
        assert restore(str(disk / "copy"), str(tmp_path / "restored")).entries == 1


@pytest.mark.skipif(os.geteuid() == 0, reason="nothing is forbidden to root")
def test_folder_that_forbids_writing_is_told(tmp_path: Path) -> None:
    ledger = new_ledger(str(tmp_path / "ledger"))
    tmp_path.chmod(0o555)
    try:
        with pytest.raises(StorageFailed, match=FULL):
            create(str(tmp_path / "other"), MIRA)
        with pytest.raises(StorageFailed, match=FULL):
            backup(ledger, str(tmp_path / "copy"))
    finally:
        tmp_path.chmod(0o755)
    assert open_ledger(ledger.place).head().sequence == 1
