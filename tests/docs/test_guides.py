"""The guides of the three roles can be followed word by word, in an empty folder."""

from __future__ import annotations

import re
import shlex
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

import pytest

from effluent.__main__ import run
from tests.docs.source import ROOT

GUIDES = sorted(path.name for path in (ROOT / "docs").glob("*-guide.md"))
FENCE = re.compile(r"^```(?:sh|console)\n(.*?)^```$", re.MULTILINE | re.DOTALL)
WRITTEN = re.compile(r"cat > (\S+) <<'?(\w+)'?\n(.*?\n)\2$", re.MULTILINE | re.DOTALL)
EXPECTED = re.compile(r"\s+# exit(?: status)? (\d+)\s*$")


class Step(NamedTuple):
    """A command with its expected exit status, or a file to write."""

    words: tuple[str, ...]
    status: int = 0
    text: str = ""


def steps(guide: str) -> Iterator[Step]:
    for block in FENCE.findall((ROOT / "docs" / guide).read_text(encoding="utf-8")):
        rest = block
        while found := WRITTEN.search(rest):
            yield from commands(rest[: found.start()])
            yield Step(("cat", found[1]), text=found[3])
            rest = rest[found.end() :]
        yield from commands(rest)


def commands(text: str) -> Iterator[Step]:
    for line in text.replace("\\\n", " ").splitlines():
        typed = line.removeprefix("$ ")
        expected = EXPECTED.search(typed)
        words = tuple(shlex.split(typed, comments=True))
        if words:
            yield Step(words, int(expected[1]) if expected else 0)


def follow(step: Step, monkeypatch: pytest.MonkeyPatch) -> int:
    """Do what a shell would do with the few things that guides use."""
    first, *rest = step.words
    if first == "cat":
        Path(rest[0]).write_text(step.text, encoding="utf-8")
    elif first == "export":
        for assignment in rest:
            monkeypatch.setenv(*assignment.split("=", 1))
    else:
        assert first == "effluent", f"the guide uses {first}, which this test does not know"
        return run(rest)
    return 0


@pytest.mark.parametrize("guide", GUIDES)
def test_guide_can_be_followed_word_by_word(
    guide: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    for step in steps(guide):
        status = follow(step, monkeypatch)
        assert status == step.status, f"{shlex.join(step.words)}\n{capsys.readouterr().err}"


def test_guides_of_all_three_roles_are_there() -> None:
    roles = {f"{role}-guide.md" for role in ("supervisor", "officer", "contractor")}
    assert roles <= set(GUIDES)


@pytest.mark.parametrize("guide", GUIDES)
def test_guide_says_first_that_local_regulations_govern(guide: str) -> None:
    opening = (ROOT / "docs" / guide).read_text(encoding="utf-8").partition("\n## ")[0]
    assert "Local environmental regulations govern" in " ".join(opening.split())
