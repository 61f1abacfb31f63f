"""A file that is no ledger, or no longer one, is refused in our words, by the service and by the command."""

from __future__ import annotations

import os
import random
import shutil
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.errors import FileMissing, LedgerDamaged, NotALedger, StorageFailed, StoreError
from effluent.services.ledger import backup, create, open_ledger, prove, restore, upgrade
from effluent.store import database
from tests.fault.book import MIRA, filled_ledger

READS = (["ledger", "verify"], ["ledger", "history"], ["site", "list"], ["person", "show", "MS"])


@pytest.fixture(scope="module")
def original(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("original") / "ledger.effluent"
    filled_ledger(str(path)).close()
    return path


@pytest.fixture
def ledger(original: Path, tmp_path: Path) -> Path:
    return Path(shutil.copy(original, tmp_path / "ledger.effluent"))


def command(capsys: pytest.CaptureFixture[str], *arguments: object) -> tuple[int, str]:
    """Return the exit status and what was complained of."""
    capsys.readouterr()
    status = run([str(argument) for argument in arguments])
    return status, capsys.readouterr().err


def text_file(path: Path) -> None:
    path.write_text("Dear laboratory, please find attached\n" * 100)


def empty_file(path: Path) -> None:
    path.touch()


def other_database(path: Path) -> None:
    with closing(sqlite3.connect(path)) as raw:
        raw.execute("CREATE TABLE person (name TEXT)")


def folder(path: Path) -> None:
    path.mkdir()


def pipe(path: Path) -> None:
    os.mkfifo(path)


def unfinished(path: Path) -> None:
    with closing(sqlite3.connect(path)) as raw:
        raw.execute(f"PRAGMA application_id = {database.APPLICATION_ID}")
        raw.execute("CREATE TABLE note (text TEXT)")


NO_LEDGERS = [text_file, empty_file, other_database, folder, pipe, unfinished]


@pytest.mark.parametrize("make", NO_LEDGERS)
@pytest.mark.parametrize("arguments", [*READS, ["ledger", "upgrade"]])
def test_what_is_no_ledger_is_refused(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], make: object, arguments: list[str]
) -> None:
    place = tmp_path / "thing"
    make(place)  # type: ignore[operator]
    status, said = command(capsys, *arguments, "--ledger", place)
    assert status == 5
    assert said.startswith(f"E401: {place} is not an effluent ledger: ")
    assert [path.name for path in tmp_path.iterdir()] == ["thing"]


@pytest.mark.parametrize("arguments", [*READS, ["ledger", "upgrade"]])
def test_missing_file_is_refused_and_not_made(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], arguments: list[str]
) -> None:
    for place in (tmp_path / "none", tmp_path / "none" / "none"):
        status, said = command(capsys, *arguments, "--ledger", place)
        assert (status, said.splitlines()) == (
            3,
            [f"E202: {place} is not there: make one with: effluent ledger create --ledger {place}"],
        )
    assert list(tmp_path.iterdir()) == []


@pytest.mark.parametrize("make", NO_LEDGERS)
def test_nothing_is_ever_overwritten(
    ledger: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str], make: object
) -> None:
    thing = tmp_path / "thing"
    make(thing)  # type: ignore[operator]
    before = thing.stat()
    for arguments in (
        ["ledger", "create", "--by", "MS", "--name", "Mira", "--ledger", thing],
        ["ledger", "backup", thing, "--ledger", ledger],
        ["ledger", "restore", ledger, "--ledger", thing],
    ):
        status, said = command(capsys, *arguments)
        assert (status, said[:5]) == (4, "E302:")
    assert thing.stat() == before


def test_dangling_link_is_not_written_through(ledger: Path, tmp_path: Path) -> None:
    link = tmp_path / "link"
    link.symlink_to(tmp_path / "elsewhere")
    with pytest.raises(Exception, match="never overwritten"):
        restore(str(ledger), str(link))
    assert not (tmp_path / "elsewhere").exists()


def test_name_that_no_file_can_have_is_refused(tmp_path: Path, ledger: Path) -> None:
    long = str(tmp_path / ("x" * 300))
    with pytest.raises(StorageFailed, match="File name too long"):
        open_ledger(long)
    with pytest.raises(StoreError):
        create(long, MIRA)
    with pytest.raises(StoreError):
        restore(str(ledger), long)
    assert [path.name for path in tmp_path.iterdir()] == ["ledger.effluent"]


def test_folder_that_is_missing_is_named(tmp_path: Path) -> None:
    with pytest.raises(FileMissing, match="make the folder first"):
        create(str(tmp_path / "none" / "ledger"), MIRA)


@pytest.mark.parametrize("size", [0, 50, 100, 4096, 5000, 60_000, 200_000])
def test_truncated_ledger_is_refused(ledger: Path, capsys: pytest.CaptureFixture[str], size: int) -> None:
    os.truncate(ledger, size)
    status, said = command(capsys, "ledger", "verify", "--ledger", ledger)
    assert status == 5
    assert said.startswith(("E401: ", "E405: "))
    assert "effluent ledger restore" in said or "effluent ledger create" in said


def test_edited_byte_of_a_row_is_found(ledger: Path, capsys: pytest.CaptureFixture[str]) -> None:
    content = ledger.read_bytes()
    assert content.count(b"1 Apron Road") == 1
    ledger.write_bytes(content.replace(b"1 Apron Road", b"7 Apron Road"))
    assert command(capsys, "ledger", "verify", "--ledger", ledger)[0] == 1
    with open_ledger(str(ledger)) as opened:
        assert [str(f) for f in prove(opened).findings] == ["entry 2: changed row: site row 1"]


def edited(ledger: Path, seed: int) -> Iterator[int]:
    """Change one byte after another, each from the original."""
    content = ledger.read_bytes()
    chance = random.Random(seed)
    for _ in range(12):
        at = chance.randrange(len(content))
        changed = bytearray(content)
        changed[at] ^= 1 << chance.randrange(8)
        ledger.write_bytes(changed)
        yield at


@pytest.mark.parametrize("seed", range(4))
def test_any_edited_byte_ends_in_an_answer_or_an_error_of_ours(
    ledger: Path, capsys: pytest.CaptureFixture[str], seed: int
) -> None:
    for _ in edited(ledger, seed):
        for arguments in READS:
            status, said = command(capsys, *arguments, "--ledger", ledger)
            assert status in (0, 1, 3, 5)
            assert "Traceback" not in said


def test_every_byte_of_a_header_may_be_edited(ledger: Path, capsys: pytest.CaptureFixture[str]) -> None:
    content = ledger.read_bytes()
    for at in range(16, 100, 3):
        changed = bytearray(content)
        changed[at] ^= 0x55
        ledger.write_bytes(changed)
        assert command(capsys, "ledger", "verify", "--ledger", ledger)[0] in (0, 1, 5)


def test_damaged_backup_is_not_restored(ledger: Path, tmp_path: Path) -> None:
    with open_ledger(str(ledger)) as opened:
        backup(opened, str(tmp_path / "copy"))
    content = (tmp_path / "copy").read_bytes()
    (tmp_path / "copy").write_bytes(content.replace(b"1 Apron Road", b"7 Apron Road"))
    with pytest.raises(LedgerDamaged, match="it does not verify: entry 2: changed row: site row 1"):
        restore(str(tmp_path / "copy"), str(tmp_path / "restored"))
    (tmp_path / "copy").write_bytes(content[:100_000])
    with pytest.raises(LedgerDamaged, match="malformed"):
        restore(str(tmp_path / "copy"), str(tmp_path / "restored"))
    (tmp_path / "copy").write_bytes(b"")
    with pytest.raises(NotALedger):
        restore(str(tmp_path / "copy"), str(tmp_path / "restored"))
    assert sorted(path.name for path in tmp_path.iterdir()) == ["copy", "ledger.effluent"]


def test_restored_backup_is_the_ledger(ledger: Path, tmp_path: Path) -> None:
    with open_ledger(str(ledger)) as opened:
        head = backup(opened, str(tmp_path / "copy"))
    report = restore(str(tmp_path / "copy"), str(tmp_path / "restored"))
    with open_ledger(str(tmp_path / "restored")) as restored:
        assert restored.head() == head
    assert (report.entries, report.digest) == (head.sequence, head.digest)
    assert upgrade(str(tmp_path / "restored"))[1] == ""
