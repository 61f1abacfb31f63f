"""Text that is safe on a terminal and lines up in columns."""

from __future__ import annotations

import re
import unicodedata

__all__ = ["clip", "has_hidden", "pad", "printable", "width"]

# Control characters, line separators, marks that turn the reading direction, lone surrogates.
_HIDDEN = re.compile("[\x00-\x1f\x7f-\x9f\u061c\u200e\u200f\u2028-\u202e\u2066-\u2069\ufeff\ud800-\udfff]")
_HEAD, _TAIL = 400, 100


def has_hidden(text: str) -> bool:
    """Return whether the text holds a character that a reader cannot see."""
    return _HIDDEN.search(text) is not None


def _escaped(match: re.Match[str]) -> str:
    return match[0].encode("unicode_escape").decode("ascii")


def printable(text: str) -> str:
    """Return one line with every hidden character spelled out, so that no value steers a terminal."""
    return _HIDDEN.sub(_escaped, text)


def clip(line: str) -> str:
    """Return the line, or its head and tail when nobody would read all of it."""
    if len(line) <= 2 * (_HEAD + _TAIL):
        return line
    return f"{line[:_HEAD]} … ({len(line)} characters) … {line[-_TAIL:]}"


def width(text: str) -> int:
    """Return how many columns the text takes: none for a combining mark, two for a wide character."""
    return sum(_columns(character) for character in text)


def _columns(character: str) -> int:
    if unicodedata.category(character) in {"Mn", "Me", "Cf"}:
        return 0
    return 2 if unicodedata.east_asian_width(character) in {"W", "F"} else 1


def pad(text: str, columns: int) -> str:
    """Return the text followed by spaces up to that many columns."""
    return text + " " * (columns - width(text))
