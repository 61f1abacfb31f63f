from __future__ import annotations

import click
import pytest

from effluent import __version__
from effluent.__main__ import run
from effluent.cli.group import TABLE, root
from effluent.settings import CAUTION


@pytest.mark.parametrize("name", TABLE)
def test_table_says_what_the_command_says(name: str) -> None:
    command = root.get_command(click.Context(root), name)
    assert command is not None
    assert (command.name, (command.help or "").splitlines()[0]) == (name, TABLE[name][1])


def test_help_lists_the_table_and_ends_with_the_caution(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["--help"]) == 0
    words = " ".join(capsys.readouterr().out.split())
    assert words.endswith(CAUTION)
    assert all(f" {name} {line}" in words for name, (_, line) in TABLE.items())


def test_version_is_the_package_s(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["--version"]) == 0
    assert capsys.readouterr().out == f"effluent {__version__}\n"


@pytest.mark.parametrize(
    ("arguments", "complaint"),
    [
        (["sitee"], "no command 'sitee'; did you mean site?"),
        (["ENGIN"], "no command 'ENGIN'; did you mean engine?"),
        (["site", "shwo"], "no command 'shwo'; did you mean show?"),
        (["site", "zzz"], "no command 'zzz'; there are: add, list, show, amend, void"),
    ],
)
def test_unknown_command_proposes_near_names(
    capsys: pytest.CaptureFixture[str], arguments: list[str], complaint: str
) -> None:
    assert run(arguments) == 2
    assert capsys.readouterr().err.splitlines()[-1] == f"Error: {complaint}"


@pytest.mark.parametrize("name", ["\x1b[31m", "\udc80", "x" * 10_000_000, "🛫", "", "-"], ids=range(6))
def test_hostile_command_is_refused_in_one_paragraph(capsys: pytest.CaptureFixture[str], name: str) -> None:
    assert run([name]) == 2
    lines = capsys.readouterr().err.splitlines()
    assert len(lines) <= 4
    assert all(line.isprintable() and len(line) < 1200 for line in lines)


def test_no_argument_shows_the_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert run([]) == 2
    assert "Commands:" in capsys.readouterr().err
