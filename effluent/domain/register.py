"""The standing records: places, people, engines, cleaners and containers."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from effluent.domain.field import about
from effluent.domain.quantity import Quantity

__all__ = [
    "Cleaner",
    "CleanerForm",
    "CleanerType",
    "Company",
    "CompanyRole",
    "Container",
    "ContainerKind",
    "Engine",
    "Person",
    "Point",
    "PointKind",
    "Site",
]


class PointKind(StrEnum):
    """Where water may leave a site."""

    SEWER = "sewer connection"
    STORM_DRAIN = "storm drain"
    SURFACE_WATER = "surface water"
    HAUL_ONLY = "haul only"


class CleanerType(StrEnum):
    """The three families of gas-path cleaner (common practice, no source)."""

    EMULSION = "kerosene-water emulsion"
    SOLVENT = "solvent-based"
    AQUEOUS = "aqueous-based"


class CleanerForm(StrEnum):
    """As delivered."""

    CONCENTRATE = "concentrate"
    READY = "ready to use"


class ContainerKind(StrEnum):
    """What holds caught water."""

    DRUM = "drum"
    TOTE = "tote"
    BOWSER = "bowser"
    TANK = "tank"


class CompanyRole(StrEnum):
    """What another company does for the site."""

    CARRIER = "carrier"
    FACILITY = "receiving facility"
    LABORATORY = "laboratory"


@dataclass(frozen=True, kw_only=True)
class Person:
    """Somebody who records, samples, verifies or approves."""

    code: str = about("initials or badge")
    name: str = about("full name")
    role: str = about("role at the site", default="")


@dataclass(frozen=True, kw_only=True)
class Company:
    """A carrier, receiving facility or laboratory."""

    code: str = about("short code")
    name: str = about("full name")
    role: CompanyRole = about("what it does for the site")
    address: str = about("postal address", default="")
    phone: str = about("telephone with country code", default="")
    identification: str = about("identification number the authority gave it", default="")


@dataclass(frozen=True, kw_only=True)
class Site:
    """A place where engines are washed and water is held."""

    code: str = about("short code")
    name: str = about("name of the station")
    operator: str = about("who answers for the water")
    address: str = about("postal address")
    time_zone: str = about("IANA time zone, as in Europe/Lisbon")
    phone: str = about("telephone with country code", default="")
    identification: str = about("identification number the authority gave it", default="")
    emergency_contact: str = about("name or contract number that answers in an emergency", default="")
    emergency_phone: str = about("telephone that answers in an emergency, day and night", default="")
    unaccounted_threshold: Quantity | None = about(
        "share of the water put in that may go unaccounted before it is flagged, as in '20 %'",
        measures="share",
        default=None,
    )
    shipping_paper_country: str = about("country whose paperwork applies", default="")


@dataclass(frozen=True, kw_only=True)
class Point:
    """A discharge point of a site, or the way by which everything is hauled."""

    code: str = about("short code")
    site: str = about("site it belongs to", refers="site")
    name: str = about("where exactly")
    kind: PointKind = about("where the water goes")
    authority: str = about("who governs it", default="")
    permit: str = about("permit or approval reference", default="")


@dataclass(frozen=True, kw_only=True)
class Engine:
    """A turbine engine."""

    code: str = about("serial number")
    type_label: str = about("engine type")
    site: str = about("home station", refers="site")
    aircraft: str = about("aircraft registration", default="")
    position: str = about("position on the aircraft", default="")
    hours: str = about("hours since new", default="")
    cycles: str = about("cycles since new", default="")


@dataclass(frozen=True, kw_only=True)
class Cleaner:
    """A gas-path cleaner."""

    code: str = about("short code")
    label: str = about("product label")
    type: CleanerType = about("cleaner type")
    form: CleanerForm = about("as delivered")
    mix_ratio: str = about("parts cleaner to parts water, as in 1:4; only for a concentrate", default="")
    density: Quantity | None = about("density as delivered", measures="density", default=None)
    flash_point: Quantity | None = about("flash point", measures="temperature", default=None)
    ph: Quantity | None = about("pH as delivered", measures="pH", default=None)


@dataclass(frozen=True, kw_only=True)
class Container:
    """A drum, tote, bowser or tank."""

    code: str = about("number painted on it")
    kind: ContainerKind = about("what it is")
    site: str = about("where it stands", refers="site")
    capacity: Quantity = about("nominal capacity", measures="volume")
    fill_fraction: Quantity = about(
        "working fill, as in '95 %'", measures="share", default=Quantity("95", "%")
    )
    tare: Quantity | None = about("mass when empty", measures="mass", default=None)
    material: str = about("steel, plastic or other", default="")
