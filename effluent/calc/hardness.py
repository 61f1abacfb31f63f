"""Limits that depend on the hardness of the water: cadmium."""

from __future__ import annotations

from dataclasses import dataclass
from decimal import ROUND_HALF_EVEN, Context, Decimal
from fractions import Fraction as Rational

from effluent.errors import ValueRefused
from effluent.reference.limit import ReferenceLimit, row

__all__ = ["CEILING_MG_L", "Criterion", "cadmium_acute", "cadmium_chronic", "cadmium_class", "cadmium_eqs"]

# Colorado caps at 400; federal rules of other years at 25 to 400 (from memory)
CEILING_MG_L = Rational(400)
_WORK = Context(prec=40)
_TWO_FIGURES = Context(prec=2, rounding=ROUND_HALF_EVEN)
_ACUTE = (Decimal("0.9789"), Decimal("3.866"), Decimal("1.136672"))
_CHRONIC = (Decimal("0.7977"), Decimal("3.909"), Decimal("1.101672"))
_SLOPE = Decimal("0.041838")
_LARGEST = 10_000
_CLASS_FROM_MG_L = (40, 50, 100, 200)


@dataclass(frozen=True, kw_only=True)
class Criterion:
    """A criterion computed from a hardness; hardness in mg CaCO3/L, the rest in ug/L, dissolved.

    ``hardness_used`` differs from ``hardness`` where a floor or a ceiling came in. ``unrounded`` has 40
    digits; ``value`` is rounded to two significant figures, half to even, and is the limit.
    """

    hardness: Rational
    hardness_used: Rational
    total_recoverable: Decimal
    conversion_factor: Decimal
    unrounded: Decimal
    value: Rational


def cadmium_acute(
    hardness_mg_l: Rational, *, floor: Rational | None = None, ceiling: Rational | None = CEILING_MG_L
) -> Criterion:
    """Return the acute cadmium criterion of EPA 2016 for fresh water (one-hour average).

    Parameters
    ----------
    hardness_mg_l : Fraction
        Hardness as CaCO3 in mg/L, above 0 and up to 10 000.
    floor, ceiling : Fraction or None
        Hardness counts as at least, and at most, so much; `None` where the place sets none. 40 CFR 131.46
        itself names neither.

    Returns
    -------
    Criterion
        Dissolved, in ug/L.

    Raises
    ------
    ValueRefused
        If the hardness is not above zero, or absurd.

    Notes
    -----
    ``exp(0.9789 ln H - 3.866) (1.136672 - 0.041838 ln H)``, rounded to two significant figures, [1]_,
    table 1. The factor is not held below 1, because the rule does not say so; it passes 1 below a hardness
    of about 26.

    References
    ----------
    .. [1] 40 CFR 131.46(b), current on 2 January 2025; read on 2026-12-01.
    """
    return _criterion(hardness_mg_l, _ACUTE, floor, ceiling)


def cadmium_chronic(
    hardness_mg_l: Rational, *, floor: Rational | None = None, ceiling: Rational | None = CEILING_MG_L
) -> Criterion:
    """Return the chronic cadmium criterion of EPA 2016 for fresh water (4-day average).

    Parameters
    ----------
    hardness_mg_l : Fraction
        Hardness as CaCO3 in mg/L, above 0 and up to 10 000.
    floor, ceiling : Fraction or None
        As for `cadmium_acute`.

    Returns
    -------
    Criterion
        Dissolved, in ug/L.

    Raises
    ------
    ValueRefused
        If the hardness is not above zero, or absurd.

    Notes
    -----
    ``exp(0.7977 ln H - 3.909) (1.101672 - 0.041838 ln H)``, EPA 2016 [1]_: coefficients from memory; they
    give the headline figure of 0.72 ug/L at a hardness of 100. Rounded as the acute one.

    References
    ----------
    .. [1] EPA, Aquatic life ambient water quality criteria: cadmium, 2016; not read.
    """
    return _criterion(hardness_mg_l, _CHRONIC, floor, ceiling)


def cadmium_class(hardness_mg_l: Rational) -> int:
    """Return the hardness class of Directive 2008/105/EC.

    Parameters
    ----------
    hardness_mg_l : Fraction
        Hardness as CaCO3 in mg/L, above 0 and up to 10 000.

    Returns
    -------
    int
        1 to 5.

    Raises
    ------
    ValueRefused
        If the hardness is not above zero, or absurd.

    References
    ----------
    .. [1] Directive 2008/105/EC, Annex I, Part A, No 6 and its note on classes; read on 2026-12-01.
    """
    _refuse_absurd(hardness_mg_l)
    return 1 + sum(hardness_mg_l >= start for start in _CLASS_FROM_MG_L)


def cadmium_eqs(hardness_mg_l: Rational) -> tuple[ReferenceLimit, ReferenceLimit]:
    """Return the quality standards for cadmium in inland surface water by hardness.

    Parameters
    ----------
    hardness_mg_l : Fraction
        Hardness as CaCO3 in mg/L, above 0 and up to 10 000.

    Returns
    -------
    (ReferenceLimit, ReferenceLimit)
        Year average and maximum allowable concentration, in ug/L, dissolved; of the water itself, not of a
        discharge.

    Raises
    ------
    ValueRefused
        If the hardness is not above zero, or absurd.

    References
    ----------
    .. [1] Directive 2008/105/EC, Annex I, Part A, No 6, as in the shipped table.
    """
    key = f"EU2008-105/cadmium/class-{cadmium_class(hardness_mg_l)}"
    return row(f"{key}/year"), row(f"{key}/instantaneous")


def _criterion(
    hardness: Rational,
    coefficients: tuple[Decimal, Decimal, Decimal],
    floor: Rational | None,
    ceiling: Rational | None,
) -> Criterion:
    _refuse_absurd(hardness)
    used = hardness if floor is None else max(hardness, floor)
    used = used if ceiling is None else min(used, ceiling)
    slope, offset, base = coefficients
    logarithm = _WORK.ln(_WORK.divide(Decimal(used.numerator), Decimal(used.denominator)))
    total = _WORK.exp(_WORK.subtract(_WORK.multiply(slope, logarithm), offset))
    factor = _WORK.subtract(base, _WORK.multiply(_SLOPE, logarithm))
    unrounded = _WORK.multiply(total, factor)
    return Criterion(
        hardness=hardness,
        hardness_used=used,
        total_recoverable=total,
        conversion_factor=factor,
        unrounded=unrounded,
        value=Rational(_TWO_FIGURES.plus(unrounded)),
    )


def _refuse_absurd(hardness: Rational) -> None:
    if not 0 < hardness <= _LARGEST:
        raise ValueRefused(
            "hardness",
            str(float(hardness)),
            f"give mg CaCO3/L above 0 and up to {_LARGEST}; without a hardness there is no such limit",
        )
