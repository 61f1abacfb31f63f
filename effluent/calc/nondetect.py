"""Mean and spread of results of which some are not detected, without a distribution."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from math import fsum, sqrt

from effluent.calc.quantile import student_quantile
from effluent.errors import ValueRefused

__all__ = ["Anchor", "Estimate", "Minimum", "check_results", "kaplan_meier"]


class Anchor(StrEnum):
    """Where Kaplan-Meier puts the probability left below the lowest detected value."""

    ZERO = "zero"
    LOWEST_LIMIT = "lowest limit"
    LOWEST_DETECT = "lowest detected value"


@dataclass(frozen=True, kw_only=True)
class Minimum:
    """What an estimate needs: detected values, and at most a share of non-detects.

    Our own choice after the advice of handbooks (at least 4 to 6 detected values, at most 80 % not
    detected; from memory). Below it an estimate is refused.
    """

    detects: int = 5
    nondetect_percent: int = 80


@dataclass(frozen=True, kw_only=True)
class Estimate:
    """Mean and standard deviation in the unit of the results.

    ``standard_error`` is that of the mean, `None` where the method gives none. ``aside`` counts non-detects
    above every detected value, which tell the method nothing. ``note`` says what to bear in mind.
    """

    method: str
    mean: float
    sd: float
    standard_error: float | None
    count: int
    detects: int
    aside: int
    note: str

    def upper_limit(self, confidence: float) -> float:
        """Return the one-sided upper confidence limit of the mean, Student t.

        Raises
        ------
        ValueRefused
            If the method gives no standard error.
        """
        if self.standard_error is None:
            raise ValueRefused("method", self.method, "it gives no confidence limit; use Kaplan-Meier")
        return self.mean + student_quantile(confidence, self.count - 1) * self.standard_error


def kaplan_meier(
    detects: Sequence[float],
    limits: Sequence[float],
    *,
    anchor: Anchor = Anchor.LOWEST_LIMIT,
    minimum: Minimum | None = None,
) -> Estimate:
    """Return the Kaplan-Meier estimate for left-censored results; no distribution is assumed.

    Parameters
    ----------
    detects : sequence of float, length k
        Detected values.
    limits : sequence of float, length m
        The number behind ``<`` of each non-detect, in the same unit.
    anchor : Anchor
        Where the probability below the lowest detect goes; published figures follow one or another.
    minimum : Minimum, optional
        What the estimate needs.

    Returns
    -------
    Estimate
        In the unit given; ``sd`` from the estimated distribution (there is another reading of it: the
        standard error times the root of n).

    Raises
    ------
    ValueRefused
        If a number is not above zero, or there are too few detects.

    Notes
    -----
    With ``v`` the detected values from the highest down, ``n_v`` results at or below v (a detect ranks above
    a non-detect of the same number), ``d_v`` detects at v: mass ``S d_v / n_v``, then ``S (1 - d_v / n_v)``.
    ``SE^2 = k/(k-1) sum(A_v^2 d_v / (n_v (n_v - d_v)))``, A_v the area under the distribution up to v [1]_.

    References
    ----------
    .. [1] Helsel, Nondetects and Data Analysis, 2005, chapter 6, and EPA's technical guides to ProUCL; from
       memory, held against figures of two published R packages by a test.
    """
    aside = check_results(detects, limits, minimum)
    masses, steps = _steps(detects, limits)
    left = 1.0 - fsum(mass for _, mass in masses)
    floor = {
        Anchor.ZERO: 0.0,
        Anchor.LOWEST_LIMIT: min([*detects, *limits]),
        Anchor.LOWEST_DETECT: min(detects),
    }[anchor]
    points = [(floor, max(left, 0.0)), *reversed(masses)]
    mean = fsum(value * mass for value, mass in points)
    return Estimate(
        method="Kaplan-Meier",
        mean=mean,
        sd=sqrt(fsum(mass * (value - mean) ** 2 for value, mass in points)),
        standard_error=_standard_error(points, steps, len(detects)),
        count=len(detects) + len(limits),
        detects=len(detects),
        aside=aside,
        note=f"the probability below the lowest detected value is put at the {anchor}",
    )


def check_results(detects: Sequence[float], limits: Sequence[float], minimum: Minimum | None) -> int:
    """Refuse what cannot be estimated; return how many limits lie above every detect.

    Parameters
    ----------
    detects : sequence of float, length k
        Detected values.
    limits : sequence of float, length m
        The number behind ``<`` of each non-detect, in the same unit.
    minimum : Minimum or None
        What an estimate needs; never fewer than two detects.

    Returns
    -------
    int
        0 to m.

    Raises
    ------
    ValueRefused
        If a number is not above zero, there are too few detects, or too large a share of non-detects.

    Notes
    -----
    The minimum is a choice of `Minimum`; no source needed for a comparison.
    """
    for number in (*detects, *limits):
        if not 0.0 < number < float("inf"):
            raise ValueRefused("result", str(number), "estimators need numbers above zero")
    need = minimum or Minimum()
    count = len(detects) + len(limits)
    if len(detects) < max(need.detects, 2):
        raise ValueRefused(
            "number of detected values",
            str(len(detects)),
            f"an estimate needs {max(need.detects, 2)} or more; look at the bounds instead",
        )
    if len(limits) * 100 > need.nondetect_percent * count:
        raise ValueRefused(
            "number of non-detects",
            f"{len(limits)} of {count}",
            f"an estimate needs at most {need.nondetect_percent} %; look at the bounds instead",
        )
    return sum(limit > max(detects) for limit in limits)


def _steps(
    detects: Sequence[float], limits: Sequence[float]
) -> tuple[list[tuple[float, float]], dict[float, tuple[int, int]]]:
    """Return (value, mass) from the highest detect down, and (n_v, d_v) of each."""
    at = Counter(detects)
    left, masses, steps = 1.0, [], {}
    for value in sorted(at, reverse=True):
        below = sum(v <= value for v in detects) + sum(v <= value for v in limits)
        masses.append((value, left * at[value] / below))
        left *= 1 - at[value] / below
        steps[value] = (below, at[value])
    return masses, steps


def _standard_error(
    points: Sequence[tuple[float, float]], steps: dict[float, tuple[int, int]], detects: int
) -> float:
    """Return the standard error from (value, mass) in rising order."""
    area = share = total = 0.0
    before = points[0][0]
    for value, mass in points:
        area += share * (value - before)
        share, before = share + mass, value
        below, at = steps.get(value, (0, 0))
        if below > at:
            total += area**2 * at / (below * (below - at))
    return sqrt(detects / (detects - 1) * total)
