"""The commands of discharge limits: enter, adopt, verify, retire, amend, list, show, reference."""

from __future__ import annotations

from collections.abc import Callable
from datetime import date
from typing import TYPE_CHECKING, Any, TypeVar

import click

from effluent.cli import option, show
from effluent.cli.field import build, changes, fields_as_options
from effluent.cli.group import TABLE, Group
from effluent.cli.register import show_command
from effluent.cli.value import day, line, quantity
from effluent.domain import Limit
from effluent.reference.analyte import called

if TYPE_CHECKING:
    from effluent.reference.limit import ReferenceLimit

__all__ = ["limit"]

_Body = TypeVar("_Body", bound=Callable[..., Any])
_KEPT = ("entered_by", "verified_by", "verified_on", "reference")
_UNVERIFIED = "not verified by a second person"

limit = Group("limit", help=TABLE["limit"][1])


@limit.command("enter")
@fields_as_options(Limit, skip=(*_KEPT, "code"))
@option.accept
@option.reason
@option.writes
def enter_command(*, ledger: str, by: str, reason: str | None, accept: str | None, **given: Any) -> None:
    """Record a limit with its source; a second person verifies it."""
    from effluent.services.limit import enter
    from effluent.wiring import open_ledger

    entered = build(Limit, {**given, "entered_by": by})
    with open_ledger(ledger) as book:
        code = enter(book, entered, by=by, reason=reason or "", accept=accept or "")
    _say_entered(code)


def _say_entered(code: str) -> None:
    show.say(
        f"limit {code} is recorded, {_UNVERIFIED}",
        f"another person compares it with its source and says: effluent limit verify {code}",
    )


_CHANGES: tuple[tuple[str, Callable[[str], object], str, str], ...] = (
    ("authority", line, "TEXT", "Who applies it at that point (without it: who governs the point)."),
    ("document", line, "TEXT", "Document it stands in (without it: the citation of the row)."),
    ("written_at", line, "TEXT", "Page, table or clause."),
    ("value", quantity, "QUANTITY", "A value other than the row's."),
    ("action_level", quantity, "QUANTITY", "The site's own action level."),
    ("effective_to", day, "DATE", "Last day in force."),
)


def _change_options(body: _Body) -> _Body:
    for name, reader, metavar, meaning in reversed(_CHANGES):
        flag = f"--{name.replace('_', '-')}"
        body = click.option(flag, name, type=reader, metavar=metavar, help=meaning)(body)
    return body


@limit.command("adopt")
@click.argument("key", type=line)
@click.option("--point", type=line, required=True, metavar="POINT", help="Discharge point it is to govern.")
@click.option("--effective-from", type=day, required=True, metavar="DATE", help="First day in force.")
@click.option(
    "--acknowledge",
    type=line,
    required=True,
    metavar="TEXT",
    help="How you checked that this row applies at this place; the entry keeps it.",
)
@_change_options
@option.accept
@option.writes
def adopt_command(*, ledger: str, by: str, accept: str | None, **given: Any) -> None:
    """Take a published row over as a limit of a discharge point.

    KEY is that of the row in `effluent limit reference`. A published table is not a permit: whether it
    applies at a place is for qualified people to say.
    """
    from effluent.services.limit import Adoption, adopt
    from effluent.wiring import open_ledger

    changed = {name: value for name, *_ in _CHANGES if (value := given.pop(name)) is not None}
    with open_ledger(ledger) as book:
        code = adopt(book, Adoption(**given, changes=changed), by=by, accept=accept or "")
    _say_entered(code)


@limit.command("verify")
@click.argument("code", type=line)
@option.reason
@option.writes
def verify_command(*, code: str, ledger: str, by: str, reason: str | None) -> None:
    """Say that you compared a limit with its source; you are not the one who entered it."""
    from effluent.services.limit import verify
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        verify(book, code, by=by, reason=reason or "")
    show.say(f"limit {show.text(code)} is verified by {show.text(by)}")


@limit.command("retire")
@click.argument("code", type=line)
@click.option("--last-day", type=day, required=True, metavar="DATE", help="Last day in force.")
@option.reason_required
@option.writes
def retire_command(*, code: str, last_day: date, ledger: str, by: str, reason: str) -> None:
    """Say on which day a limit was last in force."""
    from effluent.services.limit import retire
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        retire(book, code, last_day, by=by, reason=reason)
    show.say(f"limit {show.text(code)} is in force to {last_day}")


@limit.command("amend")
@fields_as_options(Limit, skip=_KEPT, amend=True)
@option.accept
@option.reason_required
@option.writes
def amend_command(*, code: str, ledger: str, by: str, reason: str, accept: str | None, **given: Any) -> None:
    """Correct a limit; the earlier version stays readable, and it must be verified again."""
    changed = changes(Limit, given)
    from effluent.services.limit import amend
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        amend(book, code, changed, by=by, reason=reason, accept=accept or "")
    show.say(f"limit {show.text(code)} is amended: {', '.join(map(show.label, changed))}; {_UNVERIFIED}")


@limit.command("list")
@click.option("--point", type=line, metavar="POINT", help="Only those of this discharge point.")
@click.option("--analyte", type=line, metavar="NAME", help="Only this analyte: name, symbol or CAS number.")
@click.option("--on", type=day, metavar="DATE", help="Only those in force on this day.")
@option.reads
def list_command(
    *, point: str | None, analyte: str | None, on: date | None, ledger: str, as_of: str | None, as_json: bool
) -> None:
    """List the limits that were entered."""
    from effluent.services.limit import listing
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        found = listing(book, point=point, analyte=analyte or "", on=on, as_of=as_of)
    if as_json:
        show.document({"as_of": as_of, "limits": found})
    else:
        show.screen(_listed(found))


_HEADINGS = (
    "number", "point", "analyte", "fraction", "bound", "value", "statistic", "from", "to", "authority",
    "verified by",
)  # fmt: skip


def _listed(found: tuple[Limit, ...]) -> str:
    if not found:
        return "no limit is recorded"
    rows = [
        [
            each.code, each.point, called(each.analyte), each.fraction, each.bound, each.value,
            each.statistic, each.effective_from, each.effective_to, each.authority,
            each.verified_by or "NOBODY YET",
        ]
        for each in found
    ]  # fmt: skip
    return show.table(_HEADINGS, rows)


limit.add_command(show_command("limit", Limit))


@limit.command("reference")
@click.argument("table", required=False, type=line)
@click.option("--analyte", type=line, metavar="NAME", help="Only this analyte: name, symbol or CAS number.")
@option.as_json
def reference_command(*, table: str | None, analyte: str | None, as_json: bool) -> None:
    """List published limits; none is in force before somebody adopts it for a point.

    TABLE is one of those listed, as in 40CFR433.17.
    """
    from effluent.services.limit import reference

    found = reference(table, analyte=analyte or "")
    if as_json:
        show.document({"table": table, "rows": found})
    else:
        show.screen(_referenced(found), "Reference only: a published table is not a permit.")


def _referenced(found: tuple[ReferenceLimit, ...]) -> str:
    if not found:
        return "no published row"
    rows = [
        [row.key, row.bound, row.value, row.fraction, row.statistic, row.broken_by, row.source.citation,
         row.source.edition, row.source.mark, row.applies]
        for row in found
    ]  # fmt: skip
    headings = ("key", "bound", "value", "fraction", "statistic", "broken by", "source", "edition", "read in")
    return show.table((*headings, "addressed to"), rows)
