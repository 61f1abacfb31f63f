"""Questions about values that are possible but unlikely; a user answers them with a reason."""

from __future__ import annotations

import re
from fractions import Fraction

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

from effluent.calc.units import decimal_text
from effluent.domain import exact
from effluent.errors import ValueRefused

__all__ = [
    "far_above_history",
    "history_question",
    "medians",
    "ratio_question",
    "read_ratio",
    "reporting_above_limit",
    "reporting_question",
]

_FAR = 1000.0
_BY = ["point", "analyte", "canonical_unit"]
_RATIO = re.compile(r"\s*([0-9.]+)\s*(?::|to)\s*([0-9.]+)\s*")

Flags = NDArray[np.bool_]


def medians(history: pd.DataFrame) -> pd.Series:
    """Return the median reading of each point, analyte and canonical unit.

    Parameters
    ----------
    history : pandas.DataFrame, n rows
        ``point``, ``analyte``, ``canonical_unit`` and ``value`` (float64, canonical unit, non-detects at
        their bound).

    Returns
    -------
    pandas.Series of float64
        Indexed by the three; empty without history.

    Raises
    ------
    KeyError
        If a column is missing.

    Notes
    -----
    The median, because one wrong unit in the history must not hide the next.
    """
    return history.groupby(_BY, observed=True)["value"].median()


def far_above_history(readings: pd.DataFrame, history: pd.Series) -> Flags:
    """Say which readings are a thousand times their history or more, as when ug/L was typed as mg/L.

    Parameters
    ----------
    readings : pandas.DataFrame, n rows
        Columns as for `medians`.
    history : pandas.Series
        From `medians`.

    Returns
    -------
    ndarray of bool, shape (n,)
        False where there is no history, or its median is not above zero.

    Raises
    ------
    KeyError
        If a column is missing.

    Notes
    -----
    The factor is that between the prefixes milli and micro; that it is worth a question is common practice,
    no source.
    """
    keys = pd.MultiIndex.from_frame(readings[_BY])
    known = history.reindex(keys).to_numpy(dtype=np.float64)
    far: Flags = (known > 0) & (readings["value"].to_numpy(dtype=np.float64) >= _FAR * known)
    return far


def history_question(reading: str, median: float, *, unit: str) -> str:
    """Return the question about a reading far above its history.

    Parameters
    ----------
    reading : str
        As reported, with its unit.
    median : float
        Of the history, in `unit`.
    unit : str
        Canonical unit.

    Returns
    -------
    str
        One sentence.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    See `far_above_history`.
    """
    return (
        f"{reading} is a thousand times the median of this point, {median:.4g} {unit}, or more: "
        "is the unit right?"
    )


def reporting_above_limit(reporting: ArrayLike, limit: ArrayLike) -> Flags:
    """Say which reporting limits lie above the limit in force, so that a non-detect would prove nothing.

    Parameters
    ----------
    reporting : array_like of float, shape (n,)
        Reporting limits in the canonical unit; NaN where none was given.
    limit : array_like of float, shape (n,) or ()
        Lowest maximum in force in the same unit; NaN where there is none.

    Returns
    -------
    ndarray of bool, shape (n,)
        False where either is NaN. A reporting limit equal to the limit still proves it met.

    Raises
    ------
    ValueError
        If the shapes do not fit.

    Notes
    -----
    Follows from the rule for non-detects in the section "Verdicts" of the documented calculations.
    """
    above: Flags = np.asarray(reporting, dtype=np.float64) > np.asarray(limit, dtype=np.float64)
    return above


def reporting_question(reporting: str, limit: str) -> str:
    """Return the question about a reporting limit above the limit in force.

    Parameters
    ----------
    reporting, limit : str
        Both with their units.

    Returns
    -------
    str
        One sentence.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    See `reporting_above_limit`.
    """
    return (
        f"the reporting limit {reporting} lies above the limit {limit} in force: a non-detect would prove "
        "nothing; can the laboratory reach lower?"
    )


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
