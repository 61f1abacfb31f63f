"""Trend of an analyte over time: Mann-Kendall test and Sen slope."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from itertools import pairwise
from math import factorial, inf, sqrt

import numpy as np
from numpy.typing import NDArray

from effluent.calc.quantile import normal_cdf, normal_quantile
from effluent.errors import ValueRefused

__all__ = ["Direction", "Point", "Slope", "Trend", "mann_kendall", "sen_slope"]

_FEWEST = 4
_MOST = 2000
_EXACT_UP_TO = 30

Floats = NDArray[np.float64]


class Direction(StrEnum):
    """What a trend test shows."""

    RISING = "rising"
    FALLING = "falling"
    NONE = "no trend shown"


@dataclass(frozen=True, kw_only=True)
class Point:
    """One value of one day; ``low`` equals ``high`` for a value, is zero for a non-detect."""

    day: date
    low: float
    high: float


@dataclass(frozen=True, kw_only=True)
class Trend:
    """The Mann-Kendall test.

    ``exact_p`` is two-sided and exact, `None` where values are tied or there are more than 30; ``normal_p``
    is that of the normal approximation with continuity correction. ``tied`` counts the values that share
    their rank with another, those below the highest limit of a non-detect among them.
    """

    count: int
    nondetects: int
    tied: int
    s: int
    variance: float
    z: float
    normal_p: float
    exact_p: float | None

    @property
    def p(self) -> float:
        """The exact probability where there is one, else the normal one."""
        return self.normal_p if self.exact_p is None else self.exact_p

    def direction(self, significance: float = 0.05) -> Direction:
        """Say what the test shows at a two-sided significance."""
        if not self.s or self.p > significance:
            return Direction.NONE
        return Direction.RISING if self.s > 0 else Direction.FALLING


@dataclass(frozen=True, kw_only=True)
class Slope:
    """The Sen slope in unit of the values per day: bounds, equal where every value was detected.

    ``lower`` and ``upper`` are two-sided confidence limits; with non-detects the lowest and the highest
    that they can be.
    """

    low: float
    high: float
    lower: float
    upper: float
    confidence: float


def mann_kendall(points: Sequence[Point]) -> Trend:
    """Return the Mann-Kendall test of a series.

    Parameters
    ----------
    points : sequence of Point, length n, 4 to 2000
        One value a day, in one unit and any order.

    Returns
    -------
    Trend
        S, its variance corrected for ties, Z and probabilities.

    Raises
    ------
    ValueRefused
        If there are too few or too many points, two of one day, or a value that is no number.

    Notes
    -----
    ``S = sum sign(x_j - x_i)``; ``Var = [n(n-1)(2n+5) - sum t(t-1)(2t+5)] / 18``; ``Z = (S -+ 1) /
    sqrt(Var)``, 0 if S = 0: EPA 2009 [1]_, 17.3.2, and Gilbert 1987, chapter 16 (equation numbers from
    memory). Exact probabilities by counting permutations by their inversions.
    Non-detects: every value below the highest limit of a non-detect, detected or not, is tied with the
    others, because only so their order is certain. It costs power, and one high limit costs most of it.

    References
    ----------
    .. [1] EPA 530/R-09-007, Unified Guidance, March 2009, example 17-7; figures read as quoted in an R
       package.
    """
    order = _checked(points)
    values = _recensored(order)
    s = sum(_rises(values[i], values[i + 1 :]) for i in range(len(values)))
    ties = [times for times in Counter(values.tolist()).values() if times > 1]
    n = len(values)
    variance = (n * (n - 1) * (2 * n + 5) - sum(t * (t - 1) * (2 * t + 5) for t in ties)) / 18
    z = (s - np.sign(s)) / sqrt(variance) if s else 0.0
    return Trend(
        count=n,
        nondetects=sum(point.low < point.high for point in order),
        tied=sum(ties),
        s=s,
        variance=variance,
        z=float(z),
        normal_p=min(1.0, 2 * normal_cdf(-abs(float(z)))),
        exact_p=None if ties or n > _EXACT_UP_TO else _exact_p(s, n),
    )


def sen_slope(points: Sequence[Point], *, confidence: float = 0.95) -> Slope:
    """Return the Sen slope of a series with its confidence limits.

    Parameters
    ----------
    points : sequence of Point, length n, 4 to 2000
        One value a day, in one unit and any order.
    confidence : float
        Two-sided, above 0 and below 1.

    Returns
    -------
    Slope
        In that unit per day.

    Raises
    ------
    ValueRefused
        As `mann_kendall`, or if the confidence is none.

    Notes
    -----
    Median of the slopes of all pairs; limits at the ranks ``(N -+ z sqrt(Var)) / 2`` (the upper one plus
    one) of the N sorted slopes, between ranks by interpolation: Gilbert 1987, 16.5.2 and EPA 2009, 17.3.3
    (numbers from memory). A pair with a non-detect has a slope between two bounds; the statistic is taken
    of all lower and of all upper bounds, so the truth lies between. Where so few points cannot reach the
    confidence, the limits are infinite.
    """
    order = _checked(points)
    if not 0.0 < confidence < 1.0:
        raise ValueRefused("confidence", str(confidence), "give one between 0 and 1, as in 0.95")
    low, high = _pair_slopes(order)
    half = normal_quantile(0.5 + confidence / 2) * sqrt(mann_kendall(points).variance) / 2
    middle = low.size / 2
    reached = confidence <= 1 - 2 / factorial(len(order))
    return Slope(
        low=float(np.median(low)),
        high=float(np.median(high)),
        lower=_ranked(low, middle - half) if reached else -inf,
        upper=_ranked(high, middle + half + 1) if reached else inf,
        confidence=confidence,
    )


def _checked(points: Sequence[Point]) -> list[Point]:
    """Return the points in order of time, or refuse them."""
    if not _FEWEST <= len(points) <= _MOST:
        remedy = f"a trend needs {_FEWEST} to {_MOST} days; fewer show nothing, of more take monthly values"
        raise ValueRefused("number of values", str(len(points)), remedy)
    for point in points:
        if not 0.0 <= point.high - point.low < inf:
            raise ValueRefused(
                "value", f"{point.low} to {point.high}", "a trend needs numbers with both bounds"
            )
    order = sorted(points, key=lambda point: point.day)
    for before, after in pairwise(order):
        if before.day == after.day:
            raise ValueRefused("day", str(after.day), "a trend takes one value a day; give the daily value")
    return order


def _recensored(order: Sequence[Point]) -> Floats:
    """Return values in which all that lies below the highest limit of a non-detect is tied."""
    limits = [point.high for point in order if point.low < point.high]
    floor = max(limits, default=-inf)
    return np.array([point.high if point.low >= floor else -inf for point in order])


def _rises(value: np.float64, later: Floats) -> int:
    return int((later > value).sum()) - int((later < value).sum())


def _exact_p(s: int, n: int) -> float:
    """Return the two-sided probability of an S as far from zero, by counting inversions."""
    ways = [1]
    for size in range(2, n + 1):
        longer = [0] * (len(ways) + size - 1)
        for shift in range(size):
            for place, count in enumerate(ways):
                longer[place + shift] += count
        ways = longer
    pairs = n * (n - 1) // 2
    tail = sum(ways[: (pairs - abs(s)) // 2 + 1])
    return min(1.0, 2 * tail / sum(ways))


def _pair_slopes(order: Sequence[Point]) -> tuple[Floats, Floats]:
    """Return the sorted lower and the sorted upper bounds of the slopes of all pairs."""
    days = np.array([point.day.toordinal() for point in order], dtype=np.float64)
    low = np.array([point.low for point in order])
    high = np.array([point.high for point in order])
    first, second = np.triu_indices(len(order), k=1)
    apart = days[second] - days[first]
    lowest = (low[second] - high[first]) / apart
    highest = (high[second] - low[first]) / apart
    return np.sort(lowest), np.sort(highest)


def _ranked(slopes: Floats, rank: float) -> float:
    """Return the value at a rank from 1 on, between ranks by interpolation, outside the outermost."""
    return float(np.interp(rank, np.arange(1, slopes.size + 1), slopes))
