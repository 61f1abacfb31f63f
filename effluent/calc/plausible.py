"""Questions about values that are possible but unlikely; a user answers them with a reason."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Hashable, Iterable
from statistics import median
from typing import TypeVar

__all__ = ["FAR", "history_question", "is_far", "medians", "reporting_question"]

K = TypeVar("K", bound=Hashable)

FAR = 1000.0
"""How many times its history a reading is worth a question: the factor between milli and micro."""


def medians(history: Iterable[tuple[K, float]]) -> dict[K, float]:
    """Return the median reading of each key, such as analyte and canonical unit.

    Parameters
    ----------
    history : iterable of (key, float)
        Readings in the canonical unit, non-detects at their bound.

    Returns
    -------
    dict of key to float
        Empty without history.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    The median, because one wrong unit in the history must not hide the next.
    """
    values: defaultdict[K, list[float]] = defaultdict(list)
    for key, value in history:
        values[key].append(value)
    return {key: median(found) for key, found in values.items()}


def is_far(value: float, usual: float | None) -> bool:
    """Tell whether a reading is `FAR` times its history or more, as when ug/L was typed as mg/L.

    Parameters
    ----------
    value : float
        Reading in the canonical unit.
    usual : float or None
        Median of its history in the same unit; ``None`` without one.

    Returns
    -------
    bool
        False where there is no history, or its median is not above zero.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    That the factor between milli and micro is worth a question is common practice, no source.
    """
    return usual is not None and usual > 0 and value >= FAR * usual


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
    See `is_far`.
    """
    return (
        f"{reading} is a thousand times the median of this point, {median:.4g} {unit}, or more: "
        "is the unit right?"
    )


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
    Follows from the rule for non-detects in the section "Verdicts" of the documented calculations. A
    reporting limit equal to the limit still proves it met.
    """
    return (
        f"the reporting limit {reporting} lies above the limit {limit} in force: a non-detect would prove "
        "nothing; can the laboratory reach lower?"
    )
