"""The process is killed at the n-th step, for every n until the work is done."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from effluent.services.ledger import open_ledger, prove, restore
from effluent.store import migration
from effluent.store.database import connect
from effluent.store.migration import head_revision, revision_of
from tests.docs.source import ROOT
from tests.fault.book import SITE, filled_ledger

LATER = "20991231_add_note"
MIGRATION = f'''
import sqlalchemy as sa
from alembic import op

revision = "{LATER}"
down_revision = "{head_revision()}"


def upgrade():
    op.create_table("note", sa.Column("text", sa.Text()))
    with op.batch_alter_table("file", recreate="always") as batch:
        batch.add_column(sa.Column("later", sa.Text(), nullable=True))
'''

pytestmark = pytest.mark.skipif(not hasattr(os, "fork"), reason="needs fork")


@pytest.fixture
def top(tmp_path: Path) -> Path:
    (tmp_path / "start").mkdir()
    filled_ledger(str(tmp_path / "start" / "ledger")).close()
    return tmp_path


def turns(job: str, top: Path, stride: int = 1) -> list[Path]:
    """Return the folders that the turns left, the last one of the turn that lived."""
    command = [sys.executable, "-m", "tests.fault.killed", job, str(top), str(stride)]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    lines = [tuple(map(int, line.split())) for line in done.stdout.splitlines()]
    assert done.stderr == ""
    assert [status for _, status in lines] == [-9] * (len(lines) - 1) + [0]
    return [top / str(number) for number, _ in lines]


def entries(place: Path) -> int:
    """Open a ledger, which recovers it, and return how many entries it holds; everything must."""
    with open_ledger(str(place)) as ledger:
        report = prove(ledger)
    assert report.findings == ()
    return report.entries


@pytest.mark.parametrize(("job", "stride"), [("record", 1), ("measure", 2)])
def test_entry_is_there_whole_or_not_at_all(top: Path, job: str, stride: int) -> None:
    folders = turns(job, top, stride)
    found = [entries(folder / "ledger") for folder in folders]
    assert len(folders) >= 10
    assert found == sorted(found)
    assert (found[0], found[-1]) == (7, 8)


def test_ledger_goes_on_after_a_kill(top: Path) -> None:
    for folder in turns("record", top, 6):
        with open_ledger(str(folder / "ledger")) as ledger:
            ledger.write(lambda w: w.record(replace(SITE, code="EAS")), by="MS", action="add")
        entries(folder / "ledger")


@pytest.mark.parametrize(("job", "stride", "count"), [("create", 25, 1), ("backup", 2, 7), ("restore", 3, 7)])
def test_new_file_appears_whole_or_not_at_all(top: Path, job: str, stride: int, count: int) -> None:
    folders = turns(job, top, stride)
    there = [folder for folder in folders if (folder / "new").exists()]
    assert folders[-1] in there
    assert [entries(folder / "new") for folder in there] == [count] * len(there)
    assert [entries(folder / "ledger") for folder in folders] == [7] * len(folders)
    assert len(folders) > 5
    assert {p.name for p in folders[-1].iterdir()} <= {"ledger", "new", "ledger-shm", "ledger-wal"}


def test_upgrade_is_done_or_not_and_its_copy_is_whole(top: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    before = head_revision()
    shutil.copytree(ROOT / "migrations", top / "later", ignore=shutil.ignore_patterns("__pycache__"))
    (top / "later" / "versions" / f"{LATER}.py").write_text(MIGRATION)
    folders = turns("upgrade", top, 5)
    monkeypatch.setattr(migration, "_location", lambda: top / "later")
    found = []
    for folder in folders:
        place = str(folder / "ledger")
        found.append(revision_of(connect(place), place))
        if (copy := Path(f"{place}.before-{LATER}")).exists():
            assert restore(str(copy), str(folder / "restored")).entries == 7
        else:
            assert found[-1] == before
    assert (found[0], found[-1]) == (before, LATER)
    assert found == sorted(found)
