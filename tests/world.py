"""A small invented ledger for tests: one station, two discharge points, a few people, a drum and samples.

Everything here is invented. Build one and add what a test needs::

    with world(ledger_place) as book:
        sample = add_sample(book, container="T-1")
        add_result(book, sample, "cadmium", "0.12", "mg/L")
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Any

from effluent.calc.units import KINDS, canonical_unit, convert, nearest
from effluent.domain import (
    Container,
    ContainerKind,
    Engine,
    Fraction,
    Limit,
    Method,
    Person,
    Point,
    PointKind,
    Quantity,
    Result,
    RunningMode,
    Sample,
    Site,
    Wash,
    WashKind,
    exact,
)
from effluent.services.ledger import create, open_ledger
from effluent.store.ledger import Ledger
from effluent.store.writing import Writing

__all__ = ["NOON", "NOW", "add_limit", "add_result", "add_sample", "add_wash", "record", "world"]

NOW = datetime(2026, 6, 1, 12, tzinfo=UTC)
NOON = datetime(2026, 3, 2, 12, tzinfo=UTC)

SITE = Site(
    code="LIS",
    name="Lisbon line station (invented)",
    operator="Invented Air Services",
    address="1 Hangar Road, Invented",
    time_zone="Europe/Lisbon",
)
_STANDING = (
    Person(code="RS", name="Rui Serra", role="environmental officer"),
    Person(code="JT", name="Jo Tavares", role="deputy"),
    SITE,
    Point(code="SEW", site="LIS", name="separator outlet", kind=PointKind.SEWER),
    Point(code="HAUL", site="LIS", name="collected by carrier", kind=PointKind.HAUL_ONLY),
    Container(code="T-1", kind=ContainerKind.TOTE, site="LIS", capacity=Quantity("1000", "L")),
    Engine(code="E-100", type_label="Turbofan A (invented)", site="LIS"),
)


_made: list[bytes] = []
"""A SQLite ledger with the standing records, made once: making one takes longer than most tests."""


@contextmanager
def world(place: str) -> Iterator[Ledger]:
    """Make a ledger at a place with the standing records, and give it open; the clock stands at `NOW`."""
    if "://" in place:
        _make(place)
    else:
        if not _made:
            _make(place)
            _made.append(Path(place).read_bytes())
        Path(place).write_bytes(_made[0])
    with open_ledger(place, clock=lambda: NOW) as book:
        yield book


def _make(place: str) -> None:
    create(place, Person(code="AM", name="Ana Moreira", role="supervisor"), number="test", clock=lambda: NOW)
    with open_ledger(place, clock=lambda: NOW) as book:
        record(book, *_STANDING)


def record(book: Ledger, *values: Any) -> list[str]:
    """Record values as they are, in one entry, and return their codes."""

    def job(writing: Writing) -> list[str]:
        return [writing.record(value) for value in values]

    return book.write(job, by="AM", action="set up")


def add_sample(book: Ledger, **given: Any) -> str:
    """Record a grab sample drawn at `NOON`, of tote T-1 unless another origin is given."""
    origin = {} if given.keys() & {"container", "wash", "point"} else {"container": "T-1"}
    standard = {"method": Method.GRAB, "started_at": NOON, "taken_by": "RS", **origin}
    return record(book, Sample(**{**standard, **given}))[0]


def add_wash(book: Ledger, code: str = "") -> str:
    """Record a desalination wash of E-100 at `NOON`."""
    wash = Wash(
        code=code,
        kind=WashKind.DESALINATION,
        mode=RunningMode.MOTORING,
        engine="E-100",
        site="LIS",
        performed_at=NOON,
        performed_by="AM",
        rinse_water=Quantity("60", "L"),
    )
    return record(book, wash)[0]


def add_result(book: Ledger, sample: str, analyte: str, text: str, unit: str, **given: Any) -> int:
    """Record a result as it is; `text` is a plain number, `given` overrides fields of the result."""
    canonical = canonical_unit(unit or KINDS["pH"])
    value = nearest(convert(exact(text), unit or canonical, canonical))
    standard = {
        "fraction": Fraction.TOTAL,
        "text": text,
        "number": text,
        "unit": unit,
        "value": value,
        "canonical_unit": canonical,
    }
    result = Result(sample=sample, analyte=analyte, **{**standard, **given})
    return book.write(lambda writing: writing.add_result(result), by="RS", action="enter result")


def add_limit(book: Ledger, point: str, analyte: str, value: str, **given: Any) -> str:
    """Record an instantaneous maximum, verified, in force since 2020; `given` overrides its fields."""
    standard = {
        "effective_from": date(2020, 1, 1),
        "authority": "Invented Water Board",
        "document": "permit 7 (invented)",
        "entered_by": "RS",
        "verified_by": "JT",
        "verified_on": date(2020, 1, 2),
    }
    limit = Limit(point=point, analyte=analyte, value=Quantity.parse(value), **{**standard, **given})
    return record(book, limit)[0]
