"""What a manifest needs on top of the invented ledger: drums, companies, water sampled and judged."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

from effluent.domain import (
    Company,
    CompanyRole,
    Container,
    ContainerKind,
    Manifest,
    ManifestLine,
    Movement,
    MovementKind,
    Quantity,
)
from effluent.services.load import proposed
from effluent.store.ledger import Ledger
from tests.world import NOON, add_limit, add_result, add_sample, add_wash, record

__all__ = ["DESCRIPTION", "add_drums", "add_parties", "fill", "line", "manifest", "ready"]

DESCRIPTION = "Wash water with cadmium, non-hazardous here (invented)"


def add_parties(book: Ledger) -> None:
    """Record two carriers, a receiving facility and a laboratory."""
    role = CompanyRole
    record(
        book,
        Company(code="HAUL", name="Invented Haulage", role=role.CARRIER, phone="+00 555 0142"),
        Company(code="SEA", name="Second Invented Haulage", role=role.CARRIER),
        Company(
            code="WORKS", name="Invented Treatment Works", role=role.FACILITY, address="Basin 9, Nowhere"
        ),
        Company(code="LAB", name="Invented Laboratory", role=role.LABORATORY),
    )


def add_drums(book: Ledger, *codes: str) -> None:
    """Record empty steel drums of 208 L at the station."""
    capacity = Quantity("208", "L")
    drums = [
        Container(code=code, kind=ContainerKind.DRUM, site="LIS", capacity=capacity, material="steel")
        for code in codes
    ]
    record(book, *drums)


def fill(book: Ledger, container: str, litres: str = "150", *, hours: int = 0) -> str:
    """Record a wash and all its water going into a container, `hours` after noon; return the wash."""
    wash = add_wash(book)
    poured = Movement(
        kind=MovementKind.FILL,
        moved_at=NOON + timedelta(hours=hours),
        moved_by="AM",
        volume=Quantity(litres, "L"),
        wash=wash,
        target=container,
    )
    record(book, poured)
    return wash


def ready(book: Ledger, *containers: str, cadmium: str = "0.02") -> None:
    """Record drums whose chain is whole: filled, sampled an hour later, read, and held against a limit."""
    if not book_has_limit(book):
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    add_drums(book, *containers)
    for container in containers:
        fill(book, container)
        sample = add_sample(book, container=container, started_at=NOON + timedelta(hours=1))
        add_result(book, sample, "cadmium", cadmium, "mg/L")


def book_has_limit(book: Ledger) -> bool:
    with book.reading() as reading:
        return bool(reading.values("limit"))


def line(container: str, quantity: str = "", **given: Any) -> ManifestLine:
    """Return a line; without a quantity the one on record is asked for."""
    amount = Quantity.parse(quantity) if quantity else proposed()
    return ManifestLine(**{"container": container, "description": DESCRIPTION, "quantity": amount, **given})


def manifest(*lines: ManifestLine, **given: Any) -> Manifest:
    """Return a draft for the invented works."""
    standard = {
        "site": "LIS",
        "facility": "WORKS",
        "carriers": ("HAUL",),
        "emergency_contact": "Invented Duty Desk",
        "emergency_phone": "+00 555 0111",
    }
    return Manifest(**{**standard, **given}, lines=lines)
