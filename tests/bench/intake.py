"""Reading a laboratory's file into a ledger."""

from __future__ import annotations

import csv
import random
import shutil
import sys
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from pathlib import Path

from effluent.intake.layout import FIELDS
from effluent.store.base import RecordRow
from effluent.store.column import utc_text
from effluent.store.ledger import Ledger
from effluent.store.noun import NOUNS, table_of
from effluent.store.schema import ResultRow
from effluent.store.writing import Writing
from tests.bench.race import Race, Side, work
from tests.bench.start import EFFLUENT
from tests.world import add_limit, world

START = datetime(2024, 1, 1, 8, tzinfo=UTC)
ANALYTES = (
    ("Cadmium, total", "mg/L", "0.005"),
    ("7439-92-1", "ug/L", "5"),
    ("Zn", "mg/L", "0.02"),
    ("Cu", "mg/l", "0.01"),
    ("Nickel", "mg/L", "0.01"),
    ("chromium", "µg/L", "10"),
    ("TSS", "mg/L", "2"),
    ("oil and grease", "mg/L", "5"),
)
EARLIER = 200  # samples with results on record, so that there is a history to compare with

FLOOR = """
import csv, sqlite3, sys
with open(sys.argv[1], newline="", encoding="utf-8") as file:
    rows = csv.reader(file)
    names = next(rows)
    database = sqlite3.connect(sys.argv[2])
    database.execute(f"CREATE TABLE result ({', '.join(names)})")
    database.execute("CREATE INDEX by_sample ON result (sample)")
    database.executemany(f"INSERT INTO result VALUES ({', '.join('?' * len(names))})", rows)
    database.commit()
    database.close()
"""


@work("import a laboratory CSV", budget=2.0, most_mib=400)
def import_csv(folder: Path, rows: int) -> Race:
    """Against `csv` and `sqlite3.executemany` of the same rows with one index."""
    ours = importing(folder, rows)
    floor, file = folder / "floor.db", folder / f"{rows}.csv"
    command = [sys.executable, "-c", FLOOR, str(file), str(floor)]
    return Race(floor=Side(command, lambda: floor.unlink(missing_ok=True)), ours=ours)


@work("import, ten times the rows", budget=11)
def grow(folder: Path, rows: int) -> Race:
    """Against our own work on a tenth of the rows."""
    return Race(floor=importing(folder, rows // 10), ours=importing(folder, rows))


def importing(folder: Path, rows: int) -> Side:
    """Make a file and the ledger it goes into, and return the import as a command."""
    file, empty, ours = folder / f"{rows}.csv", folder / f"{rows}-empty.ledger", folder / f"{rows}.ledger"
    write_lab_file(file, rows)
    make_ledger(empty, samples=(rows - 1) // len(ANALYTES) + 1)
    command = [EFFLUENT, "result", "import", str(file), "--ledger", str(ours), "--by", "RS"]
    return Side(command, lambda: shutil.copyfile(empty, ours))


def write_lab_file(path: Path, rows: int) -> None:
    """Write results in our own column set, eight analytes a sample, a tenth not detected."""
    with path.open("w", newline="", encoding="utf-8") as file:
        writer = csv.DictWriter(file, [*FIELDS], restval="")
        writer.writeheader()
        writer.writerows(lab_rows(rows))


def lab_rows(rows: int) -> Iterator[dict[str, str]]:
    chance = random.Random(7)
    for number in range(rows):
        sample, which = divmod(number, len(ANALYTES))
        analyte, unit, reporting_limit = ANALYTES[which]
        value = float(reporting_limit) * chance.uniform(1, 20)
        analysed_at = drawn_at(sample).replace(hour=9) + timedelta(days=2, minutes=sample % 400)
        yield {
            "sample": code_of(sample),
            "analyte": analyte,
            "fraction": "total",
            "value": f"<{reporting_limit}" if chance.random() < 0.1 else f"{value:.4g}",
            "unit": unit,
            "detection_limit": f"{float(reporting_limit) / 2:g}",
            "reporting_limit": reporting_limit,
            "dilution_factor": "1",
            "test_method": "EPA 200.8",
            "analysed_at": f"{analysed_at:%Y-%m-%d %H:%M}",
            "laboratory": "Laboratory A (invented)",
            "report": f"R-{sample // 20:05}",
            "replicate": "1",
        }


def code_of(sample: int) -> str:
    return f"S-{sample + 1:06}"


def drawn_at(sample: int) -> datetime:
    return START + timedelta(hours=sample % 8760)


def make_ledger(path: Path, *, samples: int) -> None:
    """Make a ledger with limits, earlier results, and the samples that the file is about."""
    with world(str(path)) as book:
        for analyte in ("cadmium", "lead", "zinc", "copper", "nickel", "chromium"):
            add_limit(book, "SEW", analyte, "5 mg/L")
        add_samples(book, [(code_of(number), drawn_at(number)) for number in range(samples)])
        earlier = [(f"E-{number:04}", START - timedelta(days=number + 1)) for number in range(EARLIER)]
        add_samples(book, earlier)
        book.write(
            lambda writing: add_history(writing, [code for code, _ in earlier]), by="RS", action="set up"
        )


def add_samples(book: Ledger, drawn: list[tuple[str, datetime]]) -> None:
    """Add samples many at a time; one by one they would take minutes."""

    def job(writing: Writing) -> None:
        table = NOUNS["sample"].table
        names = [column.name for column in table.columns][2:]
        given = dict.fromkeys(("place", "bottle", "preservation", "remarks"), "") | {
            "container": "container/T-1", "method": "grab", "taken_by": "person/RS",
        }  # fmt: skip
        rows = [given | {"started_at": utc_text(at)} for _, at in drawn]
        keys = [f"sample/{code}" for code, _ in drawn]
        writing._insert(table_of(RecordRow), [(key, "sample") for key in keys])
        parts = [(key, 1, 0, *map(row.get, names[3:])) for key, row in zip(keys, rows, strict=True)]
        writing._insert(table, parts)

    book.write(job, by="RS", action="set up")


def add_history(writing: Writing, codes: list[str]) -> None:
    names = [column.name for column in table_of(ResultRow).columns][2:]
    texts = dict.fromkeys(names, "") | {
        "fraction": "total", "text": "0.1", "unit": "mg/L", "qualifier": "=", "number": "0.1", "value": 0.1,
        "canonical_unit": "mg/L", "reporting_value": None, "analysed_at": None, "replicate": 1,
        "supersedes": None, "file": None, "file_row": None,
    }  # fmt: skip
    for analyte in ("cadmium", "lead", "zinc", "copper", "nickel", "chromium"):
        rows = [{**texts, "sample": code, "analyte": analyte} for code in codes]
        writing.add_results([tuple(row[name] for name in names) for row in rows])
