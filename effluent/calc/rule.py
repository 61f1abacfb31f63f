"""The rule of a limit: where it is cut, what a reading of another kind can prove, and in which words."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from decimal import Decimal
from enum import IntEnum
from fractions import Fraction as Rational
from functools import lru_cache

from effluent.calc.units import KINDS, canonical_unit, convert, nearest
from effluent.domain import Bound, BrokenBy, Fraction, Limit, Outcome, Qualifier, Quantity, Rounding, exact

__all__ = [
    "Basis",
    "Cut",
    "action_cut",
    "basis",
    "cut",
    "in_force",
    "limit_unit",
    "on_the_cut",
    "place",
    "proof",
    "rounded",
    "written_cut",
]


class Basis(IntEnum):
    """What a reading says about the amount that a limit is written for.

    A part of it (dissolved of total) is only a lower bound, a whole of which it is a part only an upper
    one; another extract or another kind of unit says nothing.
    """

    VALUE = 0
    AT_MOST = 1
    BELOW = 2
    AT_LEAST = 3
    ABOVE = 4
    OTHER_FRACTION = 5
    OTHER_KIND = 6


@dataclass(frozen=True)
class Cut:
    """A limit as one exact number in its canonical unit; ``inclusive`` if reaching it already breaks it."""

    value: Rational
    double: float
    inclusive: bool


# Filtering and milder digestion can only leave substance behind, so dissolved <= total recoverable <= total.
_RANK = {Fraction.DISSOLVED: 0, Fraction.TOTAL_RECOVERABLE: 1, Fraction.TOTAL: 2}
_SAME = {
    Qualifier.EQUAL: Basis.VALUE,
    Qualifier.BELOW: Basis.BELOW,
    Qualifier.ABOVE: Basis.ABOVE,
}
_PART = {
    Qualifier.EQUAL: Basis.AT_LEAST,
    Qualifier.BELOW: Basis.OTHER_FRACTION,
    Qualifier.ABOVE: Basis.ABOVE,
}
_WHOLE = {
    Qualifier.EQUAL: Basis.AT_MOST,
    Qualifier.BELOW: Basis.BELOW,
    Qualifier.ABOVE: Basis.OTHER_FRACTION,
}
_UPPER = {Basis.AT_MOST, Basis.BELOW}
_LOWER = {Basis.AT_LEAST, Basis.ABOVE}


def limit_unit(quantity: Quantity) -> str:
    """Return the canonical unit in which readings are held against a limit value.

    Parameters
    ----------
    quantity : Quantity
        The limit as written; only a pH may stand without a unit.

    Returns
    -------
    str
        A unit of `effluent.calc.units.KINDS`.

    Raises
    ------
    UnitUnknown
        If the unit cannot be read.

    Notes
    -----
    The choice of unit is our own; it changes no verdict.
    """
    return canonical_unit(quantity.unit or KINDS["pH"])


def place(quantity: Quantity) -> Rational:
    """Return the worth of the last figure of a number as written.

    Parameters
    ----------
    quantity : Quantity
        Only its text counts: ``0.11`` gives 1/100, ``36000`` gives 1, ``3.60e4`` gives 100.

    Returns
    -------
    fractions.Fraction
        In the unit as written.

    Raises
    ------
    ValueRefused
        If the text is no number.

    Notes
    -----
    ASTM E29, rounding method: to the last place of figures in the limit (from memory).
    """
    exact(quantity.text)
    return Rational(10) ** int(Decimal(quantity.text).as_tuple().exponent)


def rounded(value: Rational, quantity: Quantity) -> Rational:
    """Return a value rounded half to even, to the last place of a limit as written.

    Parameters
    ----------
    value : fractions.Fraction
        In the unit of `quantity`.
    quantity : Quantity
        The limit.

    Returns
    -------
    fractions.Fraction
        In the unit of `quantity`.

    Raises
    ------
    ValueRefused
        If the limit's text is no number.

    Notes
    -----
    ASTM E29, rounding method (from memory); ties to even as in NIST SP 811, appendix B.7.1.
    """
    step = place(quantity)
    return round(value / step) * step


@lru_cache(maxsize=4096)
def cut(limit: Limit) -> Cut:
    """Return the number that decides a limit, with its rounding rule worked into it.

    A reading rounded half to even exceeds a limit exactly when the reading itself passes the limit by more
    than half a place; on the half place, when the limit's last figure is odd.

    Parameters
    ----------
    limit : Limit
        Any bound, comparison and rounding.

    Returns
    -------
    Cut
        In the canonical unit of the limit.

    Raises
    ------
    ValueRefused
        If the limit value is no number a double can hold.
    UnitUnknown
        If its unit cannot be read.

    Notes
    -----
    Follows from the definition of rounding half to even (NIST SP 811, appendix B.7.1).
    """
    if limit.rounding == Rounding.AS_REPORTED:
        return written_cut(limit)
    value, inclusive = limit.value.magnitude, limit.broken_by == BrokenBy.REACHING
    step = place(limit.value)
    odd = int(value / step) % 2 == 1
    outward = (step if limit.bound == Bound.MAXIMUM else -step) / 2
    value += -outward if inclusive else outward
    return _cut(value, limit.value, inclusive=odd != inclusive)


def written_cut(limit: Limit) -> Cut:
    """Return the limit as it is written, without its rounding rule; margins are shares of it.

    Parameters
    ----------
    limit : Limit
        Any bound and comparison.

    Returns
    -------
    Cut
        In the canonical unit of the limit.

    Raises
    ------
    ValueRefused
        If the limit value is no number a double can hold.
    UnitUnknown
        If its unit cannot be read.

    Notes
    -----
    A change of unit only; no source needed.
    """
    return _cut(limit.value.magnitude, limit.value, inclusive=limit.broken_by == BrokenBy.REACHING)


def action_cut(limit: Limit) -> Cut | None:
    """Return the site's own action level; a reading that reaches it is near the limit.

    Parameters
    ----------
    limit : Limit
        Its action level is compared as reported, never rounded.

    Returns
    -------
    Cut or None
        In the canonical unit of the limit; `None` where the site has set no level.

    Raises
    ------
    UnitUnknown, UnitMismatch
        If its unit cannot be read, or measures something else than the limit's.

    Notes
    -----
    The level is the user's own; no source needed.
    """
    level = limit.action_level
    return None if level is None else _cut(level.magnitude, level, inclusive=True, beside=limit.value)


def _cut(value: Rational, written: Quantity, *, inclusive: bool, beside: Quantity | None = None) -> Cut:
    canonical = convert(value, written.unit or KINDS["pH"], limit_unit(beside or written))
    return Cut(canonical, nearest(canonical), inclusive)


def in_force(limit: Limit, day: date) -> bool:
    """Say whether a limit is in force on a day; its first and last days count."""
    return limit.effective_from <= day and (limit.effective_to is None or day <= limit.effective_to)


def basis(reading: Fraction, qualifier: Qualifier, limit: Fraction) -> Basis:
    """Return what a reading of one fraction says about a limit written for another."""
    if reading == limit:
        return _SAME[qualifier]
    if Fraction.TCLP in (reading, limit):
        return Basis.OTHER_FRACTION
    return (_PART if _RANK[reading] < _RANK[limit] else _WHOLE)[qualifier]


def proof(basis: Basis, bound: Bound, *, broken: bool) -> Outcome:
    """Return what is shown when the number compared breaks, or does not break, the limit.

    Parameters
    ----------
    basis : Basis
        What the number says.
    bound : Bound
        Maximum or minimum.
    broken : bool
        Whether the number breaks the limit; a number that the truth never reaches breaks a limit it is
        equal to when it bounds the truth on the forbidden side, and does not on the other.

    Returns
    -------
    Outcome
        Within, over or undetermined; the action level is not looked at.

    Raises
    ------
    KeyError
        Never; every basis is covered.

    Notes
    -----
    Plain logic of inequalities; no source needed.
    """
    if basis == Basis.VALUE:
        return Outcome.OVER if broken else Outcome.WITHIN
    safe, forbidden = (_UPPER, _LOWER) if bound == Bound.MAXIMUM else (_LOWER, _UPPER)
    if basis in safe and not broken:
        return Outcome.WITHIN
    return Outcome.OVER if basis in forbidden and broken else Outcome.UNDETERMINED


def on_the_cut(basis: Basis, bound: Bound, *, inclusive: bool) -> bool:
    """Say whether a number equal to the cut counts as breaking it.

    A truth strictly below a number equal to the cut of a maximum cannot break it; a truth strictly above
    it does. A minimum is the mirror image.
    """
    if basis in (Basis.BELOW, Basis.ABOVE):
        return (basis == Basis.ABOVE) == (bound == Bound.MAXIMUM)
    return inclusive
