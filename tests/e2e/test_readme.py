"""The README can be followed word by word: every command of its tour runs, and leaves as it says."""

from __future__ import annotations

import re
import shlex
import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.settings import CAUTION, LEDGER_VARIABLE
from tests.docs.source import ROOT
from tests.staged import staged

README = (ROOT / "README.md").read_text(encoding="utf-8")
STATUS = re.compile(r"\s+# status (\d)$")


def commands() -> Iterator[tuple[list[str], int]]:
    """Yield the arguments of each command of the tour, and the status it is said to leave."""
    for block in re.findall(r"```sh\n(.+?)```", README, flags=re.DOTALL):
        for line in block.replace("\\\n", " ").strip().split("\n"):
            said = STATUS.search(line)
            words = shlex.split(STATUS.sub("", line))
            if words[0] == "effluent":
                yield words[1:], int(said[1]) if said else 0


@pytest.fixture
def demo(tmp_path_factory: pytest.TempPathFactory, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A copy of the demo, below the current folder, as the README leaves it."""
    shutil.copytree(staged(tmp_path_factory), tmp_path / "demo")
    monkeypatch.chdir(tmp_path)
    monkeypatch.setenv(LEDGER_VARIABLE, "demo/demo.ledger")
    return tmp_path / "demo"


def test_every_command_of_the_tour_leaves_as_it_says(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    [witness] = re.findall(r"--witness (\S+)", (demo / "story.txt").read_text(encoding="utf-8"))
    tour = list(commands())
    assert len(tour) >= 18
    for words, status in tour:
        given = [witness if word == "ENTRY:DIGEST" else word for word in words]
        assert run(given) == status, (given, capsys.readouterr().err)
    assert (demo / "M-0002.pdf").read_bytes().startswith(b"%PDF")


def test_amended_wash_of_the_tour_was_amended(demo: Path, capsys: pytest.CaptureFixture[str]) -> None:
    shown = [words for words, _ in commands() if words[:2] == ["wash", "show"]]
    for words, caught in zip(shown, ("52 ± 1 L", "25 ± 1 L"), strict=True):
        run(words)
        assert re.search(rf"^caught: +{caught}$", capsys.readouterr().out, flags=re.MULTILINE)


def test_first_lines_say_the_job_and_the_caution() -> None:
    said = " ".join(README.replace("**", "").split())
    first = CAUTION.split(". ")[0]
    assert said.index("is a ledger") < said.index(first) < said.index("python3 -m venv")


def test_every_link_leads_somewhere() -> None:
    targets = re.findall(r"\]\(([^)#]+)\)", README)
    assert targets
    assert [target for target in targets if not (ROOT / target).exists()] == []
