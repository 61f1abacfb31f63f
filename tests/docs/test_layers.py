"""The import contracts of pyproject.toml hold, and importing stays light."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from collections.abc import Iterator
from contextlib import contextmanager

import pytest
from importlinter.cli import EXIT_STATUS_SUCCESS, lint_imports

from tests.docs.source import ROOT

HEAVY = {"alembic", "numpy", "pandas", "pint", "reportlab", "sqlalchemy"}


@contextmanager
def same_path() -> Iterator[None]:
    """The linter puts the current directory on the path; take it off again."""
    before = sys.path.copy()
    yield
    sys.path[:] = before


def test_contracts_hold(monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    monkeypatch.chdir(ROOT)
    with same_path():
        status = lint_imports(config_filename=str(ROOT / "pyproject.toml"), no_cache=True, no_logo=True)
    assert status == EXIT_STATUS_SUCCESS, capsys.readouterr().out


def test_every_package_and_module_has_its_layer() -> None:
    settings = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))
    layered = settings["tool"]["importlinter"]["contracts"][0]["layers"]
    named = {name.strip() for layer in layered for name in layer.split("|")}
    top = [path for path in (ROOT / "effluent").iterdir() if path.suffix == ".py" or any(path.glob("*.py"))]
    assert {f"effluent.{path.stem}" for path in top if path.name != "__init__.py"} == named


def loaded_by(statement: str) -> set[str]:
    """Return the top-level packages that a fresh interpreter holds after it ran this."""
    script = f"import sys\n{statement}\nprint(*{{name.split('.')[0] for name in sys.modules}})"
    ran = subprocess.run([sys.executable, "-c", script], capture_output=True, check=True, text=True, cwd="/")
    return set(ran.stdout.splitlines()[-1].split())


def test_domain_loads_the_standard_library_only() -> None:
    extra = loaded_by("import effluent.domain") - loaded_by("") - set(sys.stdlib_module_names)
    assert extra == {"effluent"}


def test_help_loads_nothing_heavy() -> None:
    show = (
        "sys.argv = ['effluent', '--help']\n"
        "from effluent.__main__ import main\n"
        "try: main()\n"
        "except SystemExit: pass"
    )
    assert loaded_by(show) & HEAVY == set()
