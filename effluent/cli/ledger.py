"""The commands of the ledger itself: making, proving, copying and upgrading it."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from effluent.cli import option, show
from effluent.cli.group import TABLE, Group
from effluent.cli.value import line, line_or_nothing

if TYPE_CHECKING:
    from collections.abc import Iterable

    from effluent.services.ledger import Report
    from effluent.store.reading import Entry

__all__ = ["ledger"]

ledger = Group("ledger", help=TABLE["ledger"][1])


@ledger.command()
@click.option("--name", metavar="TEXT", type=line, required=True, help="Full name of that person.")
@click.option("--role", metavar="TEXT", type=line_or_nothing, default="", help="Role at the site.")
@option.writes
def create(*, ledger: str, by: str, name: str, role: str) -> None:
    """Make a new ledger.

    Its first entry records the person who makes it.
    """
    from effluent.domain import Person
    from effluent.services import ledger as service

    number = service.create(ledger, Person(code=by, name=name, role=role))
    show.say(f"ledger {number} is made; its first entry records person {show.text(by)}")


@ledger.command()
@click.option("--backed-up", is_flag=True, help="Say that a database server's ledger was backed up.")
@option.ledger
def upgrade(*, ledger: str, backed_up: bool) -> None:
    """Bring an older ledger to this version.

    A ledger file is copied first, and the copy verified; without that nothing is changed.
    """
    from effluent.services import ledger as service

    revision, copy = service.upgrade(ledger, backed_up=backed_up)
    if copy:
        show.say(f"the ledger as it was is kept in {show.text(copy)}")
    show.say(f"the ledger has the schema {revision}")


@ledger.command()
@click.option(
    "--witness",
    metavar="ENTRY:DIGEST",
    type=line,
    help="An entry and its digest as a page prints them; the digest may be cut to 12 characters.",
)
@option.as_json
@option.ledger
def verify(*, ledger: str, witness: str | None, as_json: bool) -> int:
    """Check every entry and every row against their digests.

    The exit status is 0 if all of it holds, 1 if not.
    """
    from effluent.services import ledger as service
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        report = service.prove(book, witness=witness or "")
    if as_json:
        show.document(_report_document(report, witness))
    else:
        show.screen(_report_text(report, witness))
    return 1 if report.findings else 0


def _report_text(report: Report, witness: str | None) -> str:
    holds = "everything holds, and so does the witness" if witness else "everything holds"
    pairs = [
        ("ledger", report.number or "(its number is gone)"),
        ("entries", report.entries),
        ("head digest", report.digest),
        ("verified", "IT DOES NOT HOLD" if report.findings else holds),
    ]
    found = [f"  {show.text(str(finding))}" for finding in report.findings]
    return "\n".join([show.card(pairs), *found])


def _report_document(report: Report, witness: str | None) -> dict[str, object]:
    return {
        "ledger": report.number,
        "entries": report.entries,
        "digest": report.digest,
        "witness": witness,
        "holds": not report.findings,
        "findings": [finding._asdict() for finding in report.findings],
    }


@ledger.command()
@option.reads
def history(*, ledger: str, as_of: str | None, as_json: bool) -> None:
    """List every entry: who recorded what, when and why."""
    from effluent.services import ledger as service
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        entries = service.history(book, as_of=as_of)
    if as_json:
        show.document({"as_of": as_of, "entries": [_entry_document(entry) for entry in entries]})
    else:
        show.screen(_history_text(entries))


def _history_text(entries: Iterable[Entry]) -> str:
    rows = [
        [
            entry.sequence,
            entry.recorded_at,
            entry.recorded_by,
            entry.action,
            _brought(entry),
            entry.digest[:12],
            entry.reason,
        ]
        for entry in entries
    ]
    heads = ["entry", "recorded at (UTC)", "by", "what", "brought", "digest", "why"]
    return show.table(heads, rows)


def _brought(entry: Entry) -> str:
    from effluent.services.ledger import brought_by

    return ", ".join(f"{count} {table}" for table, count in brought_by(entry).items())


def _entry_document(entry: Entry) -> dict[str, object]:
    from effluent.services.ledger import brought_by

    return {
        "entry": entry.sequence,
        "recorded_at": entry.recorded_at,
        "by": entry.recorded_by,
        "action": entry.action,
        "reason": entry.reason,
        "brought": brought_by(entry),
        "previous_digest": entry.previous_digest,
        "digest": entry.digest,
    }


@ledger.command()
@click.argument("target", type=line)
@option.ledger
def backup(*, target: str, ledger: str) -> None:
    """Copy a ledger file to TARGET; it may be in use meanwhile."""
    from effluent.services import ledger as service
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        entry = service.backup(book, target)
    show.say(f"{show.text(target)} holds the ledger up to entry {entry.sequence}, digest {entry.digest}")


@ledger.command()
@click.argument("source", metavar="BACKUP", type=line)
@option.ledger
def restore(*, source: str, ledger: str) -> None:
    """Verify BACKUP, and copy it to --ledger.

    A backup that does not verify is refused, and nothing is overwritten.
    """
    from effluent.services import ledger as service

    report = service.restore(source, ledger)
    show.say(f"{show.text(ledger)} holds ledger {report.number} up to entry {report.entries}; it verifies")
