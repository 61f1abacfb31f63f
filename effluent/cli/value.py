"""What one typed value may look like; each reader refuses the rest in one paragraph."""

from __future__ import annotations

import re
from collections.abc import Callable
from datetime import date, datetime
from enum import StrEnum
from pathlib import Path
from typing import NoReturn, TypeVar

import click

from effluent.cli.text import clip, has_hidden, printable
from effluent.domain import Quantity
from effluent.errors import ValueRefused

__all__ = [
    "count",
    "day",
    "file",
    "in_order",
    "instant",
    "line",
    "line_or_nothing",
    "quantity",
    "short",
    "word",
]

_LONGEST_TEXT, _LONGEST_VALUE = 2000, 100
_DAY = r"[0-9]{4}-[0-9]{2}-[0-9]{2}"
_INSTANT = rf"{_DAY}[T ][0-9]{{2}}:[0-9]{{2}}(?::[0-9]{{2}})?(?:Z|[+-][0-9]{{2}}:[0-9]{{2}})?"
_Day = TypeVar("_Day", date, datetime)
_FIRST_YEAR, _LAST_YEAR = 1900, 2999


def _refuse(problem: str) -> NoReturn:
    raise click.BadParameter(problem)


def _shown(text: str) -> str:
    return f"'{clip(printable(text))}'"


def line_or_nothing(written: str, *, longest: int = _LONGEST_TEXT) -> str:
    """Return one line of text without the spaces around it; it may be empty.

    Raises
    ------
    click.BadParameter
        If it is too long or holds control characters.
    """
    if len(written) > longest:
        _refuse(f"{len(written)} characters are too many; write {longest} or fewer")
    text = written.strip()
    if has_hidden(text):
        _refuse(f"{_shown(text)} holds control or unreadable characters; write one line of plain text")
    return text


def line(written: str) -> str:
    """Return one line of text that is not empty.

    Raises
    ------
    click.BadParameter
        If it is empty, too long or holds control characters.
    """
    return line_or_nothing(written) or _refuse("it is empty; write some text")


def file(written: str) -> Path:
    """Return the path of a file; whether it is there is seen when it is read or written.

    Raises
    ------
    click.BadParameter
        If it is empty, or longer or other than a name that can be recorded.
    """
    return Path(line(written))


def short(written: str) -> str:
    """Return one line of at most a hundred characters; it may be empty.

    Raises
    ------
    click.BadParameter
        If it is too long or holds control characters.
    """
    return line_or_nothing(written, longest=_LONGEST_VALUE)


def quantity(written: str) -> Quantity:
    """Return the number, unit and uncertainty that the text names.

    Raises
    ------
    click.BadParameter
        If it names none.
    """
    try:
        return Quantity.parse(short(written))
    except ValueRefused as error:
        raise click.BadParameter(str(error)) from error


def instant(written: str) -> datetime:
    """Return the date and time; without an offset it stays the local time of the site.

    Raises
    ------
    click.BadParameter
        If it is not such a date and time.
    """
    text = short(written)
    try:
        return _within_years(datetime.fromisoformat(_matching(_INSTANT, text)))
    except ValueError:
        _refuse(
            f"{_shown(text)} is not a date and time; write 2026-03-01T14:30 (local time of the site), "
            "2026-03-01T14:30+02:00 or 2026-03-01T14:30Z"
        )


def day(written: str) -> date:
    """Return the calendar day.

    Raises
    ------
    click.BadParameter
        If it is not one.
    """
    text = short(written)
    try:
        return _within_years(date.fromisoformat(_matching(_DAY, text)))
    except ValueError:
        _refuse(f"{_shown(text)} is not a date; write year, month and day, as in 2026-03-01")


def _matching(pattern: str, text: str) -> str:
    if re.fullmatch(pattern, text) is None:
        raise ValueError(text)
    return text


def _within_years(moment: _Day) -> _Day:
    if not _FIRST_YEAR <= moment.year <= _LAST_YEAR:
        raise ValueError(moment)
    return moment


def in_order(since: date | None, until: date | None) -> None:
    """Refuse a last day before the first.

    Raises
    ------
    click.UsageError
        If it is.
    """
    if since and until and until < since:
        raise click.UsageError(f"--until {until} lies before --since {since}; exchange them")


def count(written: str) -> int:
    """Return a whole number, zero or more.

    Raises
    ------
    click.BadParameter
        If it is not one.
    """
    text = short(written)
    if re.fullmatch(r"[0-9]{1,9}", text) is None:
        _refuse(f"{_shown(text)} is not a whole number; write digits only, as in 3")
    return int(text)


def word(kind: type[StrEnum]) -> Callable[[str], StrEnum]:
    """Return a reader of one of the kind's values, or of a beginning that only one of them has."""

    def one(written: str) -> StrEnum:
        text = short(written)
        wanted = _folded(text)
        found = [member for member in kind if wanted and _folded(member.value).startswith(wanted)]
        exactly = [member for member in found if _folded(member.value) == wanted]
        if len(exactly or found) != 1:
            problem = f"could be {' or '.join(found)}" if found else "is not one of them"
            _refuse(f"{_shown(text)} {problem}; write one of: {', '.join(kind)}")
        return (exactly or found)[0]

    return one


def _folded(text: str) -> str:
    return " ".join(re.split(r"[\s_-]+", text.strip().casefold()))
