"""The daily value of the samples of one monitoring day."""

from __future__ import annotations

from collections.abc import Sequence
from enum import StrEnum
from fractions import Fraction as Rational

from effluent.calc.figure import Figure, figure_of, greatest_figure, greatest_high, mean_figure
from effluent.calc.observation import Observation, Substitution
from effluent.calc.units import KINDS
from effluent.errors import ValueRefused

__all__ = ["Several", "daily_value", "extremes", "refuse_mean"]

_ZERO = Rational(0)
_NO_MEAN = {
    KINDS["pH"]: "pH is the logarithm of an acidity, and one low hour does harm that a high one does not "
    "undo; report minimum and maximum, they are never averaged",
    KINDS["temperature"]: "a mean hides the peak that the limit is about; report minimum and maximum",
}


class Several(StrEnum):
    """What several samples of one day are worth as one daily value; the place says which."""

    HIGHEST = "highest"
    MEAN = "mean of grabs"
    FLOW = "flow-weighted mean of aliquots"


def refuse_mean(unit: str) -> None:
    """Refuse to average what must not be averaged.

    Parameters
    ----------
    unit : str
        Canonical unit of the readings.

    Raises
    ------
    ValueRefused
        If it is that of pH or temperature; the text says why.

    Notes
    -----
    That pH is reported as minimum and maximum is the practice of monitoring reports (from memory). The
    mean of a logarithm is the logarithm of no mean.
    """
    if unit in _NO_MEAN:
        raise ValueRefused("average of readings in", unit, _NO_MEAN[unit])


def extremes(observations: Sequence[Observation]) -> tuple[Rational, Rational | None]:
    """Return the least and the greatest reading of a period, for pH and temperature.

    Parameters
    ----------
    observations : sequence of Observation, length n >= 1
        In one unit.

    Returns
    -------
    (Fraction, Fraction or None)
        Least and greatest in that unit; bounds of readings outside the measuring range as in `Observation`.

    Raises
    ------
    ValueRefused
        If there is none.

    Notes
    -----
    A comparison only; no source needed.
    """
    _refuse_nothing(observations)
    return min(one.low for one in observations), greatest_high([one.high for one in observations])


def daily_value(
    observations: Sequence[Observation],
    several: Several,
    *,
    rule: Substitution,
    unit: str,
    volumes: Sequence[Rational] = (),
) -> Figure:
    """Return the daily value of the samples of one monitoring day.

    Parameters
    ----------
    observations : sequence of Observation, length n >= 1
        Of one analyte and day, in `unit`.
    several : Several
        Highest, mean, or mean weighted with `volumes`.
    rule : Substitution
        For results that are not quantified.
    unit : str
        Canonical unit.
    volumes : sequence of Fraction, length n
        Volume or flow that each aliquot stands for, in one unit, not negative; for `Several.FLOW` only.

    Returns
    -------
    Figure
        In `unit`.

    Raises
    ------
    ValueRefused
        If there is no observation, a volume is missing or negative or all are zero, pH or temperature is to
        be averaged, or the median rule meets weights.

    Notes
    -----
    Highest of the day: standard provisions of permits [1]_. Weighted: ``sum(c q) / sum(q)``, 40 CFR
    1065.602(l) [2]_. Separate grabs of a day may be averaged arithmetically: 40 CFR 136.3 Table II
    footnote 2 [3]_. The median rule replaces a mean only where a result is not quantified.

    References
    ----------
    .. [1] Regional board standard provisions, San Joaquin County; read on 2026-12-01.
    .. [2] 40 CFR 1065.602(l); read on 2026-12-01.
    .. [3] 40 CFR 136.3, 2015 annual edition; read on 2026-12-01.
    """
    _refuse_nothing(observations)
    if several == Several.HIGHEST:
        return greatest_figure([figure_of(one, rule) for one in observations])
    refuse_mean(unit)
    weights = _weights(len(observations), volumes) if several == Several.FLOW else None
    return mean_figure([figure_of(one, rule) for one in observations], rule, weights)


def _refuse_nothing(given: Sequence[Observation]) -> None:
    if not given:
        raise ValueRefused("average", "", "there is no result in it; no number is invented")


def _weights(count: int, volumes: Sequence[Rational]) -> list[Rational]:
    if len(volumes) != count:
        raise ValueRefused(
            "volumes", str(len(volumes)), f"a flow-weighted mean needs one for each of {count}"
        )
    negative = [volume for volume in volumes if volume < 0]
    if negative or not sum(volumes):
        raise ValueRefused("volume", str(float(min(volumes))), "weights are volumes above zero")
    total = sum(volumes, _ZERO)
    return [volume / total for volume in volumes]
