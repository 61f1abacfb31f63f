"""Delimited text files: encoding, delimiter and records, read in blocks."""

from __future__ import annotations

import codecs
import contextlib
import csv
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from io import StringIO, TextIOWrapper
from itertools import chain, islice
from operator import methodcaller
from pathlib import Path
from typing import TYPE_CHECKING, NamedTuple

from effluent.errors import ValueRefused

if TYPE_CHECKING:
    from _csv import Reader

__all__ = ["DELIMITERS", "Batch", "TextFile", "detect_delimiter", "detect_encoding", "refused"]

DELIMITERS = (",", ";", "\t", "|")
_BLOCK = 1 << 20
_LONGEST_LINE = 1 << 18
_SAMPLE_RECORDS = 50
_LINE_CHARACTERS = 80
_LONGEST_BLOCK = 200_000
_DIVIDER = "\x1f"
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
                text = decoder.decode(block)
                if len(text) > _LONGEST_LINE and "\n" not in text and "\r" not in text:
                    raise refused(path, "a line in it has no end; it is not a table of text")
                if "\0" in text:
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


class Batch(NamedTuple):
    """Some records: as rows or, where all are of one width, as columns; and the share of the file read."""

    rows: list[list[str]]
    columns: list[list[str]]
    share: float

    def __len__(self) -> int:
        return len(self.columns[0]) if self.columns else len(self.rows)

    def as_rows(self) -> list[list[str]]:
        """Return the records as rows."""
        return [list(row) for row in zip(*self.columns, strict=True)] if self.columns else self.rows


@dataclass(frozen=True)
class TextFile:
    """A delimited text file whose encoding and delimiter are known."""

    path: Path
    encoding: str
    delimiter: str

    def batches(self, size: int = 1_000) -> Iterator[Batch]:
        """Yield about `size` records at a time, empty lines included.

        Lines without quotation marks are only split, which takes a fraction of the time that the `csv`
        module takes; all of a block goes through that where a cell has line breaks.

        Raises
        ------
        ValueRefused
            If a quotation mark is misplaced or never closed, or a line is absurdly long.
        """
        total = self.path.stat().st_size
        lines_before = 0
        with self.path.open("rb") as raw, TextIOWrapper(raw, encoding=self.encoding, newline="") as handle:
            while text := handle.read(size * _LINE_CHARACTERS):
                text += handle.readline()
                lines = self._divided(text)
                if lines:
                    rows, columns, count = *_cells(lines), len(lines)
                else:
                    columns = []
                    rows, count = self._quoted(text, handle, lines_before)
                yield Batch(rows, columns, min(1.0, raw.tell() / total))
                lines_before += count

    def _divided(self, text: str) -> list[str]:
        """Return lines whose cells are divided by a mark that no cell holds.

        Return nothing where that cannot be: a cell has line breaks, or the text is malformed.
        """
        if _DIVIDER in text or len(text) > _LONGEST_BLOCK:
            return []
        if "\r" in text:
            text = text.replace("\r\n", "\n").replace("\r", "\n")
        lines = text.removesuffix("\n").replace(self.delimiter, _DIVIDER).split("\n")
        if '"' not in text:
            return lines
        quoted = [line.replace(_DIVIDER, self.delimiter) for line in lines if '"' in line]
        try:
            rows = list(self._reader(quoted))
        except csv.Error:
            return []
        if len(rows) != len(quoted):
            return []
        joined = map(_DIVIDER.join, rows)
        return [next(joined) if '"' in line else line for line in lines]

    def _reader(self, lines: Iterable[str]) -> Reader:
        return csv.reader(lines, delimiter=self.delimiter, strict=True, skipinitialspace=True)

    def _quoted(self, text: str, handle: TextIOWrapper, lines_before: int) -> tuple[list[list[str]], int]:
        """Read text with quotation marks, and as much of the file as it takes to close the last one."""
        lines = list(StringIO(text, newline=""))
        reader = self._reader(chain(lines, handle))
        rows = []
        try:
            while reader.line_num < len(lines):
                rows.append(next(reader))
        except csv.Error as error:
            raise refused(
                self.path,
                f"line {lines_before + reader.line_num} breaks the table ({error}); "
                "look there for a quotation mark that is misplaced or never closed",
            ) from error
        return rows, reader.line_num


def _cells(lines: list[str]) -> tuple[list[list[str]], list[list[str]]]:
    """Return divided lines as rows or, where they are of one width, as columns."""
    counts = set(map(methodcaller("count", _DIVIDER), lines))
    if len(counts) > 1 or counts == {0}:
        return [line.split(_DIVIDER) for line in lines], []
    width = counts.pop() + 1
    cells = _DIVIDER.join(lines).split(_DIVIDER)
    return [], [cells[place::width] for place in range(width)]
