"""docs/dependencies.md names what pyproject.toml asks for, and no more."""

from __future__ import annotations

import re
import tomllib

import pytest

from tests.docs.source import ROOT

PAGE = (ROOT / "docs" / "dependencies.md").read_text(encoding="utf-8")


def asked_for() -> set[str]:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    extras = [requirement for extra in project["optional-dependencies"].values() for requirement in extra]
    return {re.split(r"[\[<>=~!; ]", asked)[0] for asked in [*project["dependencies"], *extras]}


def rows() -> dict[str, list[str]]:
    """The cells of each table row, by the package in its first cell."""
    found = re.findall(r"^\| `([\w-]+)` \|(.+)\|$", PAGE, flags=re.MULTILINE)
    return {name: [cell.strip() for cell in rest.split("|")] for name, rest in found}


def test_page_names_each_dependency() -> None:
    assert set(rows()) == asked_for()


@pytest.mark.parametrize("name", rows())
def test_each_has_its_licence_and_reason(name: str) -> None:
    assert all(rows()[name])
