"""Exports for spreadsheet programs: no cell runs as a formula, no file is half-written or overwritten."""

from __future__ import annotations

import csv
import math
import os
import re
import tempfile
from collections.abc import Callable, Iterable, Sequence
from datetime import datetime
from pathlib import Path

import xlsxwriter

from effluent.errors import FileMissing, StorageFailed, ValueRefused, WouldOverwrite

__all__ = ["safe_cell", "write_csv", "write_xlsx"]

Cell = str | int | float | None

_RISKY = ("=", "+", "-", "@", "\t", "\r", "\n", "\uff1d", "\uff0b", "\uff0d", "\uff20")
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d{1,3})?", re.ASCII)
_CONTROL = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f]")
_MOST_ROWS = 1_048_576
_LONGEST_CELL = 32_767
# A fixed date of making, so that the same rows give the same bytes.
_MADE = datetime(2000, 1, 1)  # noqa: DTZ001 - the file format knows no zone


def safe_cell(text: str) -> str:
    """Return a text that no spreadsheet program takes for a formula.

    A text that begins like one is led in by an apostrophe, which such programs read as "text follows".
    A number with a sign is left as it is. Control characters are taken out.

    Examples
    --------
    >>> safe_cell("=1+1"), safe_cell("-0.5")
    ("'=1+1", '-0.5')
    """
    clean = _CONTROL.sub("", text) if not text.isprintable() else text
    if clean.lstrip(" \u00a0").startswith(_RISKY) and not _NUMBER.fullmatch(clean):
        return "'" + clean
    return clean


def write_csv(path: Path, headings: Sequence[str], rows: Iterable[Sequence[Cell]]) -> None:
    """Write rows as CSV: comma, UTF-8 with byte order mark, CRLF.

    Raises
    ------
    WouldOverwrite
        If the file exists.
    FileMissing
        If its folder does not.
    StorageFailed
        If it cannot be written; then nothing is left behind.
    """

    def fill(target: Path) -> None:
        with target.open("w", encoding="utf-8-sig", newline="") as handle:
            writer = csv.writer(handle)
            writer.writerow([safe_cell(heading) for heading in headings])
            writer.writerows([_plain(cell) for cell in row] for row in rows)

    _write(path, fill)


def write_xlsx(path: Path, headings: Sequence[str], rows: Iterable[Sequence[Cell]]) -> None:
    """Write rows as one sheet of a workbook; the same rows give the same bytes.

    Raises
    ------
    WouldOverwrite
        If the file exists.
    FileMissing
        If its folder does not.
    ValueRefused
        If a sheet cannot hold that many rows or so long a cell; then nothing is left behind.
    StorageFailed
        If it cannot be written; then nothing is left behind.
    """
    _write(path, lambda target: _fill_workbook(target, headings, rows))


def _fill_workbook(target: Path, headings: Sequence[str], rows: Iterable[Sequence[Cell]]) -> None:
    options = {"strings_to_formulas": False, "strings_to_urls": False, "strings_to_numbers": False}
    with xlsxwriter.Workbook(str(target), {**options, "constant_memory": True}) as book:
        book.set_properties({"created": _MADE})
        sheet = book.add_worksheet()
        bold = book.add_format({"bold": True})
        sheet.freeze_panes(1, 0)
        for column, heading in enumerate(headings):
            sheet.write_string(0, column, safe_cell(heading), bold)
        for number, row in enumerate(rows, start=1):
            if number >= _MOST_ROWS:
                raise ValueRefused("rows", f"over {_MOST_ROWS - 1}", "a sheet ends there; write CSV")
            for column, cell in enumerate(row):
                _put(sheet, (number, column), cell)


def _put(sheet: xlsxwriter.worksheet.Worksheet, place: tuple[int, int], cell: Cell) -> None:
    if cell is None:
        return
    if not isinstance(cell, str):
        if math.isfinite(cell):
            sheet.write_number(*place, cell)
        return
    if len(cell) > _LONGEST_CELL:
        raise ValueRefused("cell", cell[:40] + "…", f"a sheet holds {_LONGEST_CELL} characters; write CSV")
    sheet.write_string(*place, safe_cell(cell))


def _plain(cell: Cell) -> str | int | float:
    if cell is None:
        return ""
    return safe_cell(cell) if isinstance(cell, str) else cell


def _write(path: Path, fill: Callable[[Path], None]) -> None:
    """Fill a temporary file beside the wanted one, then give it its name unless that is taken."""
    if os.path.lexists(path):
        raise WouldOverwrite(path)
    if not os.path.isdir(path.parent):
        raise FileMissing(path.parent, "make the folder first")
    try:
        with tempfile.TemporaryDirectory(dir=path.parent, prefix=".effluent-") as folder:
            part = Path(folder) / path.name
            fill(part)
            _sync(part)
            _name(part, path)
    except FileExistsError as error:
        raise WouldOverwrite(path) from error
    except (OSError, xlsxwriter.exceptions.XlsxFileError) as error:
        raise StorageFailed(path, str(error)) from error


def _name(part: Path, path: Path) -> None:
    """Give the finished file its name; where a disk knows no links, a rename does it."""
    try:
        os.link(part, path)
    except FileExistsError:
        raise
    except OSError:
        part.rename(path)


def _sync(path: Path) -> None:
    with path.open("rb+") as handle:
        os.fsync(handle.fileno())
