"""A copy installed from the wheel, away from the checkout, makes, proves and upgrades a ledger."""

from __future__ import annotations

import os
import subprocess
import sys
import sysconfig
import venv
from pathlib import Path

import pytest

from tests.docs.source import ROOT

LATER = """
import sqlalchemy as sa
from alembic import op

revision = "20991231_add_note"
down_revision = "{before}"


def upgrade():
    op.create_table("note", sa.Column("text", sa.Text()))
"""


@pytest.fixture(scope="module")
def installed(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """The command of a fresh environment, which sees our dependencies but not our checkout."""
    folder = tmp_path_factory.mktemp("installed")
    build = [sys.executable, "-m", "hatchling", "build", "--target", "wheel", "--directory", str(folder)]
    subprocess.run(build, cwd=ROOT, check=True, capture_output=True)
    [wheel] = folder.glob("*.whl")
    venv.create(folder / "fresh", with_pip=False)
    python = folder / "fresh" / "bin" / "python"
    install = ["-m", "pip", "--python", str(python), "install", "--no-deps", "--no-index", str(wheel)]
    subprocess.run([sys.executable, *install], check=True, capture_output=True)
    # Dependencies come after what is installed; an editable install there is not followed.
    packages = sysconfig.get_path("purelib", vars={"base": str(folder / "fresh")})
    line = f"import sys; sys.path.append({sysconfig.get_path('purelib')!r})\n"
    (Path(packages) / "dependencies.pth").write_text(line, encoding="utf-8")
    return folder / "fresh" / "bin" / "effluent"


def run(command: Path, *arguments: object) -> str:
    environment = {"PATH": os.environ["PATH"], "LANG": "C.UTF-8"}
    done = subprocess.run(
        [str(command), *map(str, arguments)],
        cwd=command.parent,
        env=environment,
        capture_output=True,
        text=True,
        check=False,
    )
    assert (done.returncode, done.stderr) == (0, "")
    return done.stdout


def package(command: Path) -> Path:
    """Return where the installed package is, as its own interpreter finds it."""
    ask = "import effluent; print(effluent.__file__)"
    python = command.parent / "python"
    done = subprocess.run([str(python), "-I", "-c", ask], capture_output=True, text=True, check=True)
    return Path(done.stdout.strip()).parent


def test_installed_copy_is_not_the_checkout(installed: Path) -> None:
    assert package(installed).is_relative_to(installed.parent.parent)


def test_installed_copy_makes_proves_and_upgrades_a_ledger(installed: Path, tmp_path: Path) -> None:
    place = tmp_path / "ledger.effluent"
    made = run(installed, "ledger", "create", "--by", "MS", "--name", "Mira Sand", "--ledger", place)
    assert made.endswith("is made; its first entry records person MS\n")
    assert "everything holds" in run(installed, "ledger", "verify", "--ledger", place)
    versions = package(installed) / "migrations" / "versions"
    before = max(path.stem for path in versions.glob("2*.py"))
    assert run(installed, "ledger", "upgrade", "--ledger", place) == f"the ledger has the schema {before}\n"
    (versions / "20991231_add_note.py").write_text(LATER.format(before=before), encoding="utf-8")
    said = run(installed, "ledger", "upgrade", "--ledger", place)
    assert said == (
        f"the ledger as it was is kept in {place}.before-20991231_add_note\n"
        "the ledger has the schema 20991231_add_note\n"
    )
    assert "everything holds" in run(installed, "ledger", "verify", "--ledger", place)
