"""A long file read by a second process: the same chunks, whatever becomes of that process."""

from __future__ import annotations

import io
import pickle
import subprocess
from pathlib import Path

import pytest

from effluent.errors import ValueRefused
from effluent.intake import relay
from effluent.intake.layout import PLAIN
from effluent.intake.relay import chunks_ahead, serve
from effluent.intake.result import ResultReader

ROWS = 45_000


@pytest.fixture(autouse=True)
def every_file_is_long(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(relay, "_LONG", 0)


@pytest.fixture
def started(monkeypatch: pytest.MonkeyPatch) -> list[subprocess.Popen[bytes]]:
    """Return the second processes, as they are started."""
    found: list[subprocess.Popen[bytes]] = []
    start = subprocess.Popen

    def popen(*args: object, **kwargs: object) -> subprocess.Popen[bytes]:
        found.append(start(*args, **kwargs))  # type: ignore[call-overload]
        return found[-1]

    monkeypatch.setattr(subprocess, "Popen", popen)
    return found


def reader_of(folder: Path, *, last: str = "") -> ResultReader:
    long = "a laboratory with a long name so that the file takes more than one message"
    lines = [f"S-{n},zinc,total,0.{n},mg/L,{long}" for n in range(1, ROWS + 1)]
    (folder / "lab.csv").write_text(
        "\n".join(["sample,analyte,fraction,value,unit,laboratory", *lines, last])
    )
    return ResultReader(folder / "lab.csv", PLAIN, time_zone="UTC")


def test_second_process_reads_the_same_chunks(tmp_path: Path, started: list[subprocess.Popen[bytes]]) -> None:
    reader = reader_of(tmp_path)
    assert list(chunks_ahead(reader)) == list(reader.chunks())
    assert [process.args[1:] for process in started] == [["-P", "-m", "effluent.intake.relay"]]  # type: ignore[index]


def test_file_is_read_to_its_end_when_the_second_process_is_killed(
    tmp_path: Path, started: list[subprocess.Popen[bytes]]
) -> None:
    reader = reader_of(tmp_path)
    chunks = chunks_ahead(reader)
    first = next(chunks)
    started[0].kill()
    assert [first, *chunks] == list(reader.chunks())


def test_file_is_read_when_no_second_process_starts(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("sys.executable", str(tmp_path / "absent"))
    reader = reader_of(tmp_path)
    assert list(chunks_ahead(reader)) == list(reader.chunks())


def test_short_file_needs_no_second_process(
    tmp_path: Path, started: list[subprocess.Popen[bytes]], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(relay, "_LONG", 10_000_000)
    reader = reader_of(tmp_path)
    assert sum(map(len, chunks_ahead(reader))) == ROWS
    assert started == []


def test_table_that_breaks_off_is_refused_in_the_same_words(tmp_path: Path) -> None:
    reader = reader_of(tmp_path, last='S-1,zinc,total,"0.1,mg/L,')
    with pytest.raises(ValueRefused) as plain:
        list(reader.chunks())
    with pytest.raises(ValueRefused) as relayed:
        list(chunks_ahead(reader))
    assert str(relayed.value) == str(plain.value)


def test_second_process_ends_with_whoever_asked(
    tmp_path: Path, started: list[subprocess.Popen[bytes]]
) -> None:
    chunks = chunks_ahead(reader_of(tmp_path))
    next(chunks)
    chunks.close()  # type: ignore[attr-defined]
    assert started[0].returncode is not None


def test_what_is_served_ends_with_nothing(tmp_path: Path) -> None:
    reader, target = reader_of(tmp_path), io.BytesIO()
    serve(io.BytesIO(pickle.dumps(reader)), target)
    target.seek(0)
    served = []
    while (some := pickle.load(target)) is not None:
        served += some
    assert served == list(reader.chunks())
