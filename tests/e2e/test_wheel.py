"""The built wheel carries everything that the checkout's package has, and nothing else."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from zipfile import ZipFile

import pytest

from tests.docs.source import ROOT, tracked


@pytest.fixture(scope="module")
def carried(tmp_path_factory: pytest.TempPathFactory) -> set[str]:
    """The files of a wheel built from this checkout, without its own metadata."""
    folder = tmp_path_factory.mktemp("wheel")
    build = [sys.executable, "-m", "hatchling", "build", "--target", "wheel", "--directory", str(folder)]
    subprocess.run(build, cwd=ROOT, check=True, capture_output=True)
    [wheel] = folder.iterdir()
    with ZipFile(wheel) as archive:
        return {name for name in archive.namelist() if ".dist-info/" not in name}


def shipped(path: str) -> str:
    return path if path.startswith("effluent/") else f"effluent/{path}"


def test_wheel_carries_each_file_of_the_package(carried: set[str]) -> None:
    assert {shipped(path) for path in tracked("effluent", "migrations")} - carried == set()


def test_wheel_carries_nothing_else(carried: set[str]) -> None:
    there = [p for top in ("effluent", "migrations") for p in (ROOT / top).rglob("*") if p.is_file()]
    assert carried - {shipped(path.relative_to(ROOT).as_posix()) for path in there} == set()


@pytest.mark.parametrize(
    "pattern",
    [
        "effluent/py.typed",
        "effluent/migrations/versions/*.py",
        "effluent/reference/*.csv",
        "*.ttf",
    ],
)
def test_wheel_carries_what_an_installed_copy_needs(carried: set[str], pattern: str) -> None:
    assert [name for name in carried if Path(name).match(pattern)]
