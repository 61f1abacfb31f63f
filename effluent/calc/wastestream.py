"""Alternative limits for combined streams: the combined wastestream formula of 40 CFR 403.6(e)."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction as Rational

from effluent.calc.number import decimal_text
from effluent.errors import ValueRefused

__all__ = [
    "Alternative",
    "Stream",
    "StreamKind",
    "combined_concentration",
    "combined_mass",
    "refuse_below_detection",
]

_ZERO = Rational(0)


class StreamKind(StrEnum):
    """What a stream is to the categorical standard of one pollutant."""

    REGULATED = "regulated"
    UNREGULATED = "unregulated"
    DILUTION = "dilution"


@dataclass(frozen=True, kw_only=True)
class Stream:
    """One stream before treatment: its average daily flow (at least a 30-day average), all in one unit.

    ``daily`` and ``average`` are the categorical limits of a regulated stream: concentrations, or masses
    per day (mass limit times production); ``average`` is `None` where the standard has none.
    """

    name: str
    kind: StreamKind
    flow: Rational
    daily: Rational | None = None
    average: Rational | None = None


@dataclass(frozen=True, kw_only=True)
class Alternative:
    """The alternative limits of the combined stream, with the figures they come from.

    ``dilution`` names the streams that count as dilution. ``average`` is `None` where a regulated stream
    has no average limit.
    """

    daily: Rational
    average: Rational | None
    regulated_flow: Rational
    dilution_flow: Rational
    total_flow: Rational
    dilution: tuple[str, ...]


def combined_concentration(streams: Sequence[Stream]) -> Alternative:
    """Return the alternative concentration limits of a combined stream.

    Parameters
    ----------
    streams : sequence of Stream
        Every stream through the combined treatment; limits of the regulated ones as concentrations in one
        unit.

    Returns
    -------
    Alternative
        In the unit of the limits; flows in theirs.

    Raises
    ------
    ValueRefused
        If no stream is regulated, a regulated one has no daily limit or no flow, or a figure is negative.

    Notes
    -----
    ``C_T = [sum(C_i F_i) / sum(F_i)] x [(F_T - F_D) / F_T]``, 40 CFR 403.6(e)(1)(i) [1]_; daily maximum from
    daily maxima, average from monthly averages. The text read defines the variables; the image of the
    formula was missing there, and its form is the one generally given.

    References
    ----------
    .. [1] 40 CFR 403.6(e), 2015 annual edition; read on 2026-12-01.
    """
    regulated = _regulated(streams)
    flow = _flow(regulated)
    total = _flow(streams)
    share = (total - _dilution(streams)) / total

    def limit(limits: Sequence[Rational]) -> Rational:
        weighted = (each * stream.flow for each, stream in zip(limits, regulated, strict=True))
        return sum(weighted, _ZERO) / flow * share

    daily, average = _limits(regulated)
    return _alternative(streams, limit(daily), None if average is None else limit(average))


def combined_mass(streams: Sequence[Stream]) -> Alternative:
    """Return the alternative mass limits of a combined stream.

    Parameters
    ----------
    streams : sequence of Stream
        Every stream through the combined treatment; limits of the regulated ones as masses per day in one
        unit.

    Returns
    -------
    Alternative
        In the unit of the limits; flows in theirs.

    Raises
    ------
    ValueRefused
        As `combined_concentration`.

    Notes
    -----
    ``M_T = sum(M_i) x [(F_T - F_D) / sum(F_i)]``, 40 CFR 403.6(e)(1)(ii) [1]_; the form from memory.

    References
    ----------
    .. [1] 40 CFR 403.6(e), 2015 annual edition; read on 2026-12-01.
    """
    regulated = _regulated(streams)
    share = (_flow(streams) - _dilution(streams)) / _flow(regulated)
    daily, average = _limits(regulated)
    summed = None if average is None else sum(average, _ZERO) * share
    return _alternative(streams, sum(daily, _ZERO) * share, summed)


def refuse_below_detection(alternative: Alternative, detection_limit: Rational) -> None:
    """Refuse alternative limits that an analysis cannot see.

    Parameters
    ----------
    alternative : Alternative
        Concentrations.
    detection_limit : Fraction
        Analytical detection limit, in the same unit.

    Raises
    ------
    ValueRefused
        If the daily or the average limit lies below it.

    Notes
    -----
    40 CFR 403.6(e)(2) [1]_.

    References
    ----------
    .. [1] 40 CFR 403.6(e)(2), 2015 annual edition; read on 2026-12-01.
    """
    for name, limit in (("daily", alternative.daily), ("average", alternative.average)):
        if limit is not None and limit < detection_limit:
            raise ValueRefused(
                f"alternative {name} limit",
                decimal_text(limit),
                f"it lies below the analytical detection limit {decimal_text(detection_limit)}; sample the "
                "regulated stream before it is combined",
            )


def _regulated(streams: Sequence[Stream]) -> list[Stream]:
    for stream in streams:
        figures = [stream.flow, stream.daily or _ZERO, stream.average or _ZERO]
        if min(figures) < 0:
            raise ValueRefused("stream", stream.name, "flows and limits are never negative")
    regulated = [stream for stream in streams if stream.kind == StreamKind.REGULATED]
    if not regulated:
        raise ValueRefused("streams", "", "none is regulated, so there is no limit to combine")
    for stream in regulated:
        if stream.daily is None or not stream.flow:
            raise ValueRefused("stream", stream.name, "a regulated stream needs its daily limit and a flow")
    return regulated


def _limits(regulated: Sequence[Stream]) -> tuple[list[Rational], list[Rational] | None]:
    daily = [stream.daily for stream in regulated if stream.daily is not None]
    average = [stream.average for stream in regulated if stream.average is not None]
    return daily, average if len(average) == len(regulated) else None


def _flow(streams: Sequence[Stream]) -> Rational:
    return sum((stream.flow for stream in streams), _ZERO)


def _diluting(streams: Sequence[Stream]) -> list[Stream]:
    return [stream for stream in streams if stream.kind == StreamKind.DILUTION]


def _dilution(streams: Sequence[Stream]) -> Rational:
    return _flow(_diluting(streams))


def _alternative(streams: Sequence[Stream], daily: Rational, average: Rational | None) -> Alternative:
    return Alternative(
        daily=daily,
        average=average,
        regulated_flow=_flow([stream for stream in streams if stream.kind == StreamKind.REGULATED]),
        dilution_flow=_dilution(streams),
        total_flow=_flow(streams),
        dilution=tuple(stream.name for stream in _diluting(streams)),
    )
