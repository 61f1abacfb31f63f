"""Decisions under measurement uncertainty: how probable it is that the true value meets a limit."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction as Rational
from math import sqrt

from effluent.calc.number import decimal_text
from effluent.calc.quantile import normal_cdf
from effluent.domain import Bound, BrokenBy
from effluent.errors import ValueRefused

__all__ = [
    "Blend",
    "Decision",
    "DecisionRule",
    "Guard",
    "Part",
    "Shared",
    "acceptance_limit",
    "blend",
    "decide",
    "probability_met",
    "risk_at_acceptance_limit",
]

_COVERAGE = 2
_ZERO = Rational(0)
_OTHER = {Bound.MAXIMUM: Bound.MINIMUM, Bound.MINIMUM: Bound.MAXIMUM}


class DecisionRule(StrEnum):
    """Where acceptance ends, seen from the limit; the place says which."""

    SIMPLE = "simple acceptance"
    GUARDED_ACCEPTANCE = "guarded acceptance"
    GUARDED_REJECTION = "guarded rejection"


class Shared(StrEnum):
    """Whether errors of the concentrations in a blend are independent, or one common error."""

    NONE = "independent"
    ALL = "shared"


@dataclass(frozen=True, kw_only=True)
class Guard:
    """A decision rule with its guard band ``w = multiple x U``, U the expanded uncertainty (k = 2)."""

    rule: DecisionRule = DecisionRule.SIMPLE
    multiple: Rational = Rational(1)


@dataclass(frozen=True, kw_only=True)
class Decision:
    """A result against a limit, in the unit of both.

    ``accepted`` follows from exact arithmetic on ``acceptance_limit``. ``probability_met`` is that of the
    true value to meet the limit, given this result, ``probability_broken`` that to break it (kept apart, so
    that a small one has its digits). ``caution`` is empty or a sentence.
    """

    accepted: bool
    acceptance_limit: Rational
    guard_band: Rational
    probability_met: float
    probability_broken: float
    caution: str

    @property
    def false_accept_risk(self) -> float | None:
        """The risk that an accepted result is in truth over the limit; `None` where rejected."""
        return self.probability_broken if self.accepted else None

    @property
    def false_reject_risk(self) -> float | None:
        """The risk that a rejected result in truth meets the limit; `None` where accepted."""
        return None if self.accepted else self.probability_met


@dataclass(frozen=True, kw_only=True)
class Part:
    """One part of a blend: volume and concentration with their expanded uncertainties (k = 2)."""

    volume: Rational
    concentration: Rational
    volume_spread: Rational = _ZERO
    concentration_spread: Rational = _ZERO


@dataclass(frozen=True, kw_only=True)
class Blend:
    """The concentration of a blend, exact, and its expanded uncertainty (k = 2)."""

    volume: Rational
    concentration: Rational
    spread: float


def probability_met(value: float, expanded: float, limit: float, *, bound: Bound = Bound.MAXIMUM) -> float:
    """Return the probability that the true value meets a limit.

    Parameters
    ----------
    value, limit : float
        Result and limit in one unit.
    expanded : float
        Expanded uncertainty (k = 2) in that unit, above zero.
    bound : Bound
        Maximum or minimum.

    Returns
    -------
    float
        0 to 1.

    Raises
    ------
    ValueRefused
        If the uncertainty is not above zero.

    Notes
    -----
    ``Phi((T - y) / u)`` with ``u = U / 2``; JCGM 106:2012, 7.2.2 and 7.3 (clause numbers from memory):
    normal, and nothing known beforehand.

    References
    ----------
    .. [1] JCGM 106:2012, Evaluation of measurement data - The role of measurement uncertainty in
       conformity assessment; not read here, its figures recalculated.
    """
    if not expanded > 0.0:
        raise ValueRefused("uncertainty", str(expanded), "give the expanded uncertainty (k = 2), above zero")
    free = limit - value if bound == Bound.MAXIMUM else value - limit
    return normal_cdf(free / (expanded / _COVERAGE))


def acceptance_limit(
    limit: Rational, expanded: Rational, guard: Guard, *, bound: Bound = Bound.MAXIMUM
) -> Rational:
    """Return the value up to which (for a minimum: from which) a result is accepted.

    Parameters
    ----------
    limit : Fraction
        The limit T.
    expanded : Fraction
        Expanded uncertainty U (k = 2) in the unit of the limit, not negative.
    guard : Guard
        Rule and multiple r of U.
    bound : Bound
        Maximum or minimum.

    Returns
    -------
    Fraction
        T, T - rU or T + rU for a maximum; mirrored for a minimum.

    Raises
    ------
    ValueRefused
        If the uncertainty or the multiple is negative.

    Notes
    -----
    ``AL = TL - w``, ``w = rU``, ILAC-G8:09/2019; guarded rejection is the mirror, JCGM 106:2012, 8.3.
    """
    if expanded < 0 or guard.multiple < 0:
        raise ValueRefused(
            "guard band", str(float(expanded * guard.multiple)), "uncertainty and multiple are never negative"
        )
    sign = {
        DecisionRule.SIMPLE: 0,
        DecisionRule.GUARDED_ACCEPTANCE: -1,
        DecisionRule.GUARDED_REJECTION: 1,
    }[guard.rule]
    inward = sign if bound == Bound.MAXIMUM else -sign
    return limit + inward * guard.multiple * expanded


def decide(
    value: Rational,
    expanded: Rational,
    limit: Rational,
    *,
    guard: Guard,
    bound: Bound = Bound.MAXIMUM,
    broken_by: BrokenBy = BrokenBy.BEYOND,
) -> Decision:
    """Return whether a result is accepted under a decision rule, and at which risk.

    Parameters
    ----------
    value, limit : Fraction
        Result and limit in one unit.
    expanded : Fraction
        Expanded uncertainty (k = 2) in that unit, above zero.
    guard : Guard
        The rule of the place.
    bound : Bound
        Maximum or minimum.
    broken_by : BrokenBy
        Whether a result equal to the acceptance limit is refused.

    Returns
    -------
    Decision
        Exact in the comparison; probabilities as doubles.

    Raises
    ------
    ValueRefused
        As `probability_met` and `acceptance_limit`.

    Notes
    -----
    JCGM 106:2012, clause 8; ILAC-G8:09/2019. The risk is that of this result (specific risk).
    """
    figures = float(value), float(expanded), float(limit)
    edge = acceptance_limit(limit, expanded, guard, bound=bound)
    free = edge - value if bound == Bound.MAXIMUM else value - edge
    return Decision(
        accepted=free > 0 or (free == 0 and broken_by == BrokenBy.BEYOND),
        acceptance_limit=edge,
        guard_band=abs(edge - limit),
        probability_met=probability_met(*figures, bound=bound),
        probability_broken=probability_met(*figures, bound=_OTHER[bound]),
        caution=_wide(decimal_text(expanded)) if expanded > abs(value) else "",
    )


def risk_at_acceptance_limit(guard: Guard) -> float:
    """Return the greatest risk of accepting a result whose true value breaks the limit.

    Parameters
    ----------
    guard : Guard
        Rule and multiple of the expanded uncertainty.

    Returns
    -------
    float
        Risk of a result that lies on the acceptance limit.

    Raises
    ------
    ValueRefused
        If the multiple is negative.

    Notes
    -----
    ``Phi(-w / u)``, ``w = rU``, ``u = U / 2``; table of ILAC-G8:09/2019 for guarded acceptance.
    """
    edge = acceptance_limit(_ZERO, Rational(1), guard)
    return probability_met(float(edge), 1.0, 0.0, bound=Bound.MINIMUM)


def blend(parts: Sequence[Part], *, shared: Shared = Shared.NONE) -> Blend:
    """Return the volume-weighted concentration of a blend, with its uncertainty.

    Parameters
    ----------
    parts : sequence of Part, length n >= 1
        Volumes in one unit, concentrations in one unit.
    shared : Shared
        Whether the concentrations share one error, as with one laboratory's bias; volumes are independent.

    Returns
    -------
    Blend
        In those units.

    Raises
    ------
    ValueRefused
        If a figure is negative or the parts hold no volume.

    Notes
    -----
    ``c = sum(V c) / sum(V)``; ``dc/dV_i = (c_i - c) / V``, ``dc/dc_i = V_i / V``; law of propagation,
    JCGM 100:2008, 5.1.2, and for a shared error 5.2.2 (equation numbers from memory).

    References
    ----------
    .. [1] JCGM 100:2008, Guide to the expression of uncertainty in measurement.
    """
    for part in parts:
        if min(part.volume, part.concentration, part.volume_spread, part.concentration_spread) < 0:
            raise ValueRefused("part of a blend", str(float(part.volume)), "no figure of it is ever negative")
    total = sum((part.volume for part in parts), _ZERO)
    if not total:
        raise ValueRefused("blend", "", "there is no volume in it")
    mean = sum((part.volume * part.concentration for part in parts), _ZERO) / total
    volumes2 = sum((((p.concentration - mean) / total * p.volume_spread) ** 2 for p in parts), _ZERO)
    terms = [part.volume / total * part.concentration_spread for part in parts]
    common = sum(terms, _ZERO) ** 2
    apart = sum((term**2 for term in terms), _ZERO)
    spread2 = volumes2 + (common if shared == Shared.ALL else apart)
    return Blend(volume=total, concentration=mean, spread=sqrt(spread2))


def _wide(expanded: str) -> str:
    return f"the uncertainty {expanded} is larger than the value; check both with the laboratory"
