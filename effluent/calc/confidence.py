"""Confidence limits of a mean, and how many more samples would settle it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, exp, fsum, log, sqrt

from effluent.calc.land import land_log_mean
from effluent.calc.quantile import student_quantile
from effluent.errors import ValueRefused

__all__ = ["MeanLimits", "chebyshev", "land", "samples_needed", "student"]

_FEWEST_LAND = 3
_MOST_SAMPLES = 10**6
_LARGEST_LOG = 700.0


@dataclass(frozen=True, kw_only=True)
class MeanLimits:
    """One-sided confidence limits of a mean, in the unit of the results.

    With the confidence given, the true mean lies above ``lower``; and with the same, below ``upper``; it
    lies between both with twice the doubt. ``mean`` and ``sd`` are those of the results as they are.
    """

    method: str
    confidence: float
    count: int
    mean: float
    sd: float
    lower: float
    upper: float


def student(values: Sequence[float], confidence: float) -> MeanLimits:
    """Return confidence limits of a mean by Student t, for results that are near to normal.

    Parameters
    ----------
    values : sequence of float, length n >= 2
        Results in one unit.
    confidence : float
        One-sided, above 0.5 and below 1.

    Returns
    -------
    MeanLimits
        In that unit; ``lower`` may lie below zero.

    Raises
    ------
    ValueRefused
        If there are fewer than two results, one is not finite, or the confidence is none.

    Notes
    -----
    ``mean -+ t(confidence, n - 1) s / sqrt(n)``; EPA 9285.7-081, highlight 6, and SW-846, chapter nine,
    table 9-1 (equation numbers from memory).
    """
    mean, sd = _moments(values, confidence)
    half = student_quantile(confidence, len(values) - 1) * sd / sqrt(len(values))
    return _limits("Student t", values, confidence, (mean - half, mean + half))


def chebyshev(values: Sequence[float], confidence: float) -> MeanLimits:
    """Return confidence limits of a mean for any distribution, after Chebyshev.

    The true spread is taken to be that of the results; for strongly skewed ones it still comes out short.

    Parameters
    ----------
    values : sequence of float, length n >= 2
        Results in one unit.
    confidence : float
        One-sided, above 0.5 and below 1.

    Returns
    -------
    MeanLimits
        In that unit; ``lower`` may lie below zero.

    Raises
    ------
    ValueRefused
        As `student`.

    Notes
    -----
    ``mean -+ sqrt(1/a - 1) s / sqrt(n)``, a = 1 - confidence: one-sided Chebyshev (Cantelli) inequality as
    in EPA's technical guides to ProUCL (from memory).
    """
    mean, sd = _moments(values, confidence)
    half = sqrt(1 / (1 - confidence) - 1) * sd / sqrt(len(values))
    return _limits("Chebyshev", values, confidence, (mean - half, mean + half))


def land(values: Sequence[float], confidence: float) -> MeanLimits:
    """Return exact confidence limits of the mean of lognormal results, after Land.

    Parameters
    ----------
    values : sequence of float, length n >= 3
        Results in one unit, all above zero and not all the same.
    confidence : float
        One-sided, above 0.5 and below 1.

    Returns
    -------
    MeanLimits
        In that unit.

    Raises
    ------
    ValueRefused
        If there are fewer than three results, one is not above zero, all are the same, or
        they scatter beyond reason.

    Notes
    -----
    ``exp(ybar + s^2/2 + s H / sqrt(n - 1))``, EPA 9285.7-081 (May 1992), highlight 5 (number from memory), y
    the natural logarithms; the limit is computed without the printed table of H.
    """
    _moments(values, confidence)
    if len(values) < _FEWEST_LAND:
        raise ValueRefused("number of results", str(len(values)), "Land's limits need three or more")
    if min(values) <= 0:
        raise ValueRefused("result", str(min(values)), "a lognormal result is above zero; use Student t")
    logs = [log(value) for value in values]
    mean, sd = _mean_sd(logs)
    if min(logs) == max(logs):
        raise ValueRefused("results", str(values[0]), "all are the same and show no spread")
    lower, upper = (land_log_mean(mean, sd, len(logs), p) for p in (1 - confidence, confidence))
    if upper > _LARGEST_LOG:
        raise ValueRefused(
            "results", f"{len(values)} of them", "they scatter so much that no limit can be told"
        )
    return _limits("Land", values, confidence, (exp(lower), exp(upper)))


def samples_needed(mean: float, sd: float, count: int, *, limit: float, confidence: float = 0.9) -> int:
    """Return how many samples in all would show that a mean meets a maximum, if it stays as it is.

    Parameters
    ----------
    mean, sd : float
        Mean and standard deviation so far, in the unit of the limit.
    count : int
        Results so far, 2 or more.
    limit : float
        The maximum; above the mean.
    confidence : float
        One-sided, above 0.5 and below 1; 0.9 is the 80 % interval of SW-846.

    Returns
    -------
    int
        Samples in all, those at hand included; not above `count` means that it is settled.

    Raises
    ------
    ValueRefused
        If there are fewer than two results, the mean does not lie below the limit (more samples of the same
        kind would then never show it to be met), the spread is negative, or the number is beyond reason.

    Notes
    -----
    ``n = t^2 s^2 / D^2`` with ``D = limit - mean`` and t for n - 1 results at hand, rounded up; SW-846,
    chapter nine, table 9-1, equation 8 (from memory). A plan, not a promise: mean and spread will move.
    """
    _refuse_no_confidence(confidence)
    free = limit - mean
    if not free > 0:
        raise ValueRefused(
            "mean", str(mean), f"it does not lie below {limit}; more of the same settles nothing"
        )
    if not sd >= 0:
        raise ValueRefused("standard deviation", str(sd), "it is never negative")
    wanted = (student_quantile(confidence, count - 1) * sd / free) ** 2
    if wanted > _MOST_SAMPLES:
        raise ValueRefused(
            "number of samples", f"{wanted:.3g}", "the mean lies too near to the limit to settle it"
        )
    return max(ceil(wanted), 1)


def _moments(values: Sequence[float], confidence: float) -> tuple[float, float]:
    _refuse_no_confidence(confidence)
    if len(values) < 2:
        raise ValueRefused("number of results", str(len(values)), "a spread needs two or more")
    wrong = [value for value in values if not abs(value) < float("inf")]
    if wrong:
        raise ValueRefused("result", str(wrong[0]), "every result has to be a number")
    return _mean_sd(values)


def _refuse_no_confidence(confidence: float) -> None:
    if not 0.5 < confidence < 1.0:
        raise ValueRefused("confidence", str(confidence), "give one above 0.5 and below 1, as in 0.95")


def _mean_sd(values: Sequence[float]) -> tuple[float, float]:
    mean = fsum(values) / len(values)
    return mean, sqrt(fsum((value - mean) ** 2 for value in values) / (len(values) - 1))


def _limits(method: str, values: Sequence[float], confidence: float, ends: tuple[float, float]) -> MeanLimits:
    mean, sd = _mean_sd(values)
    return MeanLimits(
        method=method,
        confidence=confidence,
        count=len(values),
        mean=mean,
        sd=sd,
        lower=ends[0],
        upper=ends[1],
    )
