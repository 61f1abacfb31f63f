"""Washes, and the movements of caught water between containers."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from enum import StrEnum

from effluent.domain.field import about
from effluent.domain.quantity import Quantity

__all__ = ["MeasuredBy", "Movement", "MovementKind", "RunningMode", "Wash", "WashKind"]


class WashKind(StrEnum):
    """What was done (common practice, no source)."""

    DESALINATION = "desalination wash"
    RECOVERY = "performance recovery wash"
    GRIT = "abrasive grit clean"


class RunningMode(StrEnum):
    """How the engine turned."""

    MOTORING = "motoring"
    IDLE = "idle"


class MeasuredBy(StrEnum):
    """How a volume was found."""

    LEVEL_STICK = "level stick"
    SCALE = "scale"
    METER = "meter"
    GAUGE = "gauge"
    MARKED_CAN = "marked can"
    ESTIMATE = "estimate"


class MovementKind(StrEnum):
    """How a container's level changed."""

    FILL = "fill"
    TRANSFER = "transfer"
    WITHDRAWAL = "withdrawal"


@dataclass(frozen=True, kw_only=True)
class Wash:
    """One wash of one engine."""

    code: str = about("wash number", default="")
    kind: WashKind = about("wash kind")
    mode: RunningMode = about("how the engine turned")
    engine: str = about("engine serial number", refers="engine")
    site: str = about("where it was done", refers="site")
    performed_at: datetime = about("when, local time of the site unless an offset is given")
    performed_by: str = about("who did it", refers="person")
    location: str = about("stand or bay", default="")
    task: str = about("task or work-order reference", default="")
    engine_hours: str = about("engine hours at the wash", default="")
    engine_cycles: str = about("engine cycles at the wash", default="")
    outside_air: Quantity | None = about("outside air temperature", measures="temperature", default=None)
    weather: str = about("weather", default="")
    cleaner: str | None = about("cleaner", refers="cleaner", default=None)
    lot: str = about("lot number of the cleaner", default="")
    concentrate: Quantity | None = about("cleaner as delivered, volume", measures="volume", default=None)
    solution_water: Quantity | None = about("water mixed into the solution", measures="volume", default=None)
    rinse_water: Quantity | None = about("water rinsed with", measures="volume", default=None)
    additive: str = about("cold-weather additive", default="")
    additive_volume: Quantity | None = about("volume of the additive", measures="volume", default=None)
    grit: str = about("grit, as in crushed nut shell", default="")
    grit_mass: Quantity | None = about("mass of the grit", measures="mass", default=None)
    water_reading: Quantity | None = about(
        "conductivity or dissolved solids of the water", measures="water reading", default=None
    )
    soaks: int | None = about("number of soaks", default=None)
    rinses: int | None = about("number of rinses", default=None)
    caught: Quantity | None = about("volume caught, with its uncertainty", measures="volume", default=None)
    caught_by: MeasuredBy | None = about("how the caught volume was found", default=None)
    retained: Quantity | None = about(
        "volume declared to stay in the engine", measures="volume", default=None
    )
    retained_basis: str = about("basis of the retained volume", default="")
    remarks: str = about("remarks", default="")


@dataclass(frozen=True, kw_only=True)
class Movement:
    """Caught water into, between or out of containers."""

    code: str = about("movement number", default="")
    kind: MovementKind = about("fill, transfer or withdrawal")
    moved_at: datetime = about("when, local time of the site unless an offset is given")
    moved_by: str = about("who did it", refers="person")
    volume: Quantity = about("volume moved, with its uncertainty", measures="volume")
    wash: str | None = about("wash it came from", refers="wash", default=None)
    source: str | None = about("container it left", refers="container", default=None)
    target: str | None = about("container it went into", refers="container", default=None)
    measured_by: MeasuredBy | None = about("how the volume was found", default=None)
    destination: str = about("where a withdrawal went", default="")
    remarks: str = about("remarks", default="")
