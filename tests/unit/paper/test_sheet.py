"""The plain values load nothing and cannot change."""

import dataclasses
import subprocess
import sys

import pytest

from tests.unit.paper.sheets import sheet


def test_sheet_module_loads_without_the_pdf_library():
    program = "import sys, effluent.paper.sheet; raise SystemExit('reportlab' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", program], check=False).returncode == 0


def test_sheet_is_frozen():
    with pytest.raises(dataclasses.FrozenInstanceError):
        sheet().code = "M-0008"
