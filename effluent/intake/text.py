"""Delimited text files: encoding, delimiter and records, read in blocks."""

from __future__ import annotations

import codecs
import contextlib
import csv
from collections.abc import Iterator
from dataclasses import dataclass
from io import TextIOWrapper
from itertools import islice
from pathlib import Path

from effluent.errors import ValueRefused

__all__ = ["DELIMITERS", "TextFile", "detect_delimiter", "detect_encoding"]

DELIMITERS = (",", ";", "\t", "|")
_BLOCK = 1 << 20
_SAMPLE_RECORDS = 50
_MARKS = (
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)


def refused(path: Path, remedy: str) -> ValueRefused:
    """Return the error for a file that cannot be read as a table."""
    return ValueRefused("laboratory file", path.name, remedy)


def detect_encoding(path: Path, declared: str = "") -> str:
    """Return the encoding of a text file, having decoded all of it once.

    A byte order mark decides; then what was declared; then UTF-8, and Windows-1252 (of which Latin-1
    letters are a part) where the bytes are not UTF-8.

    Raises
    ------
    ValueRefused
        If the file is empty, holds NUL, or fits none of these encodings.
    """
    with path.open("rb") as handle:
        head = handle.read(4)
    if not head:
        raise refused(path, "it is empty; ask the laboratory to send it again")
    marked = next((name for mark, name in _MARKS if head.startswith(mark)), "")
    tried = (marked,) if marked else (_known(declared),) if declared else ("utf-8", "cp1252")
    for name in tried:
        if _decodes(path, name):
            return name
    raise refused(
        path, f"its bytes are not {' or '.join(tried)} text; declare its encoding, as in encoding = 'cp1252'"
    )


def _known(encoding: str) -> str:
    """Return the name if it is an encoding of text."""
    try:
        "".encode(encoding)
    except (LookupError, ValueError) as error:
        raise ValueRefused("encoding", encoding, "name one such as utf-8, cp1252 or latin-1") from error
    return encoding


def _decodes(path: Path, encoding: str) -> bool:
    decoder = codecs.getincrementaldecoder(encoding)()
    with path.open("rb") as handle:
        try:
            while block := handle.read(_BLOCK):
                if "\0" in decoder.decode(block):
                    raise refused(
                        path, "it holds NUL characters, so it is not a table of text; send CSV or XLSX"
                    )
            decoder.decode(b"", final=True)
        except UnicodeError:
            return False
    return True


def detect_delimiter(path: Path, encoding: str, *, skip_rows: int = 0) -> str:
    """Return the delimiter that gives the heading row most cells, and rows that agree with it.

    Raises
    ------
    ValueRefused
        If none of comma, semicolon, tab and bar splits the heading row.
    """
    scores = {mark: _score(path, encoding, mark, skip_rows) for mark in DELIMITERS}
    best = max(DELIMITERS, key=lambda mark: scores[mark])
    if scores[best][0] < 2:
        raise refused(
            path,
            "no comma, semicolon, tab or bar divides its heading row; check that it is a table, "
            "and declare delimiter and skip_rows if it is",
        )
    return best


def _score(path: Path, encoding: str, delimiter: str, skip_rows: int) -> tuple[int, int]:
    """Return the width of the heading row and how many rows after it are as wide."""
    widths: list[int] = []
    with path.open(encoding=encoding, newline="") as handle, contextlib.suppress(csv.Error):
        # What breaks the table further down is named when it is read in earnest.
        reader = csv.reader(handle, delimiter=delimiter, skipinitialspace=True)
        for record in islice(reader, skip_rows, skip_rows + _SAMPLE_RECORDS):
            widths.append(len(record))
    return (widths[0], widths.count(widths[0])) if widths else (0, 0)


@dataclass(frozen=True)
class TextFile:
    """A delimited text file whose encoding and delimiter are known."""

    path: Path
    encoding: str
    delimiter: str

    def batches(self, size: int) -> Iterator[tuple[list[list[str]], float]]:
        """Yield blocks of records, empty lines included, each with the share of the file read so far.

        Raises
        ------
        ValueRefused
            If a quotation mark is misplaced or never closed, or a cell is absurdly long.
        """
        total = self.path.stat().st_size
        with self.path.open("rb") as raw, TextIOWrapper(raw, encoding=self.encoding, newline="") as handle:
            reader = csv.reader(handle, delimiter=self.delimiter, strict=True, skipinitialspace=True)
            try:
                while batch := list(islice(reader, size)):
                    yield batch, min(1.0, raw.tell() / total)
            except csv.Error as error:
                raise refused(
                    self.path,
                    f"line {reader.line_num} breaks the table ({error}); "
                    "look there for a quotation mark that is misplaced or never closed",
                ) from error
