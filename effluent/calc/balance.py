"""The volume balance of washes: what was put in, caught, retained, and what is unaccounted for."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from math import sqrt
from typing import TypeVar

from effluent.calc.units import canonical, convert
from effluent.domain import Quantity

__all__ = ["Answer", "Balance", "balance", "summary"]

_ZERO = Fraction(0)
Group = TypeVar("Group", bound=Hashable)


class Answer(StrEnum):
    """Where the share unaccounted for lies against a threshold."""

    WITHIN = "within"
    ABOVE = "above"
    OPEN = "cannot be told"


@dataclass(frozen=True, kw_only=True)
class Balance:
    """Volumes in litres, exact; ``*_spread2`` is an expanded uncertainty (k = 2) squared, in L2."""

    put_in: Fraction
    caught: Fraction
    retained: Fraction
    put_in_spread2: Fraction
    caught_spread2: Fraction
    retained_spread2: Fraction

    @property
    def unaccounted(self) -> Fraction:
        """Put in - caught - retained, in litres."""
        return self.put_in - self.caught - self.retained

    @property
    def uncertainty(self) -> float:
        """Expanded uncertainty (k = 2) of the volume unaccounted for, in litres."""
        return sqrt(self._spread2(Fraction(1)))

    @property
    def is_uncertainty_stated(self) -> bool:
        """Whether any volume came with an uncertainty; without one, that of the balance is unknown."""
        return bool(self._spread2(Fraction(1)))

    @property
    def share(self) -> Fraction | None:
        """Unaccounted for / put in; `None` where nothing was put in."""
        return self.unaccounted / self.put_in if self.put_in else None

    @property
    def share_uncertainty(self) -> float | None:
        """Expanded uncertainty (k = 2) of the share; `None` where nothing was put in."""
        if not self.put_in:
            return None
        return sqrt(self._spread2((self.caught + self.retained) / self.put_in)) / float(self.put_in)

    def flagged(self, threshold_share: Fraction) -> Answer:
        """Say where the share unaccounted for lies against a threshold.

        Exact: the amount above the threshold is ``(1 - threshold) * put in - caught - retained``, and its
        sign is told only where it is larger than its own expanded uncertainty.
        """
        excess = self.unaccounted - threshold_share * self.put_in
        doubt = self._spread2(1 - threshold_share)
        if excess <= 0 and excess**2 >= doubt:
            return Answer.WITHIN
        return Answer.ABOVE if excess > 0 and excess**2 > doubt else Answer.OPEN

    @property
    def caught_exceeds_put_in(self) -> bool:
        """Whether more was caught than put in, beyond the uncertainty: rain, or another source."""
        more = self.caught - self.put_in
        return more > 0 and more**2 > self.caught_spread2 + self.put_in_spread2

    def _spread2(self, weight: Fraction) -> Fraction:
        """Return the squared uncertainty of ``weight * put in - caught - retained``."""
        return weight**2 * self.put_in_spread2 + self.caught_spread2 + self.retained_spread2


def balance(put_in: Sequence[Quantity], caught: Quantity | None, retained: Quantity | None) -> Balance:
    """Return the volume balance of one wash.

    Parameters
    ----------
    put_in : sequence of Quantity
        Volumes of cleaner, water and additive, each with its expanded uncertainty where one was given.
    caught : Quantity or None
        Volume caught; `None` counts as nothing caught.
    retained : Quantity or None
        Volume declared to stay in the engine; `None` counts as nothing.

    Returns
    -------
    Balance
        In litres, exact; uncertainties are carried through as independent.

    Raises
    ------
    UnitUnknown, UnitMismatch
        If a volume has a unit that cannot be read, or that is none of volume.

    Notes
    -----
    Law of propagation for independent quantities, equation (10) of [1]_, applied to expanded uncertainties
    of one coverage factor. A volume without an uncertainty counts as exact, which makes the result look
    better than it is.

    References
    ----------
    .. [1] JCGM 100:2008, Evaluation of measurement data - Guide to the expression of uncertainty in
       measurement, 5.1.2 (equation number from memory).
    """
    parts = [_litres([*put_in]), _litres([caught] if caught else []), _litres([retained] if retained else [])]
    (put, put2), (out, out2), (kept, kept2) = parts
    return Balance(
        put_in=put,
        caught=out,
        retained=kept,
        put_in_spread2=put2,
        caught_spread2=out2,
        retained_spread2=kept2,
    )


def summary(balances: Iterable[tuple[Group, Balance]]) -> dict[Group, Balance]:
    """Return the sum of the balances of each group, as of a site, an engine type and a month.

    Parameters
    ----------
    balances : iterable of (group, Balance)
        Any hashable group.

    Returns
    -------
    dict of group to Balance
        Sums in litres, in the order in which the groups first appear; uncertainties as independent.

    Raises
    ------
    TypeError
        If a group is not hashable.

    Notes
    -----
    As `balance`. An error that all washes share, such as a level stick that reads high, does not average
    out and is larger than these sums say.
    """
    sums: dict[Group, Balance] = {}
    for group, one in balances:
        sums[group] = _sum(sums[group], one) if group in sums else one
    return sums


def _litres(volumes: Sequence[Quantity]) -> tuple[Fraction, Fraction]:
    """Return the sum of volumes, and the sum of their squared expanded uncertainties."""
    total = sum((canonical(volume, "volume") for volume in volumes), _ZERO)
    spreads = [convert(volume.spread_magnitude, volume.unit, "L") for volume in volumes]
    return total, sum((spread**2 for spread in spreads), _ZERO)


def _sum(first: Balance, second: Balance) -> Balance:
    names = Balance.__dataclass_fields__
    return Balance(**{name: getattr(first, name) + getattr(second, name) for name in names})
