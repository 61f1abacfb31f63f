"""What washes need on top of the invented ledger: cleaners, drums, another site, and washes to record."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

from effluent.domain import (
    Cleaner,
    CleanerForm,
    CleanerType,
    Container,
    ContainerKind,
    Engine,
    MeasuredBy,
    Movement,
    MovementKind,
    Quantity,
    RunningMode,
    Site,
    Wash,
    WashKind,
)
from effluent.services.container import contents, move
from effluent.services.wash import record as record_wash
from effluent.store.ledger import Ledger
from tests.world import NOON, record

__all__ = ["add_station", "desalination", "grit", "held", "pour", "q", "recovery", "rinse", "withdraw"]


def q(written: str) -> Quantity:
    """Return the quantity that a text names."""
    return Quantity.parse(written)


def add_station(book: Ledger) -> None:
    """Record two cleaners, three drums of 208 L, an engine, and another site with a drum of its own."""
    drums = [
        Container(code=code, kind=ContainerKind.DRUM, site="LIS", capacity=q("208 L"))
        for code in ("D-1", "D-2", "D-3")
    ]
    record(
        book,
        *drums,
        Cleaner(
            code="AQ", label="Blue", type=CleanerType.AQUEOUS, form=CleanerForm.CONCENTRATE, mix_ratio="1:4"
        ),
        Cleaner(code="RTU", label="Green", type=CleanerType.SOLVENT, form=CleanerForm.READY),
        Engine(code="E-200", type_label="Turboprop B (invented)", site="LIS"),
        Site(
            code="CHI",
            name="Chicago (invented)",
            operator="Invented",
            address="-",
            time_zone="America/Chicago",
        ),
        Container(code="X-1", kind=ContainerKind.DRUM, site="CHI", capacity=q("208 L")),
    )


def desalination(**given: Any) -> Wash:
    """Return a wash of E-100 with 60 L of fresh water at noon, nothing caught."""
    standard = {
        "kind": WashKind.DESALINATION,
        "mode": RunningMode.MOTORING,
        "engine": "E-100",
        "site": "LIS",
        "performed_at": NOON,
        "performed_by": "AM",
        "rinse_water": q("60 L"),
    }
    return Wash(**{**standard, **given})


def recovery(**given: Any) -> Wash:
    """Return a wash with 4 L of concentrate in 16 L of water."""
    standard = {
        "kind": WashKind.RECOVERY,
        "cleaner": "AQ",
        "concentrate": q("4 L"),
        "solution_water": q("16 L"),
    }
    return desalination(**{**standard, **given})


def grit(**given: Any) -> Wash:
    """Return an abrasive grit clean at idle."""
    standard = {
        "kind": WashKind.GRIT,
        "mode": RunningMode.IDLE,
        "rinse_water": None,
        "grit": "crushed nut shell",
    }
    return desalination(**{**standard, **given})


def rinse(book: Ledger, litres: str, *containers: str, hours: float = 0, **given: Any) -> str:
    """Record a desalination wash that caught a volume, all of it in one container; return its number."""
    moment = NOON + timedelta(hours=hours)
    wash = desalination(
        performed_at=moment,
        rinse_water=q("1000 L"),
        caught=q(litres),
        caught_by=MeasuredBy.METER,
        **given,
    )
    return record_wash(book, wash, dict.fromkeys(containers), by="AM", accept="made up").code


def pour(book: Ledger, litres: str, source: str, target: str | None, *, hours: float) -> str:
    """Record a transfer, or a withdrawal where there is no target; return its number."""
    kind = MovementKind.TRANSFER if target else MovementKind.WITHDRAWAL
    movement = Movement(
        kind=kind,
        moved_at=NOON + timedelta(hours=hours),
        moved_by="AM",
        volume=q(litres),
        source=source,
        target=target,
        destination="" if target else "treatment works (invented)",
    )
    return move(book, movement, by="AM")


def withdraw(book: Ledger, litres: str, source: str, *, hours: float) -> str:
    """Record a withdrawal; return its number."""
    return pour(book, litres, source, None, hours=hours)


def held(book: Ledger, container: str) -> dict[str, str]:
    """Return what a container holds of each wash, in litres."""
    return {origin.wash.code: str(origin.volume_l) for origin in contents(book, container).origins}
