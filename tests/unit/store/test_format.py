"""The verifier in the format's document, which shares no code with the package, agrees with `verify`."""

from __future__ import annotations

import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from effluent.services.ledger import open_ledger, prove
from tests.docs.source import ROOT
from tests.fault.book import filled_ledger, forge, tamper
from tests.fault.tampering import TAMPERINGS

PAGE = ROOT / "docs" / "ledger-format.md"


def script() -> str:
    [block] = re.findall(
        r"^```python\n(.*?)^```$", PAGE.read_text(encoding="utf-8"), re.MULTILINE | re.DOTALL
    )
    return str(block)


@pytest.fixture(scope="module")
def original(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("original") / "ledger.effluent"
    filled_ledger(str(path)).close()
    return path


@pytest.fixture
def ledger(original: Path, tmp_path: Path) -> str:
    return str(shutil.copy(original, tmp_path / "copy.effluent"))


@pytest.fixture
def check(tmp_path: Path) -> Path:
    path = tmp_path / "check.py"
    path.write_text(script(), encoding="utf-8")
    return path


def answer(check: Path, *arguments: str) -> tuple[int, str]:
    command = [sys.executable, "-I", str(check), *arguments]
    done = subprocess.run(command, capture_output=True, text=True, check=False, cwd=check.parent)
    assert done.stderr == ""
    return done.returncode, done.stdout


def test_script_is_short_and_needs_the_standard_library_only() -> None:
    lines = [line for line in script().splitlines() if line.strip()]
    assert len(lines) <= 45
    imported = re.findall(r"^(?:import|from) (.*)$", script(), re.MULTILINE)
    assert {name.strip() for line in imported for name in line.split(",")} <= sys.stdlib_module_names


def test_intact_ledger_holds(check: Path, ledger: str) -> None:
    assert answer(check, ledger) == (0, "everything holds\n")


@pytest.mark.parametrize("name", TAMPERINGS)
def test_script_and_verify_agree_on_tampering(check: Path, ledger: str, name: str) -> None:
    with open_ledger(ledger) as opened:
        tamper(opened, *TAMPERINGS[name][0])
        assert prove(opened).findings
    status, said = answer(check, ledger)
    assert status == 1
    assert "everything holds" not in said


def test_recomputed_tail_is_caught_by_a_witness(check: Path, ledger: str) -> None:
    opened = open_ledger(ledger)
    page = opened.head()
    witness = f"{page.sequence}:{page.digest[:12]}"
    assert answer(check, ledger, witness) == (0, "everything holds\n")
    forge(opened, "UPDATE result SET text = '0.01' WHERE \"row\" = 2")
    assert answer(check, ledger) == (0, "everything holds\n")
    assert answer(check, ledger, witness) == (1, "entry 7 is not the one that the page shows\n")


def test_cut_tail_is_caught_by_a_witness(check: Path, ledger: str) -> None:
    opened = open_ledger(ledger)
    page = opened.head()
    tamper(opened, "DELETE FROM result WHERE entry = 7", "DELETE FROM entry WHERE sequence = 7")
    assert answer(check, ledger)[0] == 0
    assert answer(check, ledger, f"7:{page.digest}")[0] == 1
    assert prove(opened).findings == ()
    assert prove(opened, witness=f"7:{page.digest}").findings[0].kind == "missing entry"
