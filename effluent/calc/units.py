"""Exact conversion between units, with rational numbers throughout.

The factors are those of the pint registry, read with `fractions.Fraction`; the registry takes about half a
second to build and is built on first use, which is not before units differ by more than metric prefixes.
What users may write is in `effluent.calc.spelling`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import cache, lru_cache
from types import MappingProxyType
from typing import TYPE_CHECKING, Any

from effluent.calc.number import decimal_text, leading_power, nearest
from effluent.calc.spelling import UnitName, read_unit
from effluent.domain import Quantity
from effluent.errors import UnitMismatch, ValueRefused

if TYPE_CHECKING:
    from pint import UnitRegistry

__all__ = [
    "KINDS",
    "READING_KINDS",
    "Conversion",
    "canonical",
    "canonical_unit",
    "conversion",
    "convert",
    "decimal_text",
    "kind_of",
    "nearest",
    "power_of_ten",
]

KINDS: Mapping[str, str] = MappingProxyType(
    {
        "volume": "L",
        "mass": "kg",
        "density": "kg/L",
        "temperature": "degC",
        "concentration": "mg/L",
        "mass ratio": "mg/kg",
        "volume ratio": "mL/L",
        "conductivity": "uS/cm",
        "pH": "s.u.",
        "share": "%",
        "load": "kg/d",
        "flow": "L/d",
        "turbidity": "NTU",
    }
)
"""What can be measured, and the unit in which it is compared."""

READING_KINDS: Mapping[str, frozenset[str]] = MappingProxyType(
    {
        "water reading": frozenset({"conductivity", "concentration", "mass ratio"}),
        "limit": frozenset(KINDS) - {"density", "volume"},
    }
)
"""Fields that take more than one kind; each value then keeps the kind of its own unit, without a density."""

_ALIKE = ({"density", "concentration"},)

# SI Brochure, 9th edition, table 7
_PREFIXES = {"nano": -9, "micro": -6, "milli": -3, "centi": -2, "deci": -1, "": 0, "hecto": 2, "kilo": 3}
_METRIC = {
    prefix + name: (name, power) for name in ("gram", "liter", "meter") for prefix, power in _PREFIXES.items()
}


@dataclass(frozen=True)
class Conversion:
    """One conversion with its working: ``value = magnitude * factor + offset``.

    ``density`` is the one the factor contains, ``None`` where none was needed.
    """

    value: Fraction
    factor: Fraction
    offset: Fraction
    density: Quantity | None
    working: str


@cache
def _registry() -> UnitRegistry[Any]:
    """Build the registry; pH, turbidity and share are dimensions of their own, so nothing slips between."""
    from pint import UnitRegistry

    registry: UnitRegistry[Any] = UnitRegistry(non_int_type=Fraction)
    for name in ("standard_unit", "nephelometric_unit", "share_percent"):
        registry.define(f"{name} = [{name}]")
    return registry


def kind_of(unit: str) -> str:
    """Return what a unit measures, a key of `KINDS`.

    Parameters
    ----------
    unit : str
        As a laboratory writes it.

    Raises
    ------
    UnitUnknown
        If nobody here can read it, or it could mean two units.
    """
    return read_unit(unit).kind


def canonical_unit(unit: str) -> str:
    """Return the unit in which readings of this unit's kind are compared.

    Parameters
    ----------
    unit : str
        As a laboratory writes it.

    Raises
    ------
    UnitUnknown
        If nobody here can read it, or it could mean two units.
    """
    return KINDS[kind_of(unit)]


@lru_cache(maxsize=4096)
def _line(source: str, target: str) -> tuple[Fraction, Fraction]:
    """Return factor and offset between two registry names, from two points of the line."""
    power = 0 if source == target else _metric_power(source, target)
    if power is not None:
        return Fraction(10) ** power, Fraction(0)
    registry = _registry()
    zero, one = (Fraction(registry.Quantity(Fraction(x), source).to(target).magnitude) for x in (0, 1))
    return one - zero, zero


def _metric_power(source: str, target: str) -> int | None:
    """Return n where two registry names differ by prefixes worth 10**n alone, ``None`` where by more."""
    units = [[_METRIC.get(part) for part in name.split("/")] for name in (source, target)]
    if len(units[0]) != len(units[1]):
        return None
    power, sign = 0, 1
    for one, other in zip(*units, strict=True):
        if one is None or other is None or one[0] != other[0]:
            return None
        power += sign * (one[1] - other[1])
        sign = -1
    return power


@lru_cache(maxsize=4096)
def _factors(unit: str, wanted: str, density: Quantity | None) -> tuple[Fraction, Fraction, Quantity | None]:
    """Return factor, offset and the density used."""
    source, target = read_unit(unit), read_unit(wanted)
    kinds = {source.kind, target.kind}
    if source.kind == target.kind or kinds in _ALIKE:
        return (*_line(source.name, target.name), None)
    if kinds not in ({"mass ratio", "concentration"}, {"mass", "volume"}):
        raise UnitMismatch(unit, wanted, _advice(source, target))
    if density is None:
        raise UnitMismatch(unit, wanted, "give the density of the liquid, as in '0.998 kg/L'")
    return (_through(source, target, _density_kg_l(density)), Fraction(0), density)


def _through(source: UnitName, target: UnitName, density_kg_l: Fraction) -> Fraction:
    """Return the factor over mg/kg = mg/L divided by kg/L, or over kg = L times kg/L."""
    before, _ = _line(source.name, read_unit(KINDS[source.kind]).name)
    after, _ = _line(read_unit(KINDS[target.kind]).name, target.name)
    multiplied = source.kind in {"mass ratio", "volume"}
    return before * (density_kg_l if multiplied else 1 / density_kg_l) * after


def _density_kg_l(density: Quantity) -> Fraction:
    if read_unit(density.unit).kind not in _ALIKE[0]:
        raise UnitMismatch(
            density.unit, KINDS["density"], "a density is a mass per volume, as in '0.998 kg/L'"
        )
    value = convert(density.magnitude, density.unit, KINDS["density"])
    if value <= 0:
        raise ValueRefused("density", str(density), "a density is above zero, as in '0.998 kg/L'")
    return value


def _advice(source: UnitName, target: UnitName) -> str:
    return (
        f"the first is a {source.kind}, the second a {target.kind}; "
        f"choose a unit like {KINDS[source.kind]} for a {source.kind}"
    )


def convert(magnitude: Fraction, unit: str, wanted: str, *, density: Quantity | None = None) -> Fraction:
    """Return a value in another unit, exactly.

    Parameters
    ----------
    magnitude : fractions.Fraction
        Number in `unit`.
    unit, wanted : str
        Units as a laboratory writes them.
    density : Quantity, optional
        Density of the liquid, mass per volume; used only between mass ratio (mg/kg, ppm, ppb) and
        concentration (mg/L), and between mass and volume.

    Returns
    -------
    fractions.Fraction
        Number in `wanted`; nothing is rounded.

    Raises
    ------
    UnitUnknown
        If a unit cannot be read.
    UnitMismatch
        If the units measure different things, or a density is needed and none was given.
    ValueRefused
        If the density is not above zero.

    Notes
    -----
    Factors: NIST Special Publication 811, appendix B; NIST Handbook 44, appendix C.

    Examples
    --------
    >>> convert(Fraction(1), "gal", "L")
    Fraction(473176473, 125000000)
    """
    factor, offset, _ = _factors(unit, wanted, density)
    return magnitude * factor + offset


def conversion(magnitude: Fraction, unit: str, wanted: str, *, density: Quantity | None = None) -> Conversion:
    """Return a value in another unit with the factor, the offset, the density used and the working.

    Parameters
    ----------
    magnitude : fractions.Fraction
        Number in `unit`.
    unit, wanted : str
        Units as a laboratory writes them.
    density : Quantity, optional
        As for `convert`.

    Raises
    ------
    UnitUnknown, UnitMismatch, ValueRefused
        As `convert`.

    Notes
    -----
    Factors as in `convert`; the working rounds long figures to ten significant digits and marks them ``≈``.
    """
    factor, offset, used = _factors(unit, wanted, density)
    value = magnitude * factor + offset
    through = f" (density {used})" if used else ""
    shift = f" {'-' if offset < 0 else '+'} {_figure(abs(offset))}" if offset else ""
    text = decimal_text(value)
    equals = "=" if Fraction(text) == value else "≈"
    working = f"{_figure(magnitude)} {unit} × {_figure(factor)}{shift}{through} {equals} {text} {wanted}"
    return Conversion(value, factor, offset, used, working)


def _figure(value: Fraction) -> str:
    """Return a decimal where it is exact, a ratio of whole numbers where it is not."""
    text = decimal_text(value)
    if Fraction(text) == value:
        return text
    return f"{value.numerator}/{value.denominator}" if value.denominator < 1000 else f"{text}…"


def canonical(quantity: Quantity, kind: str, *, density: Quantity | None = None) -> Fraction:
    """Return a quantity in the canonical unit of a kind.

    Parameters
    ----------
    quantity : Quantity
        Number and unit; only a pH may stand without a unit.
    kind : str
        A key of `KINDS`, or of `READING_KINDS`: then the value comes in ``canonical_unit(quantity.unit)``,
        so that ppm of a water reading stay mg/kg and need no density.
    density : Quantity, optional
        As for `convert`.

    Returns
    -------
    fractions.Fraction
        Number in the canonical unit, exact.

    Raises
    ------
    UnitUnknown
        If the unit cannot be read.
    UnitMismatch
        If it measures something else.

    Notes
    -----
    Factors as in `convert`.
    """
    unit = quantity.unit if quantity.unit or kind != "pH" else KINDS["pH"]
    wanted = _canonical_of(unit, READING_KINDS[kind]) if kind in READING_KINDS else KINDS[kind]
    return convert(quantity.magnitude, unit, wanted, density=density)


def _canonical_of(unit: str, kinds: frozenset[str]) -> str:
    kind = kind_of(unit)
    if kind not in kinds:
        choice = ", ".join(KINDS[k] for k in KINDS if k in kinds)
        raise UnitMismatch(
            unit, " or ".join(sorted(kinds)), f"a {kind} has no place here; use one of {choice}"
        )
    return KINDS[kind]


def power_of_ten(unit: str, wanted: str) -> int | None:
    """Return n where the factor is 10**n and nothing is added, ``None`` where it is not.

    ``float(text + f"e{n}")`` is then the double nearest to the converted value of a plain decimal text.

    Parameters
    ----------
    unit, wanted : str
        Units as a laboratory writes them.

    Raises
    ------
    UnitUnknown, UnitMismatch
        As `convert`.

    Notes
    -----
    Factors as in `convert`.

    Examples
    --------
    >>> power_of_ten("ug/L", "mg/L")
    -3
    """
    factor, offset, _ = _factors(unit, wanted, None)
    exponent = leading_power(factor)
    return exponent if not offset and Fraction(10) ** exponent == factor else None
