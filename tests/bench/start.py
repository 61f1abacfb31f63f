"""The start of the command line."""

from __future__ import annotations

import sys
from pathlib import Path

from tests.bench.race import Race, Side, work

EFFLUENT = str(Path(sys.executable).parent / "effluent")


@work("effluent --help", budget=1.5)
def show_help(folder: Path, rows: int) -> Race:
    """Against an interpreter that only imports click; the number of rows does not matter."""
    return Race(floor=Side([sys.executable, "-c", "import click"]), ours=Side([EFFLUENT, "--help"]))
