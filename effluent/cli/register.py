"""The commands of the standing records: add, list, show, amend, and void what nothing refers to."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterator, Sequence
from datetime import datetime
from typing import TYPE_CHECKING

import click

from effluent.cli import option, show
from effluent.cli.field import build, changes, fields, fields_as_options
from effluent.cli.group import TABLE, Group
from effluent.cli.value import line
from effluent.domain import Cleaner, Company, Engine, Person, Point, Site

if TYPE_CHECKING:
    from effluent.services.register import Shown
    from effluent.store.reading import Version

__all__ = [
    "add_command",
    "amend_command",
    "cleaner",
    "company",
    "engine",
    "list_command",
    "person",
    "point",
    "register_group",
    "show_command",
    "site",
    "void_command",
]


def register_group(noun: str, record: type, *, commands: Sequence[click.Command] | None = None) -> Group:
    """Return the group of a noun: add, list, show, amend and void, or the commands given.

    Further verbs join with ``@group.command()``.
    """
    if commands is None:
        makers = (add_command, list_command, show_command, amend_command, void_command)
        commands = [make(noun, record) for make in makers]
    return Group(noun, {command.name or "": command for command in commands}, help=TABLE[noun][1])


def _code_meaning(record: type) -> str:
    return next(field.meaning for field in fields(record) if field.name == "code")


def add_command(noun: str, record: type, *, name: str = "add") -> click.Command:
    """Return the command that records a new one."""

    @click.command(name, help=f"Record a new {noun}; CODE is its {_code_meaning(record)}.")
    @fields_as_options(record)
    @option.reason
    @option.writes
    def add(*, ledger: str, by: str, reason: str | None, **given: object) -> None:
        from effluent.services import register
        from effluent.wiring import open_ledger

        with open_ledger(ledger) as book:
            code = register.add(book, build(record, given), by=by, reason=reason or "")
        show.say(f"{noun} {show.text(code)} is recorded")

    return add


def list_command(noun: str, record: type, *, columns: Sequence[str] = ()) -> click.Command:
    """Return the command that lists all; without `columns` it shows the fields that are required."""
    shown = columns or [
        "code",
        *(each.name for each in fields(record) if each.required and each.name != "code"),
    ]

    @click.command("list", help=f"List every {noun}.")
    @option.reads
    def listing(*, ledger: str, as_of: str | None, as_json: bool) -> None:
        from effluent.services import register
        from effluent.wiring import open_ledger

        with open_ledger(ledger) as book:
            records = register.listing(book, noun, as_of=as_of)
        if as_json:
            show.document({"noun": noun, "as_of": as_of, "records": records})
        else:
            show.screen(_listed(noun, shown, records))

    return listing


def _listed(noun: str, columns: Sequence[str], records: Sequence[object]) -> str:
    if not records:
        return f"no {noun} is recorded"
    rows = [[getattr(record, column) for column in columns] for record in records]
    return show.table([show.label(column) for column in columns], rows)


def show_command(noun: str, record: type) -> click.Command:
    """Return the command that shows one, with the history of its versions."""

    @click.command("show", help=f"Show one {noun} and its history; CODE is its {_code_meaning(record)}.")
    @click.argument("code", type=line)
    @option.reads
    def showing(*, code: str, ledger: str, as_of: str | None, as_json: bool) -> None:
        from effluent.services import register
        from effluent.wiring import open_ledger

        with open_ledger(ledger) as book:
            shown = register.show(book, noun, code, as_of=as_of)
        if as_json:
            show.document(_as_document(noun, shown, as_of=as_of))
        else:
            show.screen(*_as_text(noun, shown))

    return showing


def _as_text(noun: str, shown: Shown) -> list[str]:
    heading = f"{noun} {show.text(shown.value.code)}{' (void)' if shown.voided else ''}"
    pairs = [
        (show.label(field.name), getattr(shown.value, field.name))
        for field in dataclasses.fields(shown.value)
        if field.name != "code"
    ]
    return [f"{heading}\n{show.card(pairs)}", _history(shown.versions)]


def _history(versions: Sequence[Version]) -> str:
    earlier = [None, *versions]
    rows = [
        [
            version.number,
            version.entry.sequence,
            datetime.fromisoformat(version.entry.recorded_at).replace(microsecond=0),
            version.entry.recorded_by,
            version.entry.reason,
            "; ".join(_difference(before, version)),
        ]
        for before, version in zip(earlier, versions, strict=False)
    ]
    return show.table(["version", "entry", "recorded at", "by", "reason", "what"], rows)


def _difference(before: Version | None, after: Version) -> Iterator[str]:
    """Yield one phrase for each thing that a version changed."""
    if before is None:
        yield "first recorded"
        return
    if after.voided:
        yield "voided"
    for field in dataclasses.fields(after.value):
        old, new = (show.text(getattr(version.value, field.name)) for version in (before, after))
        if old != new:
            yield f"{show.label(field.name)}: {old or 'nothing'} -> {new or 'nothing'}"


def _as_document(noun: str, shown: Shown, *, as_of: str | None) -> dict[str, object]:
    return {
        "noun": noun,
        "as_of": as_of,
        "voided": shown.voided,
        "record": shown.value,
        "versions": [_version(version) for version in shown.versions],
    }


def _version(version: Version) -> dict[str, object]:
    return {
        "version": version.number,
        "voided": version.voided,
        "entry": version.entry.sequence,
        "recorded_at": version.entry.recorded_at,
        "by": version.entry.recorded_by,
        "reason": version.entry.reason,
        "record": version.value,
    }


def amend_command(noun: str, record: type) -> click.Command:
    """Return the command that corrects one; the earlier version stays readable."""

    @click.command(
        "amend",
        help=f"Correct a {noun}; the earlier version stays readable. CODE is its {_code_meaning(record)}.",
    )
    @fields_as_options(record, amend=True)
    @option.reason_required
    @option.writes
    def amend(*, code: str, ledger: str, by: str, reason: str, **given: object) -> None:
        changed = changes(record, given)
        from effluent.services import register
        from effluent.wiring import open_ledger

        with open_ledger(ledger) as book:
            register.amend(book, noun, code, changed, by=by, reason=reason)
        show.say(f"{noun} {show.text(code)} is amended: {', '.join(map(show.label, changed))}")

    return amend


def void_command(noun: str, record: type) -> click.Command:
    """Return the command that voids one; it stays readable."""

    @click.command(
        "void",
        help=f"Void a {noun} that nothing refers to; it stays readable. CODE is its {_code_meaning(record)}.",
    )
    @click.argument("code", type=line)
    @option.reason_required
    @option.writes
    def void(*, code: str, ledger: str, by: str, reason: str) -> None:
        from effluent.services import register
        from effluent.wiring import open_ledger

        with open_ledger(ledger) as book:
            register.void(book, noun, code, by=by, reason=reason)
        show.say(f"{noun} {show.text(code)} is void")

    return void


site = register_group("site", Site)
point = register_group("point", Point)
engine = register_group("engine", Engine)
cleaner = register_group("cleaner", Cleaner)
person = register_group("person", Person)
company = register_group("company", Company)
