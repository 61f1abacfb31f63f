"""A laboratory file of any supported kind as headings and blocks of rows of text."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import chain
from pathlib import Path

from effluent.errors import FileMissing, RowError, ValueRefused
from effluent.intake.text import TextFile, detect_delimiter, detect_encoding, refused
from effluent.intake.workbook import Workbook, is_workbook, open_workbook

__all__ = ["CHUNK_ROWS", "Block", "Table", "heading_text", "open_table"]

CHUNK_ROWS = 50_000
_FIRST_ROWS = 1_000
_MOST_COLUMNS = 16_384
_SUFFIXES_REFUSED = {".xlsm", ".xlsb", ".xltm", ".xls", ".xlam"}


@dataclass(frozen=True)
class Block:
    """Rows of equal width, with their row numbers in the file and the rows that do not fit.

    A row is what a spreadsheet program shows as one: the first is 1, the heading row and empty rows
    count, a quoted cell with line breaks inside stays one row.
    """

    rows: list[list[str]]
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

    def blocks(self, size: int = CHUNK_ROWS) -> Iterator[Block]:
        """Yield the rows below the heading row, without empty ones, in blocks of at most `size` rows.

        Raises
        ------
        ValueRefused
            If the file breaks off as a table.
        """
        first = 1
        for batch, share in self.source.batches(size):
            start = max(self.heading_row + 1, first)
            yield self._block(batch[start - first :], start, share)
            first += len(batch)

    def _block(self, records: list[list[str]], first: int, share: float) -> Block:
        width = len(self.headings)
        if all(map(any, records)) and set(map(len, records)) <= {width}:
            return Block(records, range(first, first + len(records)), [], share)
        rows, numbers, errors = [], [], []
        for number, record in enumerate(records, first):
            cells = _trim(record, width)
            if len(cells) == width:
                rows.append(cells)
                numbers.append(number)
            elif any(map(str.strip, cells)):
                errors.append(_ragged(number, cells, width))
        return Block([row for row in rows if any(row)], _kept(numbers, rows), errors, share)


def _kept(numbers: list[int], rows: list[list[str]]) -> list[int]:
    return [number for number, row in zip(numbers, rows, strict=True) if any(row)]


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
    if not path.is_file():
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
    records = chain.from_iterable(batch for batch, _ in source.batches(_FIRST_ROWS))
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
