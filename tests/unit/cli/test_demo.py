"""The command ``demo`` prints the story, and calls itself in it as it can be called again."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Any

import pytest

from effluent.__main__ import run
from effluent.services import demo
from effluent.services.demo.play import Facts


@pytest.fixture(autouse=True)
def _made_in_no_time(monkeypatch: pytest.MonkeyPatch) -> None:
    def make(folder: str, **asked: Any) -> demo.Demo:
        return demo.Demo(Path(folder), Facts(), f"{folder} {asked['seed']} {asked['program']}\n")

    monkeypatch.setattr(demo, "make", make)


def test_story_is_printed(capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("shutil.which", lambda _: "/usr/bin/effluent")
    assert run(["demo", "out", "--seed", "3"]) == 0
    assert capsys.readouterr() == ("out 3 effluent\n", "")


@pytest.mark.parametrize(
    ("started", "program"),
    [
        (".venv/bin/effluent", ".venv/bin/effluent"),
        ("my tools/effluent", "'my tools/effluent'"),
        ("site/effluent/__main__.py", f"{sys.executable} -m effluent"),
    ],
)
def test_command_off_the_path_is_called_as_it_was_started(
    started: str, program: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("shutil.which", lambda _: None)
    monkeypatch.setattr("sys.argv", [started])
    assert run(["demo", "out"]) == 0
    assert capsys.readouterr().out == f"out 1 {program}\n"


def test_waiting_is_announced_on_a_terminal(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("sys.stderr.isatty", lambda: True)
    assert run(["demo", "out"]) == 0
    assert "this takes a while" in capsys.readouterr().err


@pytest.mark.parametrize("given", [[], ["out", "--seed", "many"], ["out", "--seed", "-1"], ["a", "b"]])
def test_wrong_arguments_are_refused(given: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["demo", *given]) == 2
    assert capsys.readouterr().out == ""
