"""The normal and the Student distribution, as far as limits of a mean need them."""

from __future__ import annotations

from math import atan, cos, erfc, exp, pi, sin, sqrt
from statistics import NormalDist

from effluent.errors import ValueRefused

__all__ = ["mills_ratio", "normal_cdf", "normal_quantile", "student_cdf", "student_quantile"]

_SERIES_UP_TO = 1000
_FAR = -30.0
_STEPS = 90


def normal_cdf(z: float) -> float:
    """Return the probability that a standard normal variable lies below a number.

    Parameters
    ----------
    z : float
        In standard deviations.

    Returns
    -------
    float
        0 to 1, without loss of digits in the lower tail.

    Raises
    ------
    ValueError
        Never.

    Notes
    -----
    Abramowitz and Stegun [1]_, 26.2.29 (from memory).

    References
    ----------
    .. [1] Abramowitz, Stegun, Handbook of Mathematical Functions, 1964.
    """
    return 0.5 * erfc(-z / sqrt(2.0))


def normal_quantile(probability: float) -> float:
    """Return the number below which a standard normal variable lies with a probability.

    Parameters
    ----------
    probability : float
        Between 0 and 1, both excluded.

    Returns
    -------
    float
        In standard deviations, to about 16 digits.

    Raises
    ------
    ValueRefused
        If it is not between 0 and 1.

    Notes
    -----
    Algorithm AS 241 (Wichura 1988), of the standard library.
    """
    _refuse_certainty(probability)
    return NormalDist().inv_cdf(probability)


def mills_ratio(z: float) -> float:
    """Return the normal density over the probability below: ``phi(z) / Phi(z)``.

    Parameters
    ----------
    z : float
        In standard deviations.

    Returns
    -------
    float
        Above zero; below -30 from its asymptotic series, to 9 digits.

    Raises
    ------
    ValueError
        Never.

    Notes
    -----
    Abramowitz and Stegun, 26.2.12 (from memory): ``Phi(-x) = phi(x)/x (1 - 1/x^2 + 3/x^4 - 15/x^6 + ...)``.
    """
    if z < _FAR:
        square = z * z
        return -z / (1.0 - 1.0 / square + 3.0 / square**2 - 15.0 / square**3)
    return exp(-z * z / 2.0) / sqrt(2.0 * pi) / normal_cdf(z)


def student_cdf(t: float, df: int) -> float:
    """Return the probability that a Student variable lies below a number.

    Parameters
    ----------
    t : float
        The number.
    df : int
        Degrees of freedom, 1 to 1000.

    Returns
    -------
    float
        0 to 1, to an absolute 1e-14.

    Raises
    ------
    ValueRefused
        If there is no degree of freedom.

    Notes
    -----
    Finite series for whole degrees of freedom, Abramowitz and Stegun, 26.7.3 and 26.7.4 (from memory).
    """
    _refuse_no_freedom(df)
    angle = atan(t / sqrt(df))
    cosine2 = cos(angle) ** 2
    odd = df % 2
    term = cos(angle) if odd else 1.0
    total = 0.0 if df == 1 else term
    for k in range(1, (df - 3) // 2 + 1 if odd else df // 2):
        term *= cosine2 * (2 * k / (2 * k + 1) if odd else (2 * k - 1) / (2 * k))
        total += term
    inside = sin(angle) * total
    return 0.5 + (0.5 * inside if not odd else (angle + inside) / pi)


def student_quantile(probability: float, df: int) -> float:
    """Return the number below which a Student variable lies with a probability.

    Parameters
    ----------
    probability : float
        Between 0 and 1, both excluded.
    df : int
        Degrees of freedom, 1 or more.

    Returns
    -------
    float
        To a relative 1e-9 for probabilities of 0.0001 to 0.9999.

    Raises
    ------
    ValueRefused
        If the probability is not between 0 and 1, or there is no degree of freedom.

    Notes
    -----
    Up to 1000 degrees of freedom `student_cdf` is inverted by bisection; beyond, the expansion 26.7.5 of
    Abramowitz and Stegun about the normal quantile (from memory; held against scipy by a test).
    """
    _refuse_certainty(probability)
    _refuse_no_freedom(df)
    if probability < 0.5:
        return -student_quantile(1.0 - probability, df)
    if df > _SERIES_UP_TO:
        return _expanded(normal_quantile(probability), df)
    low, high = 0.0, 1.0
    while student_cdf(high, df) < probability:
        low, high = high, 2.0 * high
    for _ in range(_STEPS):
        between = (low + high) / 2.0
        low, high = (between, high) if student_cdf(between, df) < probability else (low, between)
    return high


def _expanded(x: float, df: int) -> float:
    terms = (
        (x**3 + x) / 4,
        (5 * x**5 + 16 * x**3 + 3 * x) / 96,
        (3 * x**7 + 19 * x**5 + 17 * x**3 - 15 * x) / 384,
        (79 * x**9 + 776 * x**7 + 1482 * x**5 - 1920 * x**3 - 945 * x) / 92160,
    )
    return x + sum(term / float(df) ** power for power, term in enumerate(terms, start=1))


def _refuse_certainty(probability: float) -> None:
    if not 0.0 < probability < 1.0:
        raise ValueRefused("probability", str(probability), "give one between 0 and 1, as in 0.95")


def _refuse_no_freedom(df: int) -> None:
    if df < 1:
        raise ValueRefused("number of results", str(df + 1), "a spread needs two or more")
