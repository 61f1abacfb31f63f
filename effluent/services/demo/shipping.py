"""The shipments of the demo: one issued and returned signed, one left as a draft."""

from __future__ import annotations

from collections.abc import Sequence
from datetime import date, time, timedelta
from pathlib import Path

from effluent.domain import Manifest, ManifestLine
from effluent.services import manifest
from effluent.services.demo.scenario import standing
from effluent.services.demo.station import Station
from effluent.services.load import proposed
from effluent.services.sheet import pdf

__all__ = ["draft", "ship"]

_DESK, _OFFICER = "TC", "RS"
_ACCEPT = "cadmium is over the sewer limit: that is why this water is hauled and not released"
_SIGNED_BY = "M. Ferro (invented), Murre Basin Treatment Works"


def ship(station: Station, drums: Sequence[str], day: date, paper: Path) -> str:
    """Issue a manifest, have it accepted, and record the signed copy; return its number."""
    stage, zone = station.stage, station.place.zone
    stage.set_clock(day, time(10), zone)
    code = manifest.draft(stage.book, _manifest(station, drums, ("GANNET", "SHOAL")), by=_DESK)
    stage.set_clock(day, time(15), zone)
    manifest.issue(stage.book, code, by=_OFFICER, accept=_ACCEPT)
    accepted = day + timedelta(days=3)
    stage.set_clock(accepted, time(11), zone)
    manifest.accepted(stage.book, code, by=_DESK, on=accepted)
    returned = day + timedelta(days=20)
    stage.set_clock(returned, time(9), zone)
    manifest.returned(stage.book, code, by=_DESK, on=returned, signed_by=_SIGNED_BY)
    pdf(stage.book, code, str(paper / f"{code}-returned.pdf"))
    return code


def draft(station: Station, drums: Sequence[str], day: date, paper: Path) -> str:
    """Draft a manifest and return its number."""
    station.stage.set_clock(day, time(10), station.place.zone)
    book = station.stage.book
    code = manifest.draft(book, _manifest(station, drums, ("SHOAL",)), by=_DESK)
    pdf(book, code, str(paper / f"{code}-draft.pdf"), paper="Letter")
    return code


def _manifest(station: Station, drums: Sequence[str], carriers: tuple[str, ...]) -> Manifest:
    return Manifest(
        site=station.place.site,
        carriers=carriers,
        facility="MURRE",
        emergency_contact="",
        emergency_phone="",
        special_handling="Invented demo: nothing is to be moved on this paper.",
        lines=tuple(
            ManifestLine(
                container=drum, description=_description(station.cleaners[drum]), quantity=proposed()
            )
            for drum in sorted(drums)
        ),
    )


def _description(cleaner: str) -> str:
    kind = next(record.type for record in standing() if record.code == cleaner)
    return f"Turbine-engine wash water with {kind} cleaner (invented description)"
