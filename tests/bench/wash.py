"""Recording a wash in a ledger full of results."""

from __future__ import annotations

from pathlib import Path

from effluent.domain import Engine
from effluent.services.ledger import open_ledger
from effluent.services.register import add
from tests.bench.race import Race, Side, work
from tests.bench.start import EFFLUENT
from tests.bench.verify import fill


@work("record one wash", budget=1.2)
def record_wash(folder: Path, rows: int) -> Race:
    """Against the same on a ledger without results; each turn adds one wash to either."""
    return Race(floor=recording(folder, 0), ours=recording(folder, rows))


@work("record one wash, ten times the results", budget=11)
def grow(folder: Path, rows: int) -> Race:
    """Against our own work on a tenth of the results."""
    return Race(floor=recording(folder, rows // 10), ours=recording(folder, rows))


def recording(folder: Path, results: int) -> Side:
    """Make a ledger with results and an engine, and return the recording of a wash as a command."""
    place = folder / f"{results}.ledger"
    fill(place, results)
    with open_ledger(str(place)) as ledger:
        add(ledger, Engine(code="E", type_label="Invented Turboprop", site="N"), by="P")
    return Side(command(place))


def command(place: Path) -> list[str]:
    """Record a desalination wash of 10 L, of which 1 L goes into a tank; the moment is of no account."""
    return [
        *(EFFLUENT, "wash", "record", "--ledger", str(place), "--by", "P", "--performed-by", "P"),
        *("--kind", "desalination wash", "--mode", "motoring", "--engine", "E", "--site", "N"),
        *("--performed-at", "2026-03-01T12:00", "--rinse-water", "10 L", "--caught", "1 L"),
        *("--caught-by", "meter", "--into", "D", "--accept", "the same once more"),
    ]
