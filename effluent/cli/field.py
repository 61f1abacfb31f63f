"""The fields of a record as options of a command, and back."""

from __future__ import annotations

import dataclasses
from collections.abc import Callable, Collection, Mapping
from datetime import date, datetime
from enum import StrEnum
from types import UnionType
from typing import Any, NamedTuple, TypeVar, cast, get_args, get_origin, get_type_hints

import click

from effluent.cli import value
from effluent.domain import Quantity

__all__ = ["Field", "build", "changes", "fields", "fields_as_options"]

_Body = TypeVar("_Body", bound=Callable[..., Any])
_Record = TypeVar("_Record")
_READERS: dict[type, tuple[Callable[[str], object], str]] = {
    Quantity: (value.quantity, "QUANTITY"),
    datetime: (value.instant, "DATE-TIME"),
    date: (value.day, "DATE"),
    int: (value.count, "NUMBER"),
}


class Field(NamedTuple):
    """One field of a record, as the command line sees it."""

    name: str
    meaning: str
    read: Callable[[str], object]
    metavar: str
    default: object
    multiple: bool

    @property
    def option(self) -> str:
        """The option's name; one that is given once for each of several values is singular."""
        name = self.name.removesuffix("s") if self.multiple else self.name
        return "--" + name.replace("_", "-")

    @property
    def required(self) -> bool:
        """Whether a record cannot be without it."""
        return self.default is dataclasses.MISSING

    @property
    def help(self) -> str:
        """The field's meaning, with its default where there is one to speak of."""
        shown = f" (without it: {self.default})" if self.default and not self.required else ""
        return f"{self.meaning[:1].upper()}{self.meaning[1:]}{shown}."


def fields(record: type, *, skip: Collection[str] = ()) -> tuple[Field, ...]:
    """Return the fields of a record's class, in order, without those to skip.

    Raises
    ------
    TypeError
        If a field's type cannot be typed on a command line.
    """
    hints = get_type_hints(record)
    return tuple(
        _field(declared, hints[declared.name])
        for declared in dataclasses.fields(record)
        if declared.name not in skip
    )


def _field(declared: dataclasses.Field[Any], hint: Any) -> Field:
    multiple = get_origin(hint) is tuple
    kind = _bare(get_args(hint)[0] if multiple else hint)
    read, metavar = _reader(kind, may_be_empty=declared.default == "")
    meaning = declared.metadata.get("meaning", declared.name.replace("_", " "))
    return Field(declared.name, meaning, read, metavar, declared.default, multiple)


def _bare(hint: Any) -> Any:
    """Return the type beside ``None``."""
    if get_origin(hint) is not UnionType:
        return hint
    return next(kind for kind in get_args(hint) if kind is not type(None))


def _reader(kind: type, *, may_be_empty: bool) -> tuple[Callable[[str], object], str]:
    if kind in _READERS:
        return _READERS[kind]
    if isinstance(kind, type) and issubclass(kind, StrEnum):
        return value.word(kind), f"[{'|'.join(kind)}]"
    if kind is str:
        return (value.line_or_nothing if may_be_empty else value.line), "TEXT"
    raise TypeError(f"{kind!r} cannot be typed on a command line")


def fields_as_options(
    record: type, *, skip: Collection[str] = (), amend: bool = False
) -> Callable[[_Body], _Body]:
    """Return a decorator that gives a command one option a field, and ``CODE`` as its argument.

    With `amend` nothing but ``CODE`` is required, and ``--clear FIELD`` takes a value away.
    """
    known = fields(record, skip=skip)

    def decorate(body: _Body) -> _Body:
        if amend:
            body = _clear_option(known)(body)
        for field in reversed(known):
            body = _parameter(field, amend=amend)(body)
        return body

    return decorate


def _parameter(field: Field, *, amend: bool) -> Callable[[_Body], _Body]:
    if field.name == "code":
        return click.argument("code", type=value.line, required=amend or field.required)
    return click.option(
        field.option,
        field.name,
        type=field.read,
        metavar=field.metavar,
        multiple=field.multiple,
        required=field.required and not amend,
        help=field.help,
    )


def _clear_option(known: Collection[Field]) -> Callable[[_Body], _Body]:
    names = [
        field.option.removeprefix("--") for field in known if not field.required and field.name != "code"
    ]
    return click.option(
        "--clear",
        type=click.Choice(names),
        metavar="FIELD",
        multiple=True,
        help=f"Take the value of a field away: {', '.join(names)}.",
    )


def _given(known: Collection[Field], given: Mapping[str, object]) -> dict[str, object]:
    return {
        field.name: given[field.name]
        for field in known
        if given.get(field.name) is not None and given[field.name] != ()
    }


def build(record: type[_Record], given: Mapping[str, object], *, skip: Collection[str] = ()) -> _Record:
    """Return the record that the given values make; what was not given, or is to skip, takes its default."""
    return record(**_given(fields(record, skip=skip), given))


def changes(record: type, given: Mapping[str, object], *, skip: Collection[str] = ()) -> dict[str, object]:
    """Return what an amendment changes: the given values, and the defaults of those to clear.

    Raises
    ------
    click.UsageError
        If nothing is to change, or a field is both given and to clear.
    """
    known = [field for field in fields(record, skip=skip) if field.name != "code"]
    changed = _given(known, given)
    cleared = cast("Collection[str]", given.get("clear") or ())
    for field in known:
        if field.option.removeprefix("--") in cleared:
            if field.name in changed:
                raise click.UsageError(f"{field.option} is both given and to be cleared; write one of them")
            changed[field.name] = field.default
    if not changed:
        raise click.UsageError("nothing to amend; name at least one field with its new value, or --clear one")
    return changed
