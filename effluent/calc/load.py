"""Mass of a substance in released water: concentration times volume, exactly."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction as Rational

from effluent.calc.figure import Figure
from effluent.calc.units import convert
from effluent.errors import ValueRefused

__all__ = ["CONVENTIONAL", "Load", "conventional_lb", "day_load", "mass_kg", "total_load", "volume_l"]

CONVENTIONAL = Rational("8.34")
_MG_PER_KG = 10**6
_GAL_PER_MGAL = 10**6
_ZERO = Rational(0)


@dataclass(frozen=True, kw_only=True)
class Load:
    """A mass in kg, exact: bounds whatever the non-detect rule, and the value under the rule.

    ``high_kg`` and ``value_kg`` are `None` as in `effluent.calc.figure.Figure`. ``days`` tells the daily
    loads it is the sum of, ``volume_l`` the water released in them.
    """

    low_kg: Rational
    high_kg: Rational | None
    value_kg: Rational | None
    volume_l: Rational
    days: int

    @property
    def low_lb(self) -> Rational:
        """The lower bound in avoirdupois pounds."""
        return convert(self.low_kg, "kg", "lb")

    @property
    def high_lb(self) -> Rational | None:
        """The upper bound in avoirdupois pounds."""
        return None if self.high_kg is None else convert(self.high_kg, "kg", "lb")

    @property
    def value_lb(self) -> Rational | None:
        """The value under the rule in avoirdupois pounds."""
        return None if self.value_kg is None else convert(self.value_kg, "kg", "lb")


def mass_kg(concentration_mg_l: Rational, volume_l: Rational) -> Rational:
    """Return the mass in a volume.

    Parameters
    ----------
    concentration_mg_l : Fraction
        In mg/L, not negative.
    volume_l : Fraction
        In litres, not negative.

    Returns
    -------
    Fraction
        In kg.

    Raises
    ------
    ValueRefused
        If one of them is negative.

    Notes
    -----
    ``c V / 1e6``: a milligram is a millionth of a kilogram (SI).

    Examples
    --------
    >>> mass_kg(Rational(2), Rational(500_000))
    Fraction(1, 1)
    """
    _refuse_negative("concentration", concentration_mg_l)
    _refuse_negative("volume", volume_l)
    return concentration_mg_l * volume_l / _MG_PER_KG


def volume_l(mass_kg: Rational, concentration_mg_l: Rational) -> Rational:
    """Return the volume that holds a mass: what may be released of an allowance.

    Parameters
    ----------
    mass_kg : Fraction
        In kg, not negative.
    concentration_mg_l : Fraction
        In mg/L, above zero.

    Returns
    -------
    Fraction
        In litres.

    Raises
    ------
    ValueRefused
        If the mass is negative or the concentration is not above zero.

    Notes
    -----
    The reverse of `mass_kg`.
    """
    _refuse_negative("mass", mass_kg)
    _refuse_negative("concentration", concentration_mg_l)
    if not concentration_mg_l:
        raise ValueRefused("concentration", "0", "water without the substance sets no largest volume")
    return mass_kg * _MG_PER_KG / concentration_mg_l


def conventional_lb(
    concentration_mg_l: Rational, volume_l: Rational, *, factor: Rational = CONVENTIONAL
) -> Rational:
    """Return the mass by a document's rounded factor, to stand beside the exact one.

    Parameters
    ----------
    concentration_mg_l : Fraction
        In mg/L, not negative.
    volume_l : Fraction
        In litres, not negative.
    factor : Fraction
        Pounds for each mg/L and million US gallons, as the document prescribes.

    Returns
    -------
    Fraction
        In lb; with 8.34 about 0.065 % below the exact mass.

    Raises
    ------
    ValueRefused
        If one of them is negative.

    Notes
    -----
    ``lb = mg/L x Mgal x 8.34``, the formula of operators' handbooks [1]_; the exact factor is
    3.785411784 / 0.45359237 = 8.3454044...

    References
    ----------
    .. [1] Michigan DEQ, slides on the pounds formula; read on 2026-12-01. That the permit writers' manual
       of the EPA uses the same factor is from memory.
    """
    _refuse_negative("concentration", concentration_mg_l)
    _refuse_negative("volume", volume_l)
    return concentration_mg_l * convert(volume_l, "L", "gal") / _GAL_PER_MGAL * factor


def day_load(figure: Figure, volume_l: Rational) -> Load:
    """Return the mass released on one day.

    Parameters
    ----------
    figure : Figure
        Daily value in mg/L.
    volume_l : Fraction
        Released on that day, in litres; zero for a day without a release.

    Returns
    -------
    Load
        In kg.

    Raises
    ------
    ValueRefused
        If the volume or a bound is negative.

    Notes
    -----
    As `mass_kg`, for each bound.
    """
    return Load(
        low_kg=mass_kg(figure.low, volume_l),
        high_kg=None if figure.high is None else mass_kg(figure.high, volume_l),
        value_kg=None if figure.value is None else mass_kg(figure.value, volume_l),
        volume_l=volume_l,
        days=1,
    )


def total_load(loads: Sequence[Load]) -> Load:
    """Return the sum of the loads of a month or a year.

    Parameters
    ----------
    loads : sequence of Load, length n
        Of one analyte; daily ones, or sums of them.

    Returns
    -------
    Load
        In kg; a bound or value is open where that of one load is.

    Raises
    ------
    ValueRefused
        Never; nothing released is a load of zero.

    Notes
    -----
    A sum only. A day with a release and without a sample has no load here: the caller says so.
    """
    return Load(
        low_kg=sum((load.low_kg for load in loads), _ZERO),
        high_kg=_sum([load.high_kg for load in loads]),
        value_kg=_sum([load.value_kg for load in loads]),
        volume_l=sum((load.volume_l for load in loads), _ZERO),
        days=sum(load.days for load in loads),
    )


def _sum(parts: Sequence[Rational | None]) -> Rational | None:
    known = [part for part in parts if part is not None]
    return sum(known, _ZERO) if len(known) == len(parts) else None


def _refuse_negative(what: str, value: Rational) -> None:
    if value < 0:
        raise ValueRefused(what, str(float(value)), "it is never negative")
