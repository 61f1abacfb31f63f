"""The mix of a solution, held against the ratio its cleaner asks for."""

from __future__ import annotations

import re
from fractions import Fraction

from effluent.calc.number import decimal_text
from effluent.domain import exact
from effluent.errors import ValueRefused

__all__ = ["ratio_question", "read_ratio"]

_RATIO = re.compile(r"\s*([0-9.]+)\s*(?::|to)\s*([0-9.]+)\s*")


def read_ratio(text: str) -> Fraction:
    """Return the parts of water to one part of cleaner that a mix ratio names.

    Parameters
    ----------
    text : str
        Cleaner to water, as in ``1:4`` or ``1 to 4``; ``1:0`` is used undiluted.

    Returns
    -------
    fractions.Fraction
        Litres of water to a litre of cleaner.

    Raises
    ------
    ValueRefused
        If the text is no such ratio.

    Notes
    -----
    Cleaner first, water second: common practice, no source.

    Examples
    --------
    >>> read_ratio("1:4")
    Fraction(4, 1)
    """
    match = _RATIO.fullmatch(text)
    if match is None:
        raise ValueRefused("mix ratio", text, "write parts of cleaner to parts of water, as in 1:4")
    cleaner, water = exact(match[1]), exact(match[2])
    if not cleaner:
        raise ValueRefused("mix ratio", text, "at least some part is cleaner, as in 1:4")
    return water / cleaner


def ratio_question(
    ratio: str, *, concentrate_l: Fraction, water_l: Fraction, tolerance: Fraction = Fraction(3, 2)
) -> str | None:
    """Return the question about a solution far from the cleaner's mix ratio.

    Parameters
    ----------
    ratio : str
        The cleaner's own, as for `read_ratio`.
    concentrate_l, water_l : fractions.Fraction
        Litres of cleaner as delivered, and of water mixed into it.
    tolerance : fractions.Fraction
        Factor, above 1, by which the parts of water may differ either way.

    Returns
    -------
    str or None
        One sentence; `None` where there is nothing to ask.

    Raises
    ------
    ValueRefused
        If the ratio cannot be read.

    Notes
    -----
    A factor of 1.5: common practice, no source.
    """
    wanted = read_ratio(ratio) * concentrate_l
    if wanted <= tolerance * water_l and water_l <= tolerance * wanted:
        return None
    return (
        f"{_litres(concentrate_l)} of cleaner with {_litres(water_l)} of water is far from the cleaner's mix "
        f"ratio {ratio}, which asks for {_litres(wanted)} of water"
    )


def _litres(volume: Fraction) -> str:
    return f"{decimal_text(volume, digits=4)} L"
