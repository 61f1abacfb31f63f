"""A measured amount exactly as somebody wrote it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from effluent.errors import ValueRefused

__all__ = ["Quantity", "exact"]

_NUMBER = r"[+-]?(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?"
_QUANTITY = re.compile(
    rf"(?P<text>{_NUMBER})\s*(?:(?:±|\+/-)\s*(?P<spread>{_NUMBER})\s*)?"
    rf"(?P<unit>[^\W\d_].*?|[%°].*?)??\s*(?:(?:±|\+/-)\s*(?P<percent>{_NUMBER})\s*%)?"
)
_LONGEST = 400
_REMEDY = "write a number with a decimal point and a unit, as in '12.5 L', '60 ± 1 L' or '60 L ± 2 %'"


def exact(text: str) -> Fraction:
    """Return the rational number that a decimal text names.

    Parameters
    ----------
    text : str
        A number with a decimal point and an optional power of ten, as in ``1.2E-3``.

    Returns
    -------
    fractions.Fraction
        The value with nothing lost.

    Raises
    ------
    ValueRefused
        If the text is not such a number.

    Examples
    --------
    >>> exact("0.11")
    Fraction(11, 100)
    """
    if len(text) > _LONGEST:
        raise ValueRefused("number", text[:40] + "…", f"write at most {_LONGEST} characters")
    if not re.fullmatch(_NUMBER, text):
        raise ValueRefused("number", text, "write digits with a decimal point, as in 0.11 or 1.1e-1")
    return Fraction(text)


@dataclass(frozen=True)
class Quantity:
    """A number text, its unit, and the expanded uncertainty (k = 2) where one was given.

    ``spread`` is a number in the same unit, or a percentage of the value when it ends in ``%``.

    Examples
    --------
    >>> Quantity.parse("60 L ± 2 %").spread_magnitude
    Fraction(6, 5)
    >>> str(Quantity.parse("60+/-1 L"))
    '60 ± 1 L'
    """

    text: str
    unit: str
    spread: str = ""

    @classmethod
    def parse(cls, written: str) -> Quantity:
        """Read ``12.5 L``, ``60 ± 1 L``, ``60 L ± 2 %`` or a bare number (pH).

        Raises
        ------
        ValueRefused
            If the text is none of these.
        """
        match = _QUANTITY.fullmatch(written.strip()) if len(written) <= _LONGEST else None
        if match is None or (match["spread"] and match["percent"]):
            raise ValueRefused("quantity", written, _REMEDY)
        spread = match["spread"] or (f"{match['percent']} %" if match["percent"] else "")
        if spread.startswith("-"):
            raise ValueRefused("quantity", written, "an uncertainty is never negative")
        return cls(match["text"], (match["unit"] or "").strip(), spread)

    @property
    def magnitude(self) -> Fraction:
        """The number, exactly, in the unit as written."""
        return exact(self.text)

    @property
    def spread_magnitude(self) -> Fraction:
        """The expanded uncertainty, exactly, in the unit as written; zero when none was given."""
        if not self.spread:
            return Fraction(0)
        if self.spread.endswith("%"):
            return abs(self.magnitude) * exact(self.spread.removesuffix("%").strip()) / 100
        return exact(self.spread)

    def __str__(self) -> str:
        if self.spread.endswith("%"):
            return f"{self.text} {self.unit} ± {self.spread}"
        spread = f" ± {self.spread}" if self.spread else ""
        return f"{self.text}{spread} {self.unit}".rstrip()
