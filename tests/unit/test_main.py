from __future__ import annotations

import errno
import os
import subprocess
import sys
from collections.abc import Callable
from typing import NoReturn

import click
import pytest

from effluent import __main__ as face
from effluent.cli.group import root
from effluent.errors import FileRefused, RowError, StorageFailed, ValueRefused


def raising(error: BaseException) -> Callable[[], NoReturn]:
    def body() -> NoReturn:
        raise error

    return body


def run_body(monkeypatch: pytest.MonkeyPatch, body: Callable[[], object]) -> int:
    """Run a command line whose one command has this body."""
    monkeypatch.setattr(root, "get_command", lambda context, name: click.Command(name, callback=body))
    return face.run(["try"])


def effluent(*arguments: str, **options: object) -> subprocess.CompletedProcess[bytes]:
    command = [sys.executable, "-m", "effluent", *arguments]
    return subprocess.run(command, check=False, timeout=60, **options)  # type: ignore[call-overload, no-any-return]


def test_command_s_number_is_the_exit_status(monkeypatch: pytest.MonkeyPatch) -> None:
    assert run_body(monkeypatch, lambda: 1) == 1
    assert run_body(monkeypatch, lambda: None) == 0
    assert run_body(monkeypatch, lambda: click.get_current_context().exit(1)) == 1


@pytest.mark.parametrize(
    ("error", "status", "printed"),
    [
        (ValueRefused("pH", "a", "write 7"), 2, "E101: pH 'a' is not accepted: write 7\n"),
        (
            StorageFailed("x\x1b[2J", "full"),
            5,
            "E406: x\\x1b[2J cannot be written (full); nothing was recorded\n",
        ),
        (
            FileRefused("lab.csv", (RowError(2, "unit", "", "say which"),)),
            2,
            "E104: lab.csv: 1 bad cell; nothing was recorded\n  row 2, unit '': say which\n",
        ),
    ],
)
def test_error_is_code_and_text(
    monkeypatch: pytest.MonkeyPatch,
    capsys: pytest.CaptureFixture[str],
    error: Exception,
    status: int,
    printed: str,
) -> None:
    assert run_body(monkeypatch, raising(error)) == status
    assert capsys.readouterr() == ("", printed)


@pytest.mark.parametrize("error", [KeyboardInterrupt(), EOFError(), click.Abort()])
def test_interruption_is_quiet(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str], error: BaseException
) -> None:
    assert run_body(monkeypatch, raising(error)) == 130
    assert capsys.readouterr() == ("", "")


def test_reader_that_went_away_is_quiet(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(face, "_close", lambda stream: None)
    assert run_body(monkeypatch, raising(BrokenPipeError(errno.EPIPE, "gone"))) == 141
    assert capsys.readouterr() == ("", "")


def test_full_disk_under_the_output_is_one_line(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(face, "_close", lambda stream: None)
    assert run_body(monkeypatch, raising(OSError(errno.ENOSPC, "No space left on device"))) == 5
    assert capsys.readouterr().err == "E406: the output cannot be written (No space left on device)\n"


@pytest.mark.parametrize("bug", [ZeroDivisionError(), PermissionError(errno.EACCES, "no")])
def test_bug_stays_what_it_is(monkeypatch: pytest.MonkeyPatch, bug: Exception) -> None:
    with pytest.raises(type(bug)):
        run_body(monkeypatch, raising(bug))


def test_module_runs_as_a_program() -> None:
    ran = effluent("sitee", capture_output=True)
    assert (ran.returncode, ran.stdout) == (2, b"")
    assert ran.stderr.splitlines()[-1] == b"Error: no command 'sitee'; did you mean site?"


def test_closed_pipe_ends_quietly() -> None:
    reader, writer = os.pipe()
    os.close(reader)
    ran = effluent("--help", stdout=writer, stderr=subprocess.PIPE)
    os.close(writer)
    assert (ran.returncode, ran.stderr) == (141, b"")


def test_full_device_ends_in_one_line() -> None:
    if not os.path.exists("/dev/full"):
        pytest.skip("this system has no device that is always full")
    with open("/dev/full", "wb") as full:
        ran = effluent("--help", stdout=full, stderr=subprocess.PIPE)
    assert (ran.returncode, ran.stderr) == (
        5,
        b"E406: the output cannot be written (No space left on device)\n",
    )


def test_argument_of_broken_bytes_is_spelled_out() -> None:
    ran = effluent(os.fsdecode(b"\xff\xfe"), capture_output=True)
    assert ran.returncode == 2
    assert b"no command '\\udcff\\udcfe'" in ran.stderr


def test_terminal_of_few_characters_is_no_obstacle() -> None:
    few = {**os.environ, "PYTHONIOENCODING": "latin-1", "PYTHONUTF8": "0"}
    ran = effluent("convert", "1", "名", "L", capture_output=True, env=few)
    assert ran.returncode == 2
    assert ran.stderr.startswith(b"E102: unit '\\u540d' is not known")


def test_complaint_that_cannot_be_written_keeps_its_exit_status() -> None:
    if not os.path.exists("/dev/full"):
        pytest.skip("this system has no device that is always full")
    with open("/dev/full", "wb") as full:
        assert effluent("nothing", stderr=full).returncode == 2
        assert effluent("--help", stdout=full, stderr=full).returncode == 5


def test_file_of_bad_rows_is_named_and_stays_readable(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    rows = tuple(RowError(row, "unit", "", "say which") for row in range(2, 1_002))
    assert run_body(monkeypatch, raising(FileRefused("lab.csv", rows, 7))) == 2
    lines = capsys.readouterr().err.splitlines()
    assert lines[0] == "E104: lab.csv: 1007 bad cells; nothing was recorded"
    assert lines[-1] == "  and 957 more; mend these first, and import again"
    assert len(lines) == 52
