"""Land's exact confidence limit of the logarithm of a lognormal mean."""

from __future__ import annotations

from functools import cache
from math import asin, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from effluent.errors import ValueRefused

__all__ = ["land_h", "land_log_mean"]

_NODES = 200
_WIDTHS = 12.0
_STEPS = 100
_FEWEST = 3
_WIDEST = 20.0


def land_log_mean(mean_log: float, sd_log: float, count: int, probability: float) -> float:
    """Return the number above which the logarithm of the mean lies with one minus the probability.

    Parameters
    ----------
    mean_log, sd_log : float
        Mean and standard deviation (n - 1) of the natural logarithms; the deviation above 0 and up to 20.
    count : int
        Results, 3 or more.
    probability : float
        Between 0 and 1; 0.95 gives the upper, 0.05 the lower one-sided 95 % limit.

    Returns
    -------
    float
        Logarithm of the limit, to about 9 digits.

    Raises
    ------
    ValueRefused
        If there are fewer than three results, no spread, or the probability is none.

    Notes
    -----
    For a trial value T of ``mu + sigma^2/2``: given ``w = n (ybar - T)^2 + (n - 1) s^2``, ``V = ybar - T``
    has a density proportional to ``(1 - V^2/a^2)^((n - 3)/2) exp(-n V / 2)`` on (-a, a), ``a^2 = w/n``. The
    limit is the T at which the probability of a V up to the observed one is one minus that wanted. With
    ``V = a sin t`` both integrals are smooth; they are taken by Gauss-Legendre about the peak.

    References
    ----------
    .. [1] Land, Annals of Mathematical Statistics 42, 1971, 1187-1205; not read, the form re-derived and
       held against published tables and examples by tests.
    """
    _refuse(sd_log, count, probability)
    wanted = 1.0 - probability
    centre = mean_log + sd_log**2 / 2
    step = sd_log
    low, high = centre - step, centre + step
    while _share(mean_log - high, sd_log, count) > wanted:
        step *= 2
        high += step
    while _share(mean_log - low, sd_log, count) < wanted:
        step *= 2
        low -= step
    for _ in range(_STEPS):
        between = (low + high) / 2
        beyond = _share(mean_log - between, sd_log, count) > wanted
        low, high = (between, high) if beyond else (low, between)
    return (low + high) / 2


def land_h(sd_log: float, count: int, probability: float) -> float:
    """Return the factor H of printed tables.

    Parameters
    ----------
    sd_log : float
        Standard deviation (n - 1) of the natural logarithms, above 0 and up to 20.
    count : int
        Results, 3 or more.
    probability : float
        Between 0 and 1.

    Returns
    -------
    float
        H in ``exp(ybar + s^2/2 + s H / sqrt(n - 1))``.

    Raises
    ------
    ValueRefused
        As `land_log_mean`.

    Notes
    -----
    The limit does not depend on the mean but through a sum, so H is that of a mean of zero. Gilbert 1987,
    tables A10 to A13.
    """
    limit = land_log_mean(0.0, sd_log, count, probability)
    return (limit - sd_log**2 / 2) * sqrt(count - 1) / sd_log


def _share(observed: float, sd: float, count: int) -> float:
    """Return the probability of a V up to the observed one."""
    scale = sqrt(observed**2 + (count - 1) * sd**2 / count)
    peak, width = _peak(scale, count)
    low, high = max(-pi / 2, peak - _WIDTHS * width), min(pi / 2, peak + _WIDTHS * width)
    edge = min(max(asin(observed / scale), low), high)
    top = _log_density(np.array([peak]), scale, count)[0]
    below, above = (_integral(a, b, scale, count, top) for a, b in ((low, edge), (edge, high)))
    return below / (below + above)


def _peak(scale: float, count: int) -> tuple[float, float]:
    """Return where the density in t is greatest, and how wide it is there."""
    half, power = count * scale / 2, count - 2
    sine = (power - sqrt(power**2 + 4 * half**2)) / (2 * half)
    curvature = power / (1 - sine**2) - half * sine
    return asin(sine), 1 / sqrt(curvature)


def _log_density(t: NDArray[np.float64], scale: float, count: int) -> NDArray[np.float64]:
    return np.asarray((count - 2) * np.log(np.cos(t)) - count * scale / 2 * np.sin(t))


def _integral(low: float, high: float, scale: float, count: int, top: float) -> float:
    nodes, weights = _rule()
    t = (low + high) / 2 + (high - low) / 2 * nodes
    values = np.exp(_log_density(t, scale, count) - top)
    return float((high - low) / 2 * np.dot(weights, values))


@cache
def _rule() -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    nodes, weights = np.polynomial.legendre.leggauss(_NODES)
    return nodes, weights


def _refuse(sd: float, count: int, probability: float) -> None:
    if count < _FEWEST:
        raise ValueRefused("number of results", str(count), "Land's limits need three or more")
    if not 0 < sd <= _WIDEST:
        raise ValueRefused(
            "standard deviation of logarithms",
            str(sd),
            f"Land's limits need one above 0 and up to {_WIDEST:g}",
        )
    if not 0 < probability < 1:
        raise ValueRefused("probability", str(probability), "give one between 0 and 1, as in 0.95")
