"""Mean and spread of lognormal results of which some are not detected."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from math import exp, expm1, fsum, log, sqrt

from effluent.calc.nondetect import Estimate, Minimum, check_results
from effluent.calc.quantile import mills_ratio, normal_quantile
from effluent.errors import ValueRefused

__all__ = ["likelihood", "regression"]

_TURNS = 100_000
_STILL = 1e-14
_MANY = 50


def regression(
    detects: Sequence[float], limits: Sequence[float], *, minimum: Minimum | None = None
) -> Estimate:
    """Return the robust estimate by regression on order statistics, lognormal.

    Only the non-detects are modelled; detected values count as they are.

    Parameters
    ----------
    detects : sequence of float, length k
        Detected values.
    limits : sequence of float, length m
        The number behind ``<`` of each non-detect, in the same unit.
    minimum : Minimum, optional
        What the estimate needs.

    Returns
    -------
    Estimate
        In the unit given; the standard deviation has n - 1.

    Raises
    ------
    ValueRefused
        If a number is not above zero, or there are too few detects, or all are the same.

    Notes
    -----
    Plotting positions of Hirsch and Stedinger (Weibull within each class), line of the logarithms of the
    detects against normal quantiles, Helsel and Cohn 1988, appendix B [1]_. A non-detect above every
    detected value is left aside.

    References
    ----------
    .. [1] Helsel, Cohn, Water Resources Research 24(12), 1988, 1997-2004; its data and answers read in
       the tests of a statistical library.
    """
    aside = check_results(detects, limits, minimum)
    _refuse_same(detects)
    known = [limit for limit in limits if limit <= max(detects)]
    seen, unseen = _positions(sorted(detects), sorted(known))
    slope, offset = _line([normal_quantile(p) for p in seen], [log(v) for v in sorted(detects)])
    modelled = [exp(offset + slope * normal_quantile(p)) for p in unseen]
    values = [*detects, *modelled]
    mean = fsum(values) / len(values)
    return Estimate(
        method="regression on order statistics",
        mean=mean,
        sd=sqrt(fsum((value - mean) ** 2 for value in values) / (len(values) - 1)),
        standard_error=None,
        count=len(detects) + len(limits),
        detects=len(detects),
        aside=aside,
        note="non-detects are modelled from a lognormal line through the detected values",
    )


def likelihood(
    detects: Sequence[float], limits: Sequence[float], *, minimum: Minimum | None = None
) -> Estimate:
    """Return the estimate of greatest likelihood for a lognormal distribution.

    Parameters
    ----------
    detects : sequence of float, length k
        Detected values.
    limits : sequence of float, length m
        The number behind ``<`` of each non-detect, in the same unit.
    minimum : Minimum, optional
        What the estimate needs.

    Returns
    -------
    Estimate
        In the unit given: ``exp(mu + s^2/2)``, and that times ``sqrt(exp(s^2) - 1)``.

    Raises
    ------
    ValueRefused
        If a number is not above zero, or there are too few detects, or all are the same, or no greatest
        likelihood is found.

    Notes
    -----
    Expectation and maximisation for a censored normal sample of logarithms, Dempster, Laird and Rubin
    1977 (from memory); every turn makes the likelihood greater.
    """
    check_results(detects, limits, minimum)
    _refuse_same(detects)
    mu, sigma = _likeliest([log(value) for value in detects], Counter(log(limit) for limit in limits))
    mean = exp(mu + sigma**2 / 2)
    count = len(detects) + len(limits)
    few = f"; with fewer than {_MANY} results it is easily far off" if count < _MANY else ""
    return Estimate(
        method="lognormal maximum likelihood",
        mean=mean,
        sd=mean * sqrt(expm1(sigma**2)),
        standard_error=None,
        count=count,
        detects=len(detects),
        aside=0,
        note=f"it holds for lognormal results only{few}",
    )


def _refuse_same(detects: Sequence[float]) -> None:
    if log(min(detects)) == log(max(detects)):
        raise ValueRefused("detected values", str(detects[0]), "all are the same and show no spread to model")


def _positions(detects: Sequence[float], limits: Sequence[float]) -> tuple[list[float], list[float]]:
    """Return the plotting positions of sorted detects and of sorted non-detects."""
    edges = [0.0, *sorted(set(limits)), float("inf")]
    exceeding = _exceeding(edges, detects, limits)
    seen: list[float] = []
    unseen: list[float] = []
    for j, edge in enumerate(edges[:-1]):
        inside = sum(edge <= value < edges[j + 1] for value in detects)
        here, above = exceeding[j], exceeding[j + 1]
        seen += [1 - here + (here - above) * rank / (inside + 1) for rank in range(1, inside + 1)]
        censored = limits.count(edge)
        unseen += [(1 - here) * rank / (censored + 1) for rank in range(1, censored + 1)]
    return seen, unseen


def _exceeding(edges: Sequence[float], detects: Sequence[float], limits: Sequence[float]) -> list[float]:
    """Return the probability of exceeding each edge, from the highest down."""
    exceeding = [0.0] * len(edges)
    for j in range(len(edges) - 2, -1, -1):
        inside = sum(edges[j] <= value < edges[j + 1] for value in detects)
        below = sum(value < edges[j] for value in detects) + sum(limit <= edges[j] for limit in limits)
        rest = 1 - exceeding[j + 1]
        exceeding[j] = exceeding[j + 1] + (inside / (inside + below) * rest if inside else 0.0)
    return exceeding


def _line(x: Sequence[float], y: Sequence[float]) -> tuple[float, float]:
    """Return slope and offset of the least-squares line."""
    mean_x, mean_y = fsum(x) / len(x), fsum(y) / len(y)
    slope = fsum((a - mean_x) * (b - mean_y) for a, b in zip(x, y, strict=True))
    slope /= fsum((a - mean_x) ** 2 for a in x)
    return slope, mean_y - slope * mean_x


def _likeliest(values: Sequence[float], limits: Counter[float]) -> tuple[float, float]:
    """Return mean and standard deviation of a left-censored normal sample."""
    count = len(values) + limits.total()
    mu = fsum([*values, *limits.elements()]) / count
    variance = fsum((v - mu) ** 2 for v in [*values, *limits.elements()]) / count
    for _ in range(_TURNS):
        sigma = sqrt(variance)
        expected = [(_below(limit, mu, sigma), times) for limit, times in limits.items()]
        following = (fsum(values) + fsum(first * times for (first, _), times in expected)) / count
        squares = fsum((v - following) ** 2 for v in values)
        squares += fsum(times * (spread + (first - following) ** 2) for (first, spread), times in expected)
        moved = abs(following - mu) + abs(squares / count - variance)
        mu, variance = following, squares / count
        if moved <= _STILL * (1.0 + abs(mu) + variance):
            return mu, sqrt(variance)
    raise ValueRefused("results", f"{count} of them", "no greatest likelihood was found; use Kaplan-Meier")


def _below(limit: float, mu: float, sigma: float) -> tuple[float, float]:
    """Return mean and variance of a normal variable known to lie below a limit."""
    z = (limit - mu) / sigma
    ratio = mills_ratio(z)
    return mu - sigma * ratio, sigma**2 * max(1 - z * ratio - ratio**2, 0.0)
