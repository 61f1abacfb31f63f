"""Answers as plain text and as JSON; each says that local regulations govern."""

from __future__ import annotations

import dataclasses
import json
from collections.abc import Iterable, Mapping, Sequence
from datetime import date, datetime
from decimal import Decimal
from enum import Enum
from fractions import Fraction
from typing import Any

import click

from effluent.cli.text import pad, printable, width
from effluent.domain import Quantity
from effluent.settings import CAUTION

__all__ = ["card", "decimal", "document", "label", "plain", "say", "screen", "table", "text", "with_decimals"]


def say(*lines: str) -> None:
    """Print lines of plain output."""
    click.echo("\n".join(lines))


def screen(*parts: str) -> None:
    """Print the parts of an answer with empty lines between them, and the caution at the end."""
    say("\n\n".join([*(part for part in parts if part), CAUTION]))


def document(answer: Mapping[str, object]) -> None:
    """Print an answer as JSON with the caution as its last key; the order of keys is the order given.

    Only ASCII is printed, so that any terminal and any pipe carries it unharmed.
    """
    say(json.dumps(plain({**answer, "caution": CAUTION}), indent=2, allow_nan=False))


def decimal(number: Fraction) -> str:
    """Return the number exactly: as a decimal where one ends, else as a fraction.

    Examples
    --------
    >>> decimal(Fraction(11, 100)), decimal(Fraction(-5, 9))
    ('0.11', '-5/9')
    """
    twos, rest = _factored(number.denominator, 2)
    fives, rest = _factored(rest, 5)
    if rest != 1:
        return f"{number.numerator}/{number.denominator}"
    places = max(twos, fives)
    digits = str(abs(number.numerator) * 10**places // number.denominator).zfill(places + 1)
    sign = "-" if number < 0 else ""
    whole, part = digits[: len(digits) - places], digits[len(digits) - places :]
    return f"{sign}{whole}.{part}" if places else f"{sign}{whole}"


def with_decimals(number: Fraction) -> str:
    """Return the number exactly, and beside a fraction its first twelve digits."""
    exactly = decimal(number)
    if "/" not in exactly:
        return exactly
    return f"{exactly} (about {Decimal(number.numerator) / Decimal(number.denominator):.12g})"


def _factored(number: int, prime: int) -> tuple[int, int]:
    times = 0
    while number % prime == 0:
        number //= prime
        times += 1
    return times, number


def text(value: object) -> str:
    """Return one value as plain text on one line; nothing for ``None``."""
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, (tuple, list)):
        return ", ".join(text(each) for each in value)
    return printable(_written(value))


def _written(value: object) -> str:
    if isinstance(value, Fraction):
        return decimal(value)
    if isinstance(value, Enum):
        return str(value.value)
    if isinstance(value, datetime):
        return _moment(value)
    return str(value)


def _moment(value: datetime) -> str:
    if value.tzinfo is None:
        return value.isoformat(sep=" ", timespec="seconds" if value.second else "minutes")
    from effluent.services.moment import shown

    return shown(value)


def plain(value: Any) -> Any:
    """Return the value in what JSON knows; exact numbers and quantities become their text.

    Raises
    ------
    TypeError
        If it is of a kind that has no agreed form.
    """
    if value is None or isinstance(value, (bool, int, float)):
        return value
    if isinstance(value, Mapping):
        return {str(key): plain(each) for key, each in value.items()}
    if isinstance(value, (tuple, list)):
        return [plain(each) for each in value]
    return _named(value)


def _named(value: Any) -> Any:
    if isinstance(value, (Quantity, str)):
        return str(value)
    if isinstance(value, Fraction):
        return decimal(value)
    if isinstance(value, date):
        return value.isoformat()
    if dataclasses.is_dataclass(value):
        return {field.name: plain(getattr(value, field.name)) for field in dataclasses.fields(value)}
    raise TypeError(f"{value!r} has no agreed form in JSON")


def label(name: str) -> str:
    """Return a field's name as words."""
    return name.replace("_", " ")


def table(headings: Sequence[str], rows: Iterable[Sequence[object]]) -> str:
    """Return rows under headings, in columns that line up; the last column is not padded."""
    lines = [list(headings), *([text(cell) for cell in row] for row in rows)]
    columns = [max(map(width, column)) for column in zip(*lines, strict=True)]
    rule = ["-" * column for column in columns]
    return "\n".join(_line(cells, columns) for cells in [lines[0], rule, *lines[1:]])


def _line(cells: Sequence[str], columns: Sequence[int]) -> str:
    return "  ".join(pad(cell, column) for cell, column in zip(cells, columns, strict=True)).rstrip()


def card(pairs: Iterable[tuple[str, object]]) -> str:
    """Return ``name: value`` lines with the values in one column; what has no value is left out."""
    shown = [(f"{name}:", text(value)) for name, value in pairs if text(value)]
    column = max((width(name) for name, _ in shown), default=0)
    return "\n".join(f"{pad(name, column)} {value}" for name, value in shown)
