"""What analyte, unit, fraction and density of a row come to; few combinations serve a whole file."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction as Rational
from typing import NoReturn

from effluent.calc.units import KINDS, convert, kind_of, nearest, power_of_ten
from effluent.domain.quantity import Quantity, exact
from effluent.domain.sample import Fraction
from effluent.errors import EffluentError, UnitMismatch, ValueRefused
from effluent.reference.analyte import Analyte, find

__all__ = ["Key", "Plan", "Planner"]

Key = tuple[str, str, str, str]
"""Cells of analyte, unit, fraction and density."""

_FRACTIONS = {
    **{str(fraction).casefold(): fraction for fraction in Fraction},
    "t": Fraction.TOTAL,
    "tot": Fraction.TOTAL,
    "unfiltered": Fraction.TOTAL,
    "tr": Fraction.TOTAL_RECOVERABLE,
    "recoverable": Fraction.TOTAL_RECOVERABLE,
    "d": Fraction.DISSOLVED,
    "diss": Fraction.DISSOLVED,
    "filtered": Fraction.DISSOLVED,
    "tclp": Fraction.TCLP,
    "tclp leachate": Fraction.TCLP,
}
_UNDIVIDED = {"aggregate", "physical"}
_PARTS = {"ppm", "ppb", "ppt"}


@dataclass(frozen=True, eq=False)
class Plan:
    """How the values of one combination become canonical, or why they cannot.

    Plans are compared by identity, which is all that a cache of them needs. ``suffix`` is the power of
    ten to write behind a plain decimal, ``None`` where it takes more.
    """

    analyte: str = ""
    fraction: str = ""
    unit: str = ""
    canonical_unit: str = ""
    suffix: str | None = None
    density: str = ""
    below_zero: bool = False
    problems: tuple[tuple[str, str], ...] = ()

    def canonical(self, number: str) -> float:
        """Return the double nearest to a decimal text in the canonical unit.

        Raises
        ------
        ValueRefused
            If it is beyond what a double holds.
        """
        return nearest(self._converted(exact(number)))

    def _converted(self, value: Rational) -> Rational:
        if not self.canonical_unit:
            return value
        density = Quantity.parse(self.density) if self.density else None
        return convert(value, self.unit or self.canonical_unit, self.canonical_unit, density=density)


class Planner:
    """Makes plans; ``fraction`` is the layout's constant for results that name none."""

    def __init__(self, fraction: str) -> None:
        self._fraction = fraction
        self.any_problems = False

    def plan(self, key: Key) -> Plan:
        """Return the plan for four cells, with every problem among them."""
        analyte, unit, fraction, density = (cell.strip() for cell in key)
        problems = list(_density_problems(density))
        plan = Plan(unit=unit)
        try:
            named = find(analyte) if analyte else _missing_analyte()
        except EffluentError as error:
            problems += [("analyte", str(error.args[-1])), *_unit_problems(unit)]
            return self._with(plan, problems)
        plan = replace(plan, analyte=named.analyte.key, below_zero=named.analyte.kind == "temperature")
        try:
            plan = replace(plan, fraction=str(self._of(named.analyte, named.fraction, fraction)))
        except EffluentError as error:
            problems.append(("fraction", str(error.args[-1])))
        try:
            wanted, used = _wanted(named.analyte, unit, "1 kg/L" if problems and density else density)
            suffix = _suffix(unit or wanted, wanted, used)
            plan = replace(plan, canonical_unit=wanted, suffix=suffix, density=used)
        except EffluentError as error:
            problems.append(("unit", str(error.args[-1])))
        return self._with(plan, problems)

    def _with(self, plan: Plan, problems: list[tuple[str, str]]) -> Plan:
        self.any_problems = self.any_problems or bool(problems)
        return replace(plan, problems=tuple(problems))

    def _of(self, analyte: Analyte, named: Fraction | None, cell: str) -> Fraction:
        """Return the fraction from its column, else from the name, else from the layout."""
        if cell:
            written = _read_fraction(cell)
            if named not in (None, written):
                raise ValueRefused("fraction", cell, f"the analyte's name says {named}; make both agree")
            return written
        if named is not None:
            return named
        if self._fraction:
            return _read_fraction(self._fraction)
        if analyte.group in _UNDIVIDED:
            return Fraction.TOTAL
        raise ValueRefused(
            "fraction",
            cell,
            "say total, total recoverable, dissolved or TCLP extract, in the row or as a constant",
        )


def _read_fraction(cell: str) -> Fraction:
    """Return the fraction that a cell names."""
    found = _FRACTIONS.get(" ".join(cell.replace("_", " ").casefold().split()))
    if found is None:
        raise ValueRefused("fraction", cell, "write total, total recoverable, dissolved or TCLP extract")
    return found


def _missing_analyte() -> NoReturn:
    raise ValueRefused("analyte", "", "the cell is empty; write a name, a symbol or a CAS number")


def _density_problems(density: str) -> tuple[tuple[str, str], ...]:
    if not density:
        return ()
    try:
        convert(Rational(1), "mg/kg", "mg/L", density=Quantity.parse(density))
    except EffluentError as error:
        return (("density", str(error.args[-1])),)
    return ()


def _unit_problems(unit: str) -> tuple[tuple[str, str], ...]:
    """Name a bad unit also where the analyte is not known."""
    try:
        kind_of(unit)
    except EffluentError as error:
        return (("unit", str(error.args[-1])),)
    return ()


def _wanted(analyte: Analyte, unit: str, density: str) -> tuple[str, str]:
    """Return the canonical unit, and the density where one is used."""
    if not unit and analyte.kind == "pH":
        return KINDS["pH"], ""
    kind = kind_of(unit)
    if kind == "mass ratio" and analyte.kind == "concentration":
        return _of_mass_ratio(unit, density)
    if kind != analyte.kind:
        raise UnitMismatch(
            unit, KINDS[analyte.kind],
            f"a {kind} where {analyte.key} is a {analyte.kind}; write a unit like {KINDS[analyte.kind]}",
        )  # fmt: skip
    return KINDS[kind], ""


def _of_mass_ratio(unit: str, density: str) -> tuple[str, str]:
    """Take ppm and ppb to mg/L with a density; leave mg/kg without one as it is."""
    if density:
        return KINDS["concentration"], density
    if unit.casefold() in _PARTS:
        raise UnitMismatch(
            unit,
            KINDS["concentration"],
            "parts of a liquid by mass need its density, as in '0.998 kg/L', in a density column or as a "
            "constant; or ask the laboratory for mg/L",
        )
    return KINDS["mass ratio"], ""


def _suffix(unit: str, wanted: str, density: str) -> str | None:
    power = None if density else power_of_ten(unit, wanted)
    if power is None:
        return None
    return f"e{power}" if power else ""
