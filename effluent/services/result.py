"""Results by hand: entered one at a time, listed with their holding times, voided."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import fields
from datetime import date
from pathlib import Path
from typing import NamedTuple
from zoneinfo import ZoneInfo

from effluent.domain import Result, Sample
from effluent.errors import FileRefused, RowError, ValueRefused
from effluent.intake.result import ResultChunk, read_cells
from effluent.intake.sheet import write_csv, write_xlsx
from effluent.reference.analyte import find
from effluent.services.delivery import Batch
from effluent.services.importing import Imported, import_files
from effluent.services.receiving import Receiving
from effluent.services.register import need_reason
from effluent.services.wanted import Wanted, wanted_waters
from effluent.services.water import Water, site_of
from effluent.store.column import Plain, plain
from effluent.store.ledger import Ledger
from effluent.store.writing import Writing

__all__ = ["Imported", "Listed", "enter", "export", "import_files", "listing", "void"]


class Listed(NamedTuple):
    """A result with its sample; ``late`` says that it was analysed outside its holding time."""

    result: Result
    sample: Sample
    late: bool
    zone: ZoneInfo

    @property
    def drawn_on(self) -> date:
        """The local day on which drawing the sample began."""
        return self.sample.started_at.astimezone(self.zone).date()

    @property
    def analysed_on(self) -> date | None:
        """The local day of the analysis, if it is known."""
        at = self.result.analysed_at
        return None if at is None else at.astimezone(self.zone).date()


def enter(ledger: Ledger, cells: Mapping[str, str], *, by: str, reason: str = "", accept: str = "") -> int:
    """Record one result by hand and return its number.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    cells : mapping of str to str
        Cells under the names of our own column set, read and checked as those of a file are; local times
        are those of the sample's site.
    by, reason : str
        Who records this, and why.
    accept : str
        Why what is questioned is right all the same; the entry keeps it.

    Raises
    ------
    ValueRefused, FileRefused
        If one cell is bad, or several are.
    Questioned
        If something is implausible and `accept` is empty.
    """

    def job(writing: Writing) -> int:
        chunk = read_cells(cells, time_zone=_zone(writing, cells.get("sample", "").strip()))
        receiving = Receiving(writing)
        receiving.take(_by_hand(chunk))
        receiving.finish("the result", accept=accept)
        return receiving.first_number

    try:
        return ledger.write(job, by=by, action="enter result", reason=reason)
    except FileRefused as error:
        raise _plainly(error.rows) from error


def void(ledger: Ledger, number: int, *, by: str, reason: str) -> None:
    """Withdraw a result without another in its place; it stays readable.

    Raises
    ------
    RecordMissing
        If no result of that number stands.
    """
    need_reason(reason, "void")
    ledger.write(
        lambda writing: writing.void_result(number), by=by, action=f"void result {number}", reason=reason
    )


def listing(
    ledger: Ledger, wanted: Wanted | None = None, *, analyte: str = "", as_of: str | None = None
) -> tuple[Listed, ...]:
    """Return the results that stand, in the order recorded.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    wanted : Wanted, optional
        Whose samples; without it every one.
    analyte : str
        Only this analyte, by name, symbol or CAS number.
    as_of : str, optional
        Answer with what was known then.

    Raises
    ------
    RecordMissing, ValueRefused
        If something named is not in the ledger, or the analyte not in the table.
    """
    key = find(analyte).analyte.key if analyte else ""
    with ledger.reading(as_of) as reading:
        bodies = wanted_waters(reading, wanted or Wanted())
        held = {sample.code: (water, sample) for water in bodies for sample in water.samples}
        return tuple(
            _listed(result, *held[result.sample])
            for result in reading.results(samples=held)
            if key in ("", result.analyte)
        )


def _listed(result: Result, water: Water, sample: Sample) -> Listed:
    return Listed(result, sample, water.is_late(sample, result), water.zone)


def _zone(writing: Writing, code: str) -> str:
    """Return the zone of the site a sample was drawn at; an unknown sample is refused later."""
    for sample in writing.values("sample", key=(code,)):
        if site := site_of(writing, sample):
            return str(writing.value("site", site).time_zone)
    return "UTC"


def _by_hand(chunk: ResultChunk) -> Batch:
    return Batch(chunk.columns, chunk.errors, chunk.bad, chunk.headings)


def _plainly(rows: tuple[RowError, ...]) -> Exception:
    """Return the refusal of one bad cell without its row, which a result by hand does not have."""
    if len(rows) != 1:
        return FileRefused("the result", rows)
    return ValueRefused(rows[0].column.replace("_", " "), rows[0].value, rows[0].reason)


def export(found: Sequence[Listed], path: Path, *, as_workbook: bool) -> None:
    """Write results to a new file for a spreadsheet program; no cell runs as a formula.

    Raises
    ------
    WouldOverwrite
        If the file exists.
    FileMissing, StorageFailed
        If its folder is not there, or it cannot be written.
    """
    write = write_xlsx if as_workbook else write_csv
    write(path, ("result", *_EXPORTED, "drawn_at", "outside_holding_time"), map(_cells, found))


def _cells(each: Listed) -> list[Plain]:
    cells = [plain(getattr(each.result, name)) for name in _EXPORTED]
    return [each.result.row, *cells, plain(each.sample.started_at), "yes" if each.late else "no"]


_EXPORTED = tuple(field.name for field in fields(Result) if field.name != "row")
