"""A span of amounts, and what a limit says about all of it."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction as Rational

from effluent.calc.rule import Cut
from effluent.domain import Bound, Outcome

__all__ = ["Span", "proven"]


@dataclass(frozen=True, kw_only=True)
class Span:
    """Every amount that readings leave possible, in one unit.

    ``high`` is `None` where nothing bounds it. An open end is itself not possible: the truth behind ``<b``
    lies below b, that behind ``>b`` above.
    """

    low: Rational
    high: Rational | None
    low_open: bool = False
    high_open: bool = False

    @property
    def is_exact(self) -> bool:
        """Whether one amount alone is possible."""
        return self.low == self.high

    def is_above(self, edge: Rational, *, touching: bool) -> bool:
        """Say whether every amount lies above an edge, or, if `touching`, on it."""
        return self.low > edge or (self.low == edge and (touching or self.low_open))

    def is_below(self, edge: Rational, *, touching: bool) -> bool:
        """Say whether every amount lies below an edge, or, if `touching`, on it."""
        if self.high is None:
            return False
        return self.high < edge or (self.high == edge and (touching or self.high_open))


def proven(span: Span, cut: Cut, bound: Bound) -> Outcome:
    """Return over if every amount of a span breaks a limit, within if none does, else undetermined.

    Parameters
    ----------
    span : Span
        In the unit of `cut`.
    cut : Cut
        Of a limit, or of an action level: over then says that it is reached.
    bound : Bound
        Maximum or minimum.

    Returns
    -------
    Outcome
        Within, over or undetermined.

    Raises
    ------
    ValueRefused
        Never.

    Notes
    -----
    Plain logic of inequalities; no source needed.
    """
    above, below = span.is_above, span.is_below
    broken, kept = (above, below) if bound == Bound.MAXIMUM else (below, above)
    if broken(cut.value, touching=cut.inclusive):
        return Outcome.OVER
    return Outcome.WITHIN if kept(cut.value, touching=not cut.inclusive) else Outcome.UNDETERMINED
