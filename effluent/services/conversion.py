"""Converting one value between units, with the working."""

from __future__ import annotations

from effluent.calc.units import Conversion, conversion
from effluent.domain import Quantity, exact

__all__ = ["convert"]


def convert(value_text: str, unit: str, wanted: str, density_text: str | None = None) -> Conversion:
    """Return a value in another unit, exactly, with the factor and the density it used.

    Parameters
    ----------
    value_text : str
        A number with a decimal point.
    unit, wanted : str
        Units as a laboratory writes them.
    density_text : str, optional
        Density with its unit, as in ``0.998 kg/L``; needed between mg/kg, ppm or ppb and mg/L, and
        between mass and volume.

    Raises
    ------
    ValueRefused
        If the value is no number, or the density not above zero.
    UnitUnknown
        If a unit cannot be read.
    UnitMismatch
        If the units measure different things, or a density is needed and none was given.

    Examples
    --------
    >>> convert("0.11", "mg/L", "ug/L").working
    '0.11 mg/L × 1000 = 110 ug/L'
    """
    density = Quantity.parse(density_text) if density_text else None
    return conversion(exact(value_text.strip()), unit.strip(), wanted.strip(), density=density)
