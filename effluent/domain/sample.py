"""Samples and what the laboratory said about them."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum

from effluent.domain.field import about

__all__ = ["File", "Fraction", "Method", "Qualifier", "Result", "Sample"]


class Method(StrEnum):
    """How a sample was drawn."""

    GRAB = "grab"
    COMPOSITE = "composite"


class Fraction(StrEnum):
    """Which part of the sample a result speaks for."""

    TOTAL = "total"
    TOTAL_RECOVERABLE = "total recoverable"
    DISSOLVED = "dissolved"
    TCLP = "TCLP extract"


class Qualifier(StrEnum):
    """How a value stands to the truth: equal, below, above."""

    EQUAL = "="
    BELOW = "<"
    ABOVE = ">"


@dataclass(frozen=True, kw_only=True)
class Sample:
    """A bottle, and what it stands for: exactly one of container, wash and point."""

    code: str = about("sample number", default="")
    container: str | None = about("container it was drawn from", refers="container", default=None)
    wash: str | None = about("wash whose stream it was drawn from", refers="wash", default=None)
    point: str | None = about("discharge point it was drawn at", refers="point", default=None)
    method: Method = about("grab or composite")
    started_at: datetime = about("when; for a composite its start")
    ended_at: datetime | None = about("end of a composite", default=None)
    aliquots: int | None = about("number of aliquots of a composite", default=None)
    place: str = about("where exactly", default="")
    taken_by: str = about("who took it", refers="person")
    bottle: str = about("bottle", default="")
    preservation: str = about("preservation", default="")
    fraction: Fraction | None = about("fraction, where filtered or extracted in the field", default=None)
    laboratory: str | None = about("laboratory it went to", refers="company", default=None)
    remarks: str = about("remarks", default="")


@dataclass(frozen=True, kw_only=True)
class File:
    """A laboratory file that was read in."""

    code: str = about("file number", default="")
    name: str = about("name of the file")
    sha256: str = about("SHA-256 of its bytes")
    size: int = about("size in bytes")
    layout: str = about("SHA-256 of the layout it was read with, empty for the plain column set", default="")


@dataclass(frozen=True, kw_only=True)
class Result:
    """One reading of one sample, as reported and in canonical units.

    ``value`` and ``reporting_value`` are the doubles nearest to the exact rational numbers in
    ``canonical_unit``; for a non-detect ``value`` is the bound below which the truth lies.
    """

    sample: str = about("sample number", refers="sample")
    analyte: str = about("name, symbol or CAS number of the analyte")
    fraction: Fraction = about("which part of the sample it speaks for")
    text: str = about("value as the laboratory wrote it")
    unit: str = about("unit as the laboratory wrote it")
    qualifier: Qualifier = about("equal, below or above", default=Qualifier.EQUAL)
    number: str = about("the decimal number in the text, or the bound of a non-detect", default="")
    value: float = about("number in the canonical unit", default=0.0)
    canonical_unit: str = about("canonical unit", default="")
    flag: str = about("laboratory's flag, as in J or U", default="")
    detection_limit: str = about("detection limit, in the unit of the result", default="")
    reporting_limit: str = about("reporting limit, in the unit of the result", default="")
    reporting_value: float | None = about("reporting limit in the canonical unit", default=None)
    dilution_factor: str = about("dilution factor", default="")
    uncertainty: str = about("expanded uncertainty (k = 2), in the unit of the result", default="")
    density: str = about("density used to turn a mass ratio into mg/L", default="")
    test_method: str = about("test method", default="")
    analysed_at: datetime | None = about("when analysed", default=None)
    laboratory: str = about("laboratory", default="")
    report: str = about("laboratory's report number", default="")
    replicate: int = about("1, or 2 and up for a laboratory duplicate", default=1)
    supersedes: int | None = about("result this one was issued to replace", default=None)
    file: str | None = about("file it came from", refers="file", default=None)
    file_row: int | None = about("row of that file", default=None)
    row: int = about("result number in the ledger", default=0)
