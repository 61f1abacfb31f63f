"""Discharge limits as a place writes them, and verdicts on them."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from enum import StrEnum

from effluent.domain.field import about
from effluent.domain.quantity import Quantity
from effluent.domain.sample import Fraction

__all__ = ["Bound", "BrokenBy", "Limit", "NonDetectRule", "Outcome", "Rounding", "Statistic", "Verdict"]


class Statistic(StrEnum):
    """What of the readings is compared."""

    INSTANTANEOUS = "instantaneous"
    DAILY = "daily"
    FOUR_DAY = "average over 4 consecutive days"
    MONTH = "calendar month average"
    YEAR = "year average"
    MASS_DAY = "mass per day"
    MASS_MONTH = "mass per month"


class Bound(StrEnum):
    """Which side is forbidden."""

    MAXIMUM = "maximum"
    MINIMUM = "minimum"


class BrokenBy(StrEnum):
    """Whether the limit value itself already breaks the limit."""

    BEYOND = "beyond"
    REACHING = "reaching"


class Rounding(StrEnum):
    """What is done to a reading before it is compared."""

    AS_REPORTED = "as reported"
    SIGNIFICANT_FIGURES = "to the limit's significant figures"


class NonDetectRule(StrEnum):
    """How an average treats readings below the reporting limit."""

    BOUNDS = "bounds only"
    ZERO = "zero"
    HALF = "half"
    FULL = "full"


class Outcome(StrEnum):
    """A verdict in one word."""

    WITHIN = "within"
    NEAR = "near"
    OVER = "over"
    UNDETERMINED = "undetermined"


@dataclass(frozen=True, kw_only=True)
class Limit:
    """One limit in force at one discharge point."""

    code: str = about("limit number", default="")
    point: str = about("discharge point it governs", refers="point")
    analyte: str = about("analyte, by name, symbol or CAS number")
    fraction: Fraction = about("fraction it is written for", default=Fraction.TOTAL)
    statistic: Statistic = about("what is compared", default=Statistic.INSTANTANEOUS)
    bound: Bound = about("maximum or minimum", default=Bound.MAXIMUM)
    value: Quantity = about("the limit with its unit", measures="limit")
    broken_by: BrokenBy = about(
        "a reading beyond the limit, or already one reaching it", default=BrokenBy.BEYOND
    )
    rounding: Rounding = about("rounding before the comparison", default=Rounding.AS_REPORTED)
    nondetects: NonDetectRule = about("rule for averages of non-detects", default=NonDetectRule.BOUNDS)
    action_level: Quantity | None = about("the site's own action level", measures="limit", default=None)
    effective_from: date = about("first day in force")
    effective_to: date | None = about("last day in force", default=None)
    authority: str = about("who set it")
    document: str = about("document it stands in")
    written_at: str = about("page, table or clause", default="")
    reference: str = about("row of a shipped reference table it was adopted from", default="")
    entered_by: str = about("who entered it", refers="person")
    verified_by: str | None = about("who verified it, another person", refers="person", default=None)
    verified_on: date | None = about("when it was verified", default=None)


@dataclass(frozen=True, kw_only=True)
class Verdict:
    """What one limit says about the readings of one sample or one day.

    ``margin`` is the share of the limit still free (negative when over), ``None`` when undetermined.
    ``results`` are the numbers of the readings used; ``working`` the arithmetic, line by line.
    """

    limit: Limit
    samples: tuple[str, ...]
    day: date
    outcome: Outcome
    reason: str
    results: tuple[int, ...]
    margin: float | None
    working: tuple[str, ...]
    notes: tuple[str, ...] = ()
