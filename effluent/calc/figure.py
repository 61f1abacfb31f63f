"""A statistic of observations: its bounds whatever the rule, and its value under a rule."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction as Rational

from effluent.calc.observation import Observation, Standing, Substitution, middle, substitute
from effluent.errors import ValueRefused

__all__ = ["Figure", "figure_of", "greatest_figure", "greatest_high", "mean_figure"]

_ZERO = Rational(0)


@dataclass(frozen=True, kw_only=True)
class Figure:
    """A statistic of observations in their unit, exact.

    ``low`` and ``high`` bound it whatever the rule: every non-detect at zero, and at the number behind
    ``<``. ``value`` is the figure under the rule; `None` where it is itself not detected (``standing``
    says so) or where a result above the measuring range leaves it open (``high`` is `None` then).
    ``count`` and ``nondetects`` tell the observations it rests on.
    """

    low: Rational
    high: Rational | None
    value: Rational | None
    standing: Standing
    count: int
    nondetects: int


def figure_of(observation: Observation, rule: Substitution) -> Figure:
    """Return one observation as a figure.

    Parameters
    ----------
    observation : Observation
        In any unit.
    rule : Substitution
        For what is not quantified; the median leaves a non-detect without a value.

    Returns
    -------
    Figure
        In the unit of the observation.

    Raises
    ------
    ValueRefused
        As `effluent.calc.observation.substitute`.

    Notes
    -----
    A change of form and the rule of `effluent.calc.observation.substitute`.
    """
    missing = observation.standing == Standing.NOT_DETECTED
    ranked = rule == Substitution.MEDIAN
    stands = observation.value if ranked else substitute(observation, rule)
    return Figure(
        low=observation.low,
        high=observation.high,
        value=None if observation.high is None or (missing and ranked) else stands,
        standing=observation.standing,
        count=1,
        nondetects=int(missing),
    )


def greatest_high(highs: Sequence[Rational | None]) -> Rational | None:
    """Return the greatest upper bound, or `None` where one is open.

    Parameters
    ----------
    highs : sequence of Fraction or None, length n >= 1
        In one unit.

    Returns
    -------
    Fraction or None
        In that unit.

    Raises
    ------
    ValueError
        If there is none.

    Notes
    -----
    A comparison only; no source needed.
    """
    bounded = [high for high in highs if high is not None]
    return max(bounded) if len(bounded) == len(highs) else None


def greatest_figure(figures: Sequence[Figure]) -> Figure:
    """Return the highest of several figures.

    Parameters
    ----------
    figures : sequence of Figure, length n >= 1
        In one unit, made under one rule.

    Returns
    -------
    Figure
        ``low`` and ``high`` are the greatest of the bounds; value and standing those of the figure with the
        greatest value, where it is not detected those of the best.

    Raises
    ------
    ValueError
        If there is none.

    Notes
    -----
    The maximum lies between the greatest lower and the greatest upper bound; no source needed.
    """
    high = greatest_high([figure.high for figure in figures])
    top = max(figures, key=_height)
    return Figure(
        low=max(figure.low for figure in figures),
        high=high,
        value=None if high is None else top.value,
        standing=top.standing,
        count=sum(figure.count for figure in figures),
        nondetects=sum(figure.nondetects for figure in figures),
    )


def mean_figure(
    figures: Sequence[Figure], rule: Substitution, weights: Sequence[Rational] | None = None
) -> Figure:
    """Return the mean of several figures, under the median rule their median where one is not quantified.

    Parameters
    ----------
    figures : sequence of Figure, length n >= 1
        In one unit, made under `rule`.
    rule : Substitution
        For what is not quantified.
    weights : sequence of Fraction, length n, optional
        They add up to one; without them all count the same.

    Returns
    -------
    Figure
        In the unit of the figures; its bounds are the means of the bounds, whatever the rule.

    Raises
    ------
    ValueRefused
        If the median rule meets weights.
    ZeroDivisionError
        If there is no figure.

    Notes
    -----
    Arithmetic mean; the median rule is that of `effluent.calc.observation.middle`.
    """
    shares = [Rational(1, len(figures))] * len(figures) if weights is None else weights
    bounded = all(figure.high is not None for figure in figures)
    lowest = min(figure.standing for figure in figures)
    if rule == Substitution.MEDIAN and lowest != Standing.QUANTIFIED:
        standing, value = _median(figures, weights)
    else:
        standing = max(figure.standing for figure in figures)
        value = _dot([figure.value or _ZERO for figure in figures], shares)
    return Figure(
        low=_dot([figure.low for figure in figures], shares),
        high=_dot([figure.high or _ZERO for figure in figures], shares) if bounded else None,
        value=value if bounded else None,
        standing=standing,
        count=sum(figure.count for figure in figures),
        nondetects=sum(figure.nondetects for figure in figures),
    )


def _height(figure: Figure) -> tuple[bool, Rational, Standing]:
    return figure.value is not None, figure.value or _ZERO, figure.standing


def _median(
    figures: Sequence[Figure], weights: Sequence[Rational] | None
) -> tuple[Standing, Rational | None]:
    if weights is not None:
        raise ValueRefused(
            "non-detect rule", str(Substitution.MEDIAN), "a median has no weights; use another rule or a mean"
        )
    standing, value = middle([(figure.standing, figure.value or _ZERO) for figure in figures])
    return standing, None if standing == Standing.NOT_DETECTED else value


def _dot(values: Sequence[Rational], weights: Sequence[Rational]) -> Rational:
    return sum((value * weight for value, weight in zip(values, weights, strict=True)), _ZERO)
