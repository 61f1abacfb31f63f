"""The proof of a ledger full of results."""

from __future__ import annotations

import sys
from datetime import UTC, datetime
from pathlib import Path

from effluent.domain import Container, ContainerKind, Method, Person, Quantity, Sample, Site
from effluent.services.ledger import create, open_ledger
from effluent.store.column import Plain
from effluent.store.writing import RESULT_COLUMNS, Writing
from tests.bench.race import Race, Side, work

EFFLUENT = str(Path(sys.executable).parent / "effluent")
CHUNK = 20_000
SAMPLES = 1_000
NOON = datetime(2026, 3, 1, 12, tzinfo=UTC)

# What anybody would write to touch every value once.
FLOOR = """
import hashlib, json, sqlite3, sys
ledger = sqlite3.connect(sys.argv[1])
digest = hashlib.sha256()
tables = ledger.execute("SELECT name FROM sqlite_master WHERE type = 'table'").fetchall()
for (table,) in tables:
    rows = ledger.execute(f'SELECT * FROM "{table}"')
    while chunk := rows.fetchmany(20_000):
        digest.update(json.dumps(chunk).encode())
print(digest.hexdigest())
"""


def fill(place: Path, rows: int) -> None:
    """Make a ledger with that many results in one entry."""
    create(str(place), Person(code="P", name="Invented Person"))
    with open_ledger(str(place)) as ledger:
        ledger.write(lambda writing: _record(writing, rows), by="P", action="fill")


def _record(writing: Writing, rows: int) -> None:
    writing.record(Site(code="N", name="N", operator="N", address="N", time_zone="Europe/Lisbon"))
    writing.record(Container(code="D", kind=ContainerKind.TANK, site="N", capacity=Quantity("9000", "L")))
    for number in range(SAMPLES):
        code = f"S-{number:04}"
        writing.record(Sample(code=code, container="D", method=Method.GRAB, started_at=NOON, taken_by="P"))
    for start in range(0, rows, CHUNK):
        writing.add_results([plain_result(n) for n in range(start, min(start + CHUNK, rows))])


def plain_result(number: int) -> list[Plain]:
    """One result as a row, different from its neighbours."""
    text = f"{number % 997 / 1000:.3f}"
    values: dict[str, Plain] = {
        **dict.fromkeys(RESULT_COLUMNS, ""),
        "sample": f"S-{number % SAMPLES:04}",
        "analyte": "Cadmium",
        "fraction": "total",
        "text": text,
        "unit": "mg/L",
        "qualifier": "=",
        "number": text,
        "value": float(text),
        "canonical_unit": "mg/L",
        "reporting_limit": "0.005",
        "reporting_value": 0.005,
        "test_method": "EPA 200.8",
        "analysed_at": "2026-03-02T09:30:00.000000Z",
        "laboratory": "Invented Laboratory",
        "report": f"R-{number // 50:06}",
        "replicate": 1,
        "supersedes": None,
        "file": None,
        "file_row": number,
    }
    return list(values.values())


@work("ledger verify", budget=1.5)
def verify_ledger(folder: Path, rows: int) -> Race:
    """Against reading every row with sqlite3 and hashing its JSON."""
    place = folder / "ledger.effluent"
    fill(place, rows)
    return Race(
        floor=Side([sys.executable, "-c", FLOOR, str(place)]),
        ours=Side([EFFLUENT, "ledger", "verify", "--ledger", str(place)]),
    )


@work("ledger verify, ten times the rows", budget=11)
def grow(folder: Path, rows: int) -> Race:
    """Against our own work on a tenth of the rows."""
    places = {size: folder / f"{size}.effluent" for size in (rows // 10, rows)}
    for size, place in places.items():
        fill(place, size)
    sides = [Side([EFFLUENT, "ledger", "verify", "--ledger", str(p)]) for p in places.values()]
    return Race(floor=sides[0], ours=sides[1])
