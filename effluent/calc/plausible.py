"""Questions about values that are possible but unlikely; a user answers them with a reason."""

from __future__ import annotations

import numpy as np
import pandas as pd
from numpy.typing import ArrayLike, NDArray

__all__ = [
    "far_above_history",
    "history_question",
    "medians",
    "reporting_above_limit",
    "reporting_question",
]

_FAR = 1000.0
_BY = ["point", "analyte", "canonical_unit"]

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
