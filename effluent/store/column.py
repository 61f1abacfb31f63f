"""Column types that read the same on every database, and rows as plain values.

Only whole numbers, doubles and texts are stored: SQLite's ``Numeric`` loses digits and its ``DateTime``
loses the zone, while a text is the same text everywhere and can be digested as it stands.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import Field, fields
from datetime import UTC, date, datetime
from enum import StrEnum
from functools import cache
from types import NoneType, UnionType
from typing import Any, Union, get_args, get_origin, get_type_hints

from sqlalchemy import BigInteger, Double, Integer, Text
from sqlalchemy.types import REAL, TypeEngine

from effluent.domain.quantity import Quantity

__all__ = ["REAL_NUMBER", "TEXT", "WHOLE", "Plain", "key_of", "plain", "plain_fields", "revive", "utc_text"]


TEXT = Text().with_variant(Text(collation="C"), "postgresql")
WHOLE = BigInteger().with_variant(Integer, "sqlite")
REAL_NUMBER: TypeEngine[float] = Double().with_variant(REAL, "sqlite")

Plain = int | float | str | None


def utc_text(instant: datetime) -> str:
    """Return an aware instant as fixed-width UTC text, which sorts as time does."""
    return instant.astimezone(UTC).isoformat(timespec="microseconds").replace("+00:00", "Z")


def key_of(noun: str, code: str) -> str:
    """Return the ledger-wide key of a record."""
    return f"{noun}/{code}"


def plain(value: object) -> Plain:
    """Return a domain value as what a column holds."""
    if isinstance(value, bool):
        return int(value)
    if isinstance(value, StrEnum):
        return value.value
    if isinstance(value, datetime):
        return utc_text(value)
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, Quantity):
        return str(value)
    if value is None or isinstance(value, int | float | str):
        return value
    raise TypeError(f"no column holds a {type(value).__name__}")


def plain_fields(cls: type) -> tuple[Field[Any], ...]:
    """Return the fields of a domain class that live in its own row (not codes, not children)."""
    return _plain_fields(cls)


@cache
def _plain_fields(cls: type) -> tuple[Field[Any], ...]:
    hints = get_type_hints(cls)
    return tuple(f for f in fields(cls) if f.name != "code" and get_origin(hints[f.name]) is not tuple)


def revive(cls: type, row: Mapping[str, Any]) -> dict[str, Any]:
    """Return the keyword arguments that make a `cls` again out of a row."""
    return {name: convert(row[name]) for name, convert in _converters(cls)}


@cache
def _converters(cls: type) -> tuple[tuple[str, Callable[[Any], Any]], ...]:
    hints = get_type_hints(cls)
    return tuple((f.name, _converter(f, hints[f.name])) for f in plain_fields(cls))


def _converter(field: Field[Any], hint: Any) -> Callable[[Any], Any]:
    kind = _without_none(hint)
    if field.metadata.get("refers"):
        convert: Callable[[Any], Any] = _code
    elif kind is datetime:
        convert = _instant
    elif kind is date:
        convert = date.fromisoformat
    elif kind is Quantity:
        convert = Quantity.parse
    elif isinstance(kind, type) and issubclass(kind, StrEnum):
        convert = kind
    else:
        return _same
    return lambda stored: None if stored is None else convert(stored)


def _without_none(hint: Any) -> Any:
    if get_origin(hint) in (Union, UnionType):
        return next(part for part in get_args(hint) if part is not NoneType)
    return hint


def _code(key: str) -> str:
    return key.partition("/")[2]


def _instant(text: str) -> datetime:
    return datetime.fromisoformat(text.replace("Z", "+00:00"))


def _same(stored: Any) -> Any:
    return stored
