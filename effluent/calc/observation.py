"""One measured amount with what is known of it: value, estimate, or only a bound."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import IntEnum, StrEnum
from fractions import Fraction as Rational

from effluent.domain import Qualifier
from effluent.errors import ValueRefused

__all__ = ["Observation", "Standing", "Substitution", "middle", "substitute"]

_ZERO = Rational(0)


class Standing(IntEnum):
    """How sure the laboratory is, in the rank order of the median rule."""

    NOT_DETECTED = 0
    NOT_QUANTIFIED = 1
    QUANTIFIED = 2


class Substitution(StrEnum):
    """Which number stands for a result that is not quantified."""

    ZERO = "zero"
    HALF = "half"
    FULL = "full"
    BETWEEN = "detection limit between the two"
    MEDIAN = "median"


@dataclass(frozen=True, kw_only=True)
class Observation:
    """One result in one unit: ``value`` is the number reported, or the bound of ``<`` and ``>``.

    ``estimated`` says that the laboratory detected it below its reporting limit (flag J).
    """

    value: Rational
    qualifier: Qualifier = Qualifier.EQUAL
    detection_limit: Rational | None = None
    reporting_limit: Rational | None = None
    estimated: bool = False

    @property
    def low(self) -> Rational:
        """The least the truth can be: zero for a non-detect."""
        return _ZERO if self.qualifier == Qualifier.BELOW else self.value

    @property
    def high(self) -> Rational | None:
        """The most the truth can be: the number behind ``<``; `None` where nothing bounds it."""
        return None if self.qualifier == Qualifier.ABOVE else self.value

    @property
    def standing(self) -> Standing:
        """Not detected, detected but not quantified, or quantified."""
        if self.qualifier == Qualifier.BELOW:
            return Standing.NOT_DETECTED
        limit = self.reporting_limit
        small = limit is not None and self.value < limit and self.qualifier == Qualifier.EQUAL
        return Standing.NOT_QUANTIFIED if self.estimated or small else Standing.QUANTIFIED


def substitute(observation: Observation, rule: Substitution) -> Rational:
    """Return the number that stands for one observation.

    Parameters
    ----------
    observation : Observation
        In any unit; a value or a lower bound stands for itself unless `rule` is between and it is not
        quantified.
    rule : Substitution
        Zero, half or full of the number behind ``<``; or zero below the detection limit and the detection
        limit between it and the reporting limit.

    Returns
    -------
    fractions.Fraction
        In the unit of the observation.

    Raises
    ------
    ValueRefused
        If the rule needs a detection limit that is missing, or is the median, which replaces no number.

    Notes
    -----
    Zero, half and full: practices of several authorities; the rule between: instructions for monitoring
    reports of Oregon, 2.4.3.3, arithmetic means, as restated in a second text [1]_.

    References
    ----------
    .. [1] Oregon Department of Environmental Quality, instructions for discharge monitoring reports,
       2.4.3.3; read only second-hand.
    """
    if rule == Substitution.MEDIAN:
        raise ValueRefused(
            "non-detect rule", str(rule), "the median ranks results and puts no number for one"
        )
    if observation.standing == Standing.QUANTIFIED:
        return observation.value
    if rule == Substitution.BETWEEN:
        return _between(observation)
    if observation.standing == Standing.NOT_QUANTIFIED:
        return observation.value
    share = {Substitution.ZERO: _ZERO, Substitution.HALF: Rational(1, 2), Substitution.FULL: Rational(1)}
    return observation.value * share[rule]


def _between(observation: Observation) -> Rational:
    limit = observation.detection_limit
    if limit is None:
        raise ValueRefused(
            "detection limit", "", f"the rule {Substitution.BETWEEN!s} needs it; enter it or use another rule"
        )
    below = observation.standing == Standing.NOT_DETECTED and observation.value <= limit
    return _ZERO if below else limit


def middle(ranked: Sequence[tuple[Standing, Rational]]) -> tuple[Standing, Rational]:
    """Return the median of results of which some are not quantified.

    Parameters
    ----------
    ranked : sequence of (Standing, Fraction), length n >= 1
        In any order and one unit; the number of a non-detect does not matter.

    Returns
    -------
    (Standing, Fraction)
        The middle one in the order not detected, not quantified, quantified; of an even number the mean of
        the middle two if both are quantified, else the lower.

    Raises
    ------
    ValueRefused
        If there is none.

    References
    ----------
    .. [1] Rule of California's general permits for compliance with effluent limits below the reporting
       limit, as written in a permit of the state; read on 2026-12-01 as quoted there.
    """
    if not ranked:
        raise ValueRefused("median", "", "it needs at least one result")
    order = sorted(ranked)
    below, above = order[(len(order) - 1) // 2], order[len(order) // 2]
    if below[0] == above[0] == Standing.QUANTIFIED:
        return Standing.QUANTIFIED, (below[1] + above[1]) / 2
    return below
