"""The codes that the official manifest form asks for: kinds of container, units of quantity."""

from __future__ import annotations

import functools
import re
from dataclasses import dataclass

from effluent.domain.register import ContainerKind
from effluent.errors import UnitUnknown, ValueRefused
from effluent.reference.table import Source, read

__all__ = ["Code", "container_code", "container_codes", "unit_code", "unit_codes"]


@dataclass(frozen=True)
class Code:
    """A code of the form, and what it stands for."""

    code: str
    meaning: str
    source: Source


@functools.cache
def container_codes() -> tuple[Code, ...]:
    """Return the container types of Item 10, Table I."""
    return tuple(Code(row["code"], row["meaning"], Source.of(row)) for row in read("container_codes"))


@functools.cache
def unit_codes() -> tuple[Code, ...]:
    """Return the units of measure of Item 12, Table II."""
    return tuple(Code(row["code"], row["meaning"], Source.of(row)) for row in read("unit_codes"))


def container_code(kind: ContainerKind, material: str = "") -> str:
    """Return the container type code under which a container's contents travel.

    A tote has no code of its own and travels as a portable tank (TP, common practice, no source). A
    bowser is a tank on wheels (TT); a fixed tank stays where it is, and its contents travel by cargo
    tank (TT). The last two are our reading of Table I.

    Parameters
    ----------
    kind : ContainerKind
        What holds the water.
    material : str, optional
        What a drum is made of; not needed for the others. The first word that names a material counts.

    Raises
    ------
    ValueRefused
        If a drum's material does not say whether it is metal, plastic, fibre or wood.

    Examples
    --------
    >>> container_code(ContainerKind.DRUM, "steel")
    'DM'
    """
    words = [f"{kind.value}:{word}" for word in re.findall(r"\w+", material.casefold())]
    for name in (kind.value, *words):
        if name in _held():
            return _held()[name]
    raise ValueRefused(
        f"material of a {kind.value}", material, "the form needs it: write steel, plastic, fibre or wood"
    )


def unit_code(unit: str) -> str:
    """Return the unit code for a unit of volume or mass.

    Parameters
    ----------
    unit : str
        As in ``L``, ``gal``, ``kg`` or ``lb``; a gallon is the US gallon.

    Raises
    ------
    UnitUnknown
        If the form has no code for it.

    Examples
    --------
    >>> unit_code("L"), unit_code("gal")
    ('L', 'G')
    """
    try:
        return _spelled()[unit.strip()]
    except KeyError:
        raise UnitUnknown(unit, "the manifest form takes L, gal, kg, lb, t, short_ton, m3 or yd3") from None


@functools.cache
def _held() -> dict[str, str]:
    return {name: row["code"] for row in read("container_codes") for name in row["holds"].split(";") if name}


@functools.cache
def _spelled() -> dict[str, str]:
    return {name: row["code"] for row in read("unit_codes") for name in row["spellings"].split(";")}
