"""Lines and notes that the working of every verdict shares."""

from __future__ import annotations

import re
from collections.abc import Iterable
from fractions import Fraction as Rational

from effluent.calc.reading import Reading
from effluent.calc.units import KINDS, conversion, decimal_text
from effluent.domain import Bound, BrokenBy, Limit, Quantity, Rounding
from effluent.reference.analyte import called

__all__ = [
    "cautions",
    "conversion_line",
    "forbidden",
    "holds",
    "limit_lines",
    "reading_line",
    "short",
]

_FORBIDDEN = {
    (Bound.MAXIMUM, BrokenBy.BEYOND): ("above", ">"),
    (Bound.MAXIMUM, BrokenBy.REACHING): ("at or above", ">="),
    (Bound.MINIMUM, BrokenBy.BEYOND): ("below", "<"),
    (Bound.MINIMUM, BrokenBy.REACHING): ("at or below", "<="),
}
_ESTIMATED = re.compile(r"(?<![A-Z])U?J(?![A-Z])")


def forbidden(limit: Limit) -> tuple[str, str]:
    """Return which side of a limit is forbidden, in words and as a sign, as in ``("above", ">")``."""
    return _FORBIDDEN[limit.bound, limit.broken_by]


def holds(value: Rational, sign: str, other: Rational) -> bool:
    """Say whether ``value sign other`` is true; the sign is one of those of `forbidden`."""
    if value == other:
        return sign.endswith("=")
    return value > other if sign.startswith(">") else value < other


def short(value: Rational) -> str:
    """Return an exact decimal; one that does not end is rounded to ten digits and marked ``~``."""
    text = decimal_text(value)
    return text if Rational(text) == value else f"~{text}"


def reading_line(reading: Reading) -> str:
    """Return what a reading says, and how the laboratory wrote it where that differs."""
    reported = f", reported as {reading.text!r}" if reading.text not in ("", str(reading)) else ""
    flag = f", flag {reading.flag}" if reading.flag else ""
    return (
        f"reading: result {reading.row}, sample {reading.sample}, {reading.day}: {called(reading.analyte)}, "
        f"{reading.fraction}: {reading}{reported}{flag}"
    )


def conversion_line(reading: Reading, limit: Limit) -> str:
    """Return how a reading is brought to the unit of a limit of the same kind.

    Parameters
    ----------
    reading : Reading
        In the unit as the laboratory wrote it.
    limit : Limit
        Of a kind that the reading's unit, with its density if it has one, can be brought to.

    Returns
    -------
    str
        One line.

    Raises
    ------
    UnitUnknown, UnitMismatch
        If a unit cannot be read, or the kinds differ.

    Notes
    -----
    Factors as in `effluent.calc.units.conversion`.
    """
    unit, wanted = reading.unit or KINDS["pH"], limit.value.unit or KINDS["pH"]
    if unit == wanted:
        return f"conversion: none needed, both in {unit}"
    density = Quantity.parse(reading.density) if reading.density else None
    shown = conversion(Quantity(reading.number, unit).magnitude, unit, wanted, density=density).working
    return "conversion: " + shown.replace("×", "x").replace("≈", "~")


def limit_lines(limit: Limit, compared: str = "reading") -> tuple[str, str]:
    """Return what a limit says and where it stands; `compared` is the noun for what is held against it."""
    word, _ = forbidden(limit)
    article = "an" if compared[0] in "aeiou" else "a"
    until = f" to {limit.effective_to}" if limit.effective_to else ""
    where = f", {limit.written_at}" if limit.written_at else ""
    checked = f"verified by {limit.verified_by}" if limit.verified_by else "not verified by a second person"
    return (
        f"limit {limit.code}: {limit.bound} {limit.value}, {limit.statistic}, {called(limit.analyte)}, "
        f"{limit.fraction}; broken by {article} {compared} {word} it; {compared}s compared {_how(limit)}",
        f"source: {limit.authority}: {limit.document}{where}; in force from {limit.effective_from}{until}; "
        f"entered by {limit.entered_by}, {checked}",
    )


def cautions(limit: Limit, readings: Iterable[Reading]) -> tuple[str, ...]:
    """Return what a reader must know of a limit and of the readings held against it, besides the outcome."""
    used = tuple(readings)
    said = {
        "limit not verified by a second person": limit.verified_by is None,
        "analysed outside its holding time": any(reading.late for reading in used),
        "estimated value (J)": any(_ESTIMATED.search(reading.flag.upper()) for reading in used),
    }
    return tuple(note for note, applies in said.items() if applies)


def _how(limit: Limit) -> str:
    return "as reported" if limit.rounding == Rounding.AS_REPORTED else "rounded to the limit's last figure"
