"""A laboratory reading as the calculations take it, one by one or as a frame."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from fractions import Fraction as Rational
from functools import lru_cache
from typing import TYPE_CHECKING

from effluent.calc.units import KINDS, convert
from effluent.domain import Fraction, Qualifier, Quantity, Result, exact

if TYPE_CHECKING:
    import pandas as pd

__all__ = ["Reading", "exact_value", "frame"]

_COLUMNS = ("analyte", "fraction", "qualifier", "canonical_unit", "number", "unit", "density")


@dataclass(frozen=True, kw_only=True)
class Reading:
    """One result with the site-local day it counts for.

    ``analyte`` is spelled as in the limits it is held against. ``value`` is the double nearest to the
    exact value in ``canonical_unit``; ``number``, ``unit`` and ``density`` give that value exactly.
    ``late`` says that it was analysed outside its holding time. The discharge point is not here: the
    caller chooses which limits apply.
    """

    row: int
    sample: str
    day: date
    analyte: str
    fraction: Fraction
    number: str
    unit: str
    value: float
    canonical_unit: str
    qualifier: Qualifier = Qualifier.EQUAL
    reporting_value: float | None = None
    reporting_limit: str = ""
    density: str = ""
    flag: str = ""
    late: bool = False
    text: str = ""

    @classmethod
    def of(cls, result: Result, *, day: date, late: bool) -> Reading:
        """Take over what a result says."""
        return cls(
            row=result.row,
            sample=result.sample,
            day=day,
            analyte=result.analyte,
            fraction=result.fraction,
            number=result.number,
            unit=result.unit,
            value=result.value,
            canonical_unit=result.canonical_unit,
            qualifier=result.qualifier,
            reporting_value=result.reporting_value,
            reporting_limit=result.reporting_limit,
            density=result.density,
            flag=result.flag,
            late=late,
            text=result.text,
        )

    @property
    def exact(self) -> Rational:
        """The value in the canonical unit with nothing lost."""
        return exact_value(self.number, self.unit, self.density, canonical_unit=self.canonical_unit)

    def __str__(self) -> str:
        sign = "" if self.qualifier == Qualifier.EQUAL else self.qualifier
        return f"{sign}{self.number} {self.unit}".rstrip()


@lru_cache(maxsize=65536)
def exact_value(number: str, unit: str, density: str, *, canonical_unit: str) -> Rational:
    """Return the exact value that a number text names, in a canonical unit.

    Parameters
    ----------
    number : str
        Decimal number.
    unit : str
        As the laboratory wrote it; empty for a pH.
    density : str
        As in ``0.998 kg/L``; empty where none was used.
    canonical_unit : str
        A unit of `effluent.calc.units.KINDS`.

    Returns
    -------
    fractions.Fraction
        Number in `canonical_unit`.

    Raises
    ------
    ValueRefused
        If the number or the density cannot be read.
    UnitUnknown, UnitMismatch
        As `effluent.calc.units.convert`.

    Notes
    -----
    Factors as in `effluent.calc.units.convert`.
    """
    through = Quantity.parse(density) if density else None
    return convert(exact(number), unit or KINDS["pH"], canonical_unit, density=through)


def frame(readings: Sequence[Reading]) -> pd.DataFrame:
    """Return readings as the frame that `effluent.calc.verdict.outcomes` takes.

    Parameters
    ----------
    readings : sequence of Reading, length n
        In any order.

    Returns
    -------
    pandas.DataFrame, n rows
        In the order given; values in the canonical unit of each reading.

    Raises
    ------
    ValueRefused
        Never here; `outcomes` refuses values that are not numbers.

    Notes
    -----
    A change of form only; no source needed.
    """
    import pandas as pd  # its loading is slow, and who reads results in does not need it

    columns: dict[str, object] = {
        name: pd.Categorical([str(getattr(reading, name)) for reading in readings]) for name in _COLUMNS
    }
    columns["value"] = pd.array([reading.value for reading in readings], dtype="float64")
    columns["day"] = pd.to_datetime([reading.day for reading in readings])
    return pd.DataFrame(columns)
