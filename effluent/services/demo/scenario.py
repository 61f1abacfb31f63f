"""The invented scenario of the demo, as records and figures."""

from __future__ import annotations

import functools
import tomllib
from collections.abc import Mapping
from enum import StrEnum
from importlib import resources
from typing import Any, NamedTuple, TypeVar, get_args, get_type_hints

from effluent.domain import Cleaner, Company, Container, Engine, Limit, Person, Point, Quantity, Site
from effluent.services.limit import Adoption

__all__ = ["Finding", "Habit", "adoptions", "findings", "habits", "limits", "mapping", "page", "standing"]

_T = TypeVar("_T")
_CLASSES = (Person, Company, Site, Point, Cleaner, Engine, Container)
Span = tuple[float, float]


class Habit(NamedTuple):
    """How engines of one type are washed: litres from … to, and the percentage that is caught."""

    rinse: Span
    recovery_rinse: Span
    caught: Span
    cleaner: str
    concentrate: int
    water: int


class Finding(NamedTuple):
    """What a laboratory finds of one analyte: in rinse water, in drums, and where it stops seeing."""

    analyte: str
    water: Span
    drum: Span
    places: int
    limit: float
    unit: str


def standing() -> tuple[Any, ...]:
    """Return the standing records in an order in which each refers to earlier ones only."""
    tables = _table("operator")
    return tuple(_record(cls, cells) for cls in _CLASSES for cells in tables[cls.__name__.lower()])


def habits() -> Mapping[str, Habit]:
    """Return how engines are washed, by engine type."""
    return {name: Habit(**cells) for name, cells in _table("play")["wash"].items()}


def findings(laboratory: str) -> tuple[Finding, ...]:
    """Return what a laboratory finds, in the order of its columns."""
    return tuple(
        Finding(
            analyte, cells["water"], cells["drum"], cells["places"], cells["limit"], cells.get("unit", "")
        )
        for analyte, cells in _table("play")[laboratory].items()
    )


def limits(kind: str) -> tuple[Limit, ...]:
    """Return the invented authority's own limits of one kind, ``local`` or ``unverified``."""
    tables = _table("limits")
    return tuple(_record(Limit, {**tables["terms"], **cells}) for cells in tables[kind])


def adoptions() -> tuple[Adoption, ...]:
    """Return the rows of shipped tables that are taken over."""
    tables = _table("limits")
    return tuple(Adoption(**tables["adoption_terms"], **cells) for cells in tables["adopted"])


def mapping(laboratory: str) -> bytes:
    """Return a laboratory's mapping file."""
    content: bytes = _file(f"{laboratory}.toml").read_bytes()
    return content


def page(name: str) -> str:
    """Return a page of text with its places to fill in."""
    text: str = _file(f"{name}.txt").read_text(encoding="utf-8")
    return text


@functools.cache
def _table(name: str) -> dict[str, Any]:
    return tomllib.loads(_file(f"{name}.toml").read_text(encoding="utf-8"))


def _file(name: str) -> Any:
    return resources.files("effluent.reference").joinpath("demo", name)


def _record(cls: type[_T], cells: Mapping[str, Any]) -> _T:
    hints = get_type_hints(cls)
    return cls(**{name: _read(hints[name], cell) for name, cell in cells.items()})


def _read(hint: Any, cell: Any) -> Any:
    """Return a cell as what its field holds."""
    if not isinstance(cell, str):
        return cell
    for kind in get_args(hint) or (hint,):
        if kind is Quantity:
            return Quantity.parse(cell)
        if issubclass(kind, StrEnum):
            return kind(cell)
    return cell
