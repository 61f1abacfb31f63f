"""A laboratory file of any supported kind as headings and blocks of rows of text."""

from __future__ import annotations

import os
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import chain
from pathlib import Path

from effluent.errors import FileMissing, RowError, ValueRefused
from effluent.intake.text import Batch, TextFile, detect_delimiter, detect_encoding, refused
from effluent.intake.workbook import Workbook, is_workbook, open_workbook

__all__ = ["Block", "Table", "heading_text", "open_table"]

_MOST_COLUMNS = 16_384
_SUFFIXES_REFUSED = {".xlsm", ".xlsb", ".xltm", ".xls", ".xlam"}


@dataclass(frozen=True)
class Block:
    """Columns of equal length, with the row numbers in the file and the rows that do not fit.

    A row is what a spreadsheet program shows as one: the first is 1, the heading row and empty rows
    count, a quoted cell with line breaks inside stays one row.
    """

    columns: list[Sequence[str]]
    numbers: Sequence[int]
    errors: list[RowError]
    share: float


@dataclass(frozen=True)
class Table:
    """An opened laboratory file; every call of `blocks` reads it from the start."""

    path: Path
    source: TextFile | Workbook
    heading_row: int
    headings: tuple[str, ...]

    def blocks(self) -> Iterator[Block]:
        """Yield the rows below the heading row, without empty ones, some at a time.

        Raises
        ------
        ValueRefused
            If the file breaks off as a table.
        """
        first = 1
        for batch in self.source.batches():
            if first > self.heading_row:
                yield self._block(batch, first)
            elif first + len(batch) > self.heading_row + 1:
                rows = batch.as_rows()[self.heading_row + 1 - first :]
                yield self._block(Batch(rows, [], batch.share), self.heading_row + 1)
            first += len(batch)

    def _block(self, batch: Batch, first: int) -> Block:
        if len(batch.columns) == len(self.headings) and "" not in batch.columns[0]:
            return Block([*batch.columns], range(first, first + len(batch)), [], batch.share)
        rows, numbers, errors = self._fitting(batch.as_rows(), first)
        columns = [*zip(*rows, strict=True)] if rows else [()] * len(self.headings)
        return Block([*columns], numbers, errors, batch.share)

    def _fitting(
        self, records: list[list[str]], first: int
    ) -> tuple[list[list[str]], list[int], list[RowError]]:
        """Return the rows that are as wide as the heading row, without empty ones."""
        width = len(self.headings)
        rows, numbers, errors = [], [], []
        for number, record in enumerate(records, first):
            if not any(record):
                continue
            cells = _trim(record, width)
            if len(cells) == width:
                rows.append(cells)
                numbers.append(number)
            elif any(map(str.strip, cells)):
                errors.append(_ragged(number, cells, width))
        return rows, numbers, errors


def _trim(record: list[str], width: int) -> list[str]:
    """Return the record without empty cells beyond the headings."""
    if len(record) > width and not any(map(str.strip, record[width:])):
        return record[:width]
    return record


def _ragged(number: int, cells: list[str], width: int) -> RowError:
    shown = " | ".join(cells)
    return RowError(
        number,
        "row",
        shown if len(shown) <= 60 else shown[:57] + "...",
        f"it has {len(cells)} cells where the heading row has {width}; "
        "look for a missing or unquoted delimiter, or a file that was cut short",
    )


def heading_text(cell: str) -> str:
    """Return a heading with line breaks and runs of blanks made one blank."""
    return " ".join(cell.split())


def open_table(
    path: Path, *, encoding: str = "", delimiter: str = "", sheet: str = "", skip_rows: int = 0
) -> Table:
    """Open a CSV or XLSX file and read its heading row.

    Parameters
    ----------
    path : Path
        The file; what it is shows in its first bytes, not in its name.
    encoding, delimiter, sheet : str
        As declared; empty means found out from the file.
    skip_rows : int
        Rows above the heading row.

    Raises
    ------
    FileMissing
        If there is no such file.
    ValueRefused
        If it is not a table that can be read safely, or headings are missing or repeated.
    """
    if not os.path.isfile(path):
        raise FileMissing(path, "check the name and the folder")
    if path.suffix.lower() in _SUFFIXES_REFUSED:
        raise refused(path, "old, binary and macro workbooks are never opened; save it as .xlsx or as CSV")
    try:
        source = _source(path, encoding, delimiter, sheet=sheet, skip_rows=skip_rows)
    except OSError as error:
        raise refused(path, f"it cannot be read: {error.strerror}") from error
    headings = _headings(path, source, skip_rows)
    return Table(path, source, skip_rows + 1, headings)


def _source(path: Path, encoding: str, delimiter: str, *, sheet: str, skip_rows: int) -> TextFile | Workbook:
    if is_workbook(path):
        return open_workbook(path, sheet)
    if sheet:
        raise ValueRefused("sheet", sheet, f"{path.name} is a text file and has no sheets")
    found = detect_encoding(path, encoding)
    return TextFile(path, found, delimiter or detect_delimiter(path, found, skip_rows=skip_rows))


def _headings(path: Path, source: TextFile | Workbook, skip_rows: int) -> tuple[str, ...]:
    records = chain.from_iterable(batch.as_rows() for batch in source.batches())
    record = next((cells for row, cells in enumerate(records) if row == skip_rows), [])
    names = [heading_text(cell) for cell in record]
    while names and not names[-1]:
        names.pop()
    if len(names) < 2 or len(names) > _MOST_COLUMNS:
        raise refused(path, f"row {skip_rows + 1} is not a heading row; set skip_rows to the rows above it")
    repeated = [name for name, count in Counter(names).items() if name and count > 1]
    if repeated:
        raise refused(path, f"the heading {repeated[0]!r} stands twice in row {skip_rows + 1}; rename one")
    return tuple(names)
