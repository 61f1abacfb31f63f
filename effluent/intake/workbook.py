"""Spreadsheet workbooks (XLSX): one sheet as rows of text."""

from __future__ import annotations

import re
import zipfile
import zlib
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import date, datetime, time, timedelta
from functools import reduce
from itertools import islice
from pathlib import Path

import python_calamine

from effluent.errors import ValueRefused
from effluent.intake.text import Batch, refused

__all__ = ["Workbook", "is_workbook", "open_workbook"]

_ZIP = b"PK\x03\x04"
_COMPOUND = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_UNPACKED_BYTES = 1 << 30
_PIECE, _LONGEST_PLACE = 1 << 20, 64
_COLUMN, _ROW, _FAR_ROW = map(
    re.compile, (rb' r="([A-Za-z]+)[0-9]', rb' r="[A-Za-z]*([0-9]+)', rb' r="[A-Za-z]*([0-9]{7,})')
)
_UNUSUAL = (b' ="', b'\t="', b'\n="', b'\r="', b"\tr=", b"\nr=", b"\rr=")
_MOST_ROWS, _FEW_COLUMNS, _MOST_CELLS = 1_048_576, 48, 50_400_000
_SAVE_AS = "save it as .xlsx without macros and without a password, or as CSV"


def is_workbook(path: Path) -> bool:
    """Return whether the file's first bytes are those of a workbook.

    Raises
    ------
    ValueRefused
        If they are those of an older or encrypted workbook.
    """
    with path.open("rb") as handle:
        head = handle.read(8)
    if head == _COMPOUND:
        raise refused(path, f"it is an old (.xls) or password-protected workbook; {_SAVE_AS}")
    return head.startswith(_ZIP)


@dataclass(frozen=True)
class Workbook:
    """One sheet of a workbook."""

    path: Path
    sheet: str

    def batches(self, size: int = 1_000) -> Iterator[Batch]:
        """Yield `size` rows at a time, empty rows included."""
        try:
            with python_calamine.CalamineWorkbook.from_path(self.path) as book:
                sheet = book.get_sheet_by_name(self.sheet)
                rows, done = sheet.iter_rows(), 0
                while batch := [[_text(cell) for cell in row] for row in islice(rows, size)]:
                    done += len(batch)
                    yield Batch(batch, [], done / max(done, sheet.total_height))
        except python_calamine.CalamineError as error:
            raise refused(self.path, f"sheet {self.sheet!r} cannot be read ({error}); {_SAVE_AS}") from error


def open_workbook(path: Path, sheet: str = "") -> Workbook:
    """Return the sheet to be read: the one named, or the only one that is not hidden.

    Raises
    ------
    ValueRefused
        If the workbook is damaged, protected, carries macros or unpacks to an absurd size, or if the
        sheet is not there or not the only one.
    """
    _inspect(path)
    try:
        with python_calamine.CalamineWorkbook.from_path(path) as book:
            names, visible = book.sheet_names, _visible(book)
    except python_calamine.CalamineError as error:
        raise refused(path, f"it is not a readable workbook ({error}); {_SAVE_AS}") from error
    if sheet and sheet not in names:
        raise ValueRefused("sheet", sheet, f"{path.name} has {', '.join(names)}")
    if not sheet and len(visible) != 1:
        raise refused(path, f"it has {len(visible)} sheets; name one of {', '.join(visible)} as sheet")
    return Workbook(path, sheet or visible[0])


def _visible(book: python_calamine.CalamineWorkbook) -> list[str]:
    shown = python_calamine.SheetVisibleEnum.Visible
    worksheet = python_calamine.SheetTypeEnum.WorkSheet
    return [s.name for s in book.sheets_metadata if s.visible == shown and s.typ == worksheet]


def _inspect(path: Path) -> None:
    """Refuse what must not be unpacked."""
    try:
        with zipfile.ZipFile(path) as archive:
            problem = _foreign(archive.infolist()) or _spread(archive)
    except (ValueError, RuntimeError, EOFError, zipfile.BadZipFile, zlib.error) as error:
        raise refused(
            path, "it is cut short or damaged, not a whole workbook; ask for it to be sent again"
        ) from error
    if problem:
        raise refused(path, problem)


def _foreign(members: list[zipfile.ZipInfo]) -> str:
    """Return why an archive is not a workbook that is opened here; nothing if it is."""
    names = {member.filename.lower() for member in members}
    if any("vbaproject" in name for name in names) or "xl/workbook.bin" in names:
        return f"workbooks with macros and binary workbooks are never opened; {_SAVE_AS}"
    if "xl/workbook.xml" not in names:
        return f"it is an archive but not a workbook; {_SAVE_AS}"
    if sum(member.file_size for member in members) > _UNPACKED_BYTES:
        return "it unpacks to more than 1 GiB; split it, or send CSV"
    return ""


def _spread(archive: zipfile.ZipFile) -> str:
    """Return why a sheet is too wide and long; the reader holds all places up to the last cell at once."""
    for member in archive.infolist():
        columns, rows = _extent(archive, member)
        if rows > _MOST_ROWS or columns * rows > _MOST_CELLS:
            return (
                f"a cell stands in column {columns}, and one in row {rows}; "
                "delete the cells far from the table, or send CSV"
            )
    return ""


def _extent(archive: zipfile.ZipFile, member: zipfile.ZipInfo) -> tuple[int, int]:
    """Return the last column and row in which a sheet has cells; a row that is harmless counts as 1."""
    letters, last_row = {b"A"}, 1
    for text in _pieces(archive, member):
        letters.update(_COLUMN.findall(text))
        last_row = max(last_row, *map(int, _FAR_ROW.findall(text)), 1)
    columns = max(map(_column_number, letters))
    if columns > _FEW_COLUMNS:
        last_row = max(int(row) for text in _pieces(archive, member) for row in [*_ROW.findall(text), b"1"])
    return columns, last_row


def _pieces(archive: zipfile.ZipFile, member: zipfile.ZipInfo) -> Iterator[bytes]:
    """Yield the text of a sheet, overlapping, with attributes written in the one usual way."""
    before = b""
    with archive.open(member) as sheet:
        while piece := sheet.read(_PIECE):
            text = before + piece
            if text.count(b"=") != text.count(b'="') or any(mark in text for mark in _UNUSUAL):
                text = re.sub(rb"\s*=\s*", b"=", re.sub(rb"\s", b" ", text.replace(b"'", b'"')))
            yield text
            before = piece[-_LONGEST_PLACE:]


def _column_number(letters: bytes) -> int:
    return reduce(lambda number, letter: number * 26 + letter - 64, letters.upper(), 0)


def _text(cell: object) -> str:
    """Return what a cell shows: at most 15 significant digits, dates as ISO 8601."""
    if isinstance(cell, str):
        return cell
    if isinstance(cell, bool):
        return "TRUE" if cell else "FALSE"
    if isinstance(cell, float):
        return format(cell, ".15g")
    if isinstance(cell, date | datetime | time):
        return cell.isoformat()
    return str(cell) if isinstance(cell, int | timedelta) else ""
