"""How a laboratory's columns map to ours: the plain column set, and mapping files."""

from __future__ import annotations

import os
import tomllib
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from datetime import datetime
from pathlib import Path
from types import MappingProxyType
from typing import Any
from zoneinfo import ZoneInfo

from effluent.errors import FileMissing, ValueRefused
from effluent.intake.text import DELIMITERS
from effluent.reference.table import near_names

__all__ = ["FIELDS", "PLAIN", "REQUIRED", "Layout", "zone"]

FIELDS: Mapping[str, str] = MappingProxyType(
    {
        "sample": "sample number, as in the ledger",
        "analyte": "name, symbol or CAS number",
        "fraction": "total, total recoverable, dissolved or TCLP extract",
        "value": "what the laboratory found, as in 0.11, <0.005, 0.005 U, ND or >200",
        "unit": "unit of the value and of all limits in the row",
        "flag": "laboratory's flag, as in J or U",
        "detection_limit": "detection limit",
        "reporting_limit": "reporting limit",
        "dilution_factor": "how many times the sample was diluted",
        "uncertainty": "expanded uncertainty (k = 2)",
        "density": "density of the sample with its unit; turns ppm and ppb into mg/L",
        "test_method": "test method",
        "analysed_at": "when analysed, local time of the site unless an offset is given",
        "laboratory": "laboratory",
        "report": "laboratory's report number",
        "replicate": "1, or 2 and up for a laboratory duplicate",
        "reissue_of": "number of the report that this one replaces",
    }
)
REQUIRED = ("sample", "analyte", "value", "unit")
_WIDE_FIELDS = tuple(name for name in FIELDS if name not in {"sample", "value"})


@dataclass(frozen=True, kw_only=True)
class Layout:
    """What the columns of a laboratory's file mean.

    ``columns`` maps our names to their headings, ``constants`` our names to a value that fills absent
    columns and empty cells, ``skip`` their headings to the cells whose rows are no results, ``wide``
    headings of columns that hold one analyte each to what is true of them. In a ``plain`` layout the
    headings are our names.
    """

    plain: bool = False
    columns: Mapping[str, str] = field(default_factory=dict)
    constants: Mapping[str, str] = field(default_factory=dict)
    skip: Mapping[str, frozenset[str]] = field(default_factory=dict)
    wide: Mapping[str, Mapping[str, str]] = field(default_factory=dict)
    date_format: str = ""
    decimal: str = "."
    delimiter: str = ""
    encoding: str = ""
    time_zone: str = ""
    sheet: str = ""
    skip_rows: int = 0

    @classmethod
    def read(cls, path: Path) -> Layout:
        """Read a mapping file.

        Raises
        ------
        FileMissing
            If there is no such file.
        ValueRefused
            If it is not TOML, or a key or value in it is not one of those documented.
        """
        if not os.path.isfile(path):
            raise FileMissing(path, "name the mapping file of this laboratory")
        try:
            document = tomllib.loads(path.read_text(encoding="utf-8-sig"))
        except OSError as error:
            raise ValueRefused("mapping file", path.name, f"it cannot be read: {error.strerror}") from error
        except (ValueError, RecursionError) as error:  # also numbers without end, and nesting without end
            raise ValueRefused("mapping file", path.name, f"it is not TOML: {error}") from error
        return cls(**{key: _reader(key)(key, value) for key, value in document.items()})

    def __post_init__(self) -> None:
        repeated = set(self.columns.values()) & set(self.wide)
        if repeated:
            raise ValueRefused(
                "column", min(repeated), "it stands under [columns] and under [wide]; keep one"
            )
        if not self.plain:
            self._require({*self.columns, *self.constants})

    def _require(self, given: set[str]) -> None:
        missing = [name for name in REQUIRED if name not in given]
        if self.wide:
            missing = [name for name in missing if name == "sample" or not self._every_wide(name)]
        if missing:
            raise ValueRefused(
                "mapping file",
                ", ".join(missing),
                "each of sample, analyte, value and unit needs a line under [columns] or [constants], "
                "or [wide] columns that say them",
            )

    def _every_wide(self, name: str) -> bool:
        return name == "value" or all(name in facts for facts in self.wide.values())

    def bind(self, headings: Iterable[str], name: str) -> Layout:
        """Return this layout with every column found among the headings of the file of that name.

        Raises
        ------
        ValueRefused
            If a column is not in the file; for the plain layout also if a heading is not one of ours.
        """
        present = [heading for heading in headings if heading]
        if self.plain:
            return replace(_plain(present, name), decimal=self.decimal)
        for heading in (*self.columns.values(), *self.skip, *self.wide):
            if heading not in present:
                near = near_names(heading, present)
                remedy = f"near headings are {near}" if near else f"it has {', '.join(present)[:300]}"
                raise ValueRefused("column", heading, f"{name} has no such heading; {remedy}")
        return self


PLAIN = Layout(plain=True)


def zone(name: str) -> ZoneInfo:
    """Return the time zone of an IANA name.

    Raises
    ------
    ValueRefused
        If there is none of that name.
    """
    try:
        return ZoneInfo(name)
    except (LookupError, ValueError, OSError) as error:
        raise ValueRefused("time zone", name, "write an IANA name such as Europe/Lisbon") from error


def _plain(present: list[str], name: str) -> Layout:
    for heading in present:
        _known("column", heading, FIELDS, f"{name} is read with our own column set")
    missing = [wanted for wanted in REQUIRED if wanted not in present]
    if missing:
        remedy = "add them, or say with a mapping file how this laboratory names its columns"
        raise ValueRefused("laboratory file", name, f"it has no column {', '.join(missing)}; {remedy}")
    return Layout(columns={heading: heading for heading in present})


def _known(what: str, written: str, known: Iterable[str], why: str) -> str:
    """Return the written name if it is one of the known, or refuse it with the near ones."""
    names = list(known)
    if written not in names:
        near = near_names(written, names)
        remedy = f"did you mean {near}?" if near else f"it takes {', '.join(names)}"
        raise ValueRefused(what, written, f"{why}; {remedy}")
    return written


def _reader(key: str) -> Callable[[str, Any], Any]:
    return _READERS[_known("key", key, _READERS, "a mapping file has no such key")]


def _string(key: str, value: Any) -> str:
    if not isinstance(value, str) or not value:
        raise ValueRefused(key, value, "write a text between quotation marks")
    return value


def _cell(key: str, value: Any) -> str:
    """Return a constant, written as the laboratory would write the cell."""
    if type(value) is float:
        raise ValueRefused(key, value, "write it between quotation marks, with the decimal mark of the file")
    return str(value) if type(value) is int else _string(key, value)


def _table(key: str, value: Any) -> dict[str, Any]:
    if not isinstance(value, dict) or not value:
        raise ValueRefused(key, value, f"write it as a table: [{key}] and lines below")
    return value


def _columns(key: str, value: Any) -> dict[str, str]:
    why = f"[{key}] has our name on the left and the laboratory's on the right"
    return {
        _known(key, ours, FIELDS, why): " ".join(_string(ours, theirs).split())
        for ours, theirs in _table(key, value).items()
    }


def _constants(key: str, value: Any) -> dict[str, str]:
    return {
        _known(key, ours, FIELDS, f"[{key}] has our names on the left"): _cell(ours, text)
        for ours, text in _table(key, value).items()
    }


def _skip(key: str, value: Any) -> dict[str, frozenset[str]]:
    return {
        " ".join(heading.split()): frozenset(_cells(heading, cells))
        for heading, cells in _table(key, value).items()
    }


def _cells(heading: str, cells: Any) -> list[str]:
    if not isinstance(cells, list) or not all(isinstance(cell, str) for cell in cells):
        raise ValueRefused(heading, cells, 'list the cells whose rows are no results, as in ["QC", "BLANK"]')
    return [cell.strip() for cell in cells]


def _wide(key: str, value: Any) -> dict[str, dict[str, str]]:
    why = f"[{key}] says what holds for a column of one analyte"
    return {
        " ".join(heading.split()): {
            _known(heading, ours, _WIDE_FIELDS, why): _cell(ours, text)
            for ours, text in _table(heading, facts).items()
        }
        for heading, facts in _table(key, value).items()
    }


def _date_format(key: str, value: Any) -> str:
    """Accept a format that gives a date back, and does not look like ISO 8601 while being none."""
    text, probe = _string(key, value), datetime(2026, 3, 14)  # noqa: DTZ001 - only its digits are compared
    try:
        kept = datetime.strptime(probe.strftime(text), text)  # noqa: DTZ007 - as above
    except ValueError as error:
        raise ValueRefused(key, text, "write it as in %d.%m.%Y %H:%M") from error
    if kept.date() != probe.date() or text.startswith(("%Y-%d", "%Y/%d")):
        raise ValueRefused(key, text, "it needs day, month and year, as in %d.%m.%Y %H:%M")
    return text


def _decimal(key: str, value: Any) -> str:
    return _known(key, _string(key, value), (".", ","), "the decimal mark is a point or a comma")


def _delimiter(key: str, value: Any) -> str:
    return _known(key, _string(key, value), DELIMITERS, "cells are divided by one of four marks")


def _time_zone(key: str, value: Any) -> str:
    return str(zone(_string(key, value)))


def _skip_rows(key: str, value: Any) -> int:
    if type(value) is not int or not 0 <= value <= 1000:
        raise ValueRefused(key, value, "write how many rows stand above the headings, 0 to 1000")
    return value


_READERS: Mapping[str, Callable[[str, Any], Any]] = {
    "columns": _columns,
    "constants": _constants,
    "skip": _skip,
    "wide": _wide,
    "date_format": _date_format,
    "decimal": _decimal,
    "delimiter": _delimiter,
    "encoding": _string,
    "time_zone": _time_zone,
    "sheet": _string,
    "skip_rows": _skip_rows,
}
