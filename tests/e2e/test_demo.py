"""``effluent demo`` as a user starts it: the same in every process, and its own commands work."""

from __future__ import annotations

import os
import re
import shlex
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from effluent.__main__ import run as main
from tests.staged import SEED, staged

STATUS = {"check --sample": 1, "check --container": 1}


def run(*arguments: str, folder: Path, **variables: str) -> subprocess.CompletedProcess[str]:
    command = [sys.executable, "-m", "effluent", *arguments]
    environment = {**os.environ, **variables}
    return subprocess.run(
        command, cwd=folder, env=environment, capture_output=True, text=True, encoding="utf-8", check=False
    )


@pytest.fixture(scope="module")
def once(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return staged(tmp_path_factory)


@pytest.fixture(scope="module")
def again(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, str]:
    """The same demo made by another process with another hash seed, and what it printed."""
    folder = tmp_path_factory.mktemp("again")
    made = run("demo", "two years", "--seed", str(SEED), folder=folder, PYTHONHASHSEED="4711", PYTHONUTF8="1")
    assert (made.returncode, made.stderr) == (0, "")
    return folder / "two years", made.stdout


def digest(story: str) -> str:
    return re.findall("head digest ([0-9a-f]{64})", story)[0]


def test_same_seed_gives_the_same_ledger_and_papers(once: Path, again: tuple[Path, str]) -> None:
    other, printed = again
    assert digest(printed) == digest((once / "story.txt").read_text(encoding="utf-8"))
    for path in [*once.glob("paper/*.pdf"), *once.glob("laboratory/*")]:
        assert (other / path.relative_to(once)).read_bytes() == path.read_bytes(), path.name


def test_story_is_printed_and_kept(again: tuple[Path, str]) -> None:
    folder, printed = again
    assert (folder / "story.txt").read_text(encoding="utf-8") == printed
    assert "Local environmental regulations govern" in printed
    assert "invented" in printed.splitlines()[1]


def test_every_command_of_the_story_runs(
    again: tuple[Path, str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder, printed = again
    shutil.copytree(folder, tmp_path / folder.name)
    monkeypatch.chdir(tmp_path)
    commands = re.findall(r"^    \S*(?:python\S* -m )?effluent (.+)$", printed, flags=re.MULTILINE)
    assert len(commands) == 12
    for command in commands:
        wanted = STATUS.get(" ".join(command.split()[:2]), 0)
        assert main(shlex.split(command)) == wanted, command


def test_folder_in_use_is_refused(once: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["demo", str(once)]) == 4
    assert capsys.readouterr().err.startswith(f"E302: {once} exists and is never overwritten")
