"""The commands of manifests: from a draft to the signed copy."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import date, datetime
from typing import TYPE_CHECKING, Any

import click

from effluent.cli import option, show
from effluent.cli.field import build, changes, fields_as_options
from effluent.cli.load import line_options, lines_of, paper_options
from effluent.cli.register import register_group
from effluent.cli.value import day, line
from effluent.domain import Manifest
from effluent.errors import StorageFailed

if TYPE_CHECKING:
    from effluent.services.manifest import Listed, Shown
    from effluent.store.ledger import Ledger
    from effluent.store.reading import Version

__all__ = ["manifest"]

# What comes with lines, or with a verb of its own.
_SKIP = {"state", "lines", "issued_on", "accepted_on", "returned_on", "signed_by", "signed_copy"}

manifest = register_group("manifest", Manifest, commands=[])
_code = click.argument("code", type=line)


@manifest.command("draft")
@fields_as_options(Manifest, skip=_SKIP)
@line_options
@paper_options
@option.accept
@option.reason
@option.writes
def draft(
    *, ledger: str, by: str, reason: str | None, accept: str | None, pdf: str | None, paper: str, **given: Any
) -> None:
    """Draft a manifest; CODE is its number in this ledger, made up if left out.

    Further lines join with: effluent manifest line.
    """
    lines = lines_of(given)
    new = replace(build(Manifest, given, skip=_SKIP), lines=lines)
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    _check_target(pdf)
    with open_ledger(ledger) as book:
        code = manifests.draft(book, new, by=by, reason=reason or "", accept=accept or "")
        show.say(f"manifest {show.text(code)} is drafted", *_progress(manifests.show(book, code)))
        _write(book, code, pdf, paper=paper)


@manifest.command("line")
@_code
@line_options
@option.accept
@option.reason
@option.writes
def add_line(
    *, code: str, ledger: str, by: str, reason: str | None, accept: str | None, **given: Any
) -> None:
    """Add containers to a draft, or describe one on it anew. CODE is the manifest's number."""
    lines = lines_of(given)
    if not lines:
        raise click.UsageError("name the --container and its --description")
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.add_lines(book, code, lines, by=by, reason=reason or "", accept=accept or "")
        show.say(f"manifest {show.text(code)} is amended", *_progress(manifests.show(book, code)))


@manifest.command("remove")
@_code
@click.option(
    "--container",
    "containers",
    type=line,
    multiple=True,
    required=True,
    metavar="CONTAINER",
    help="Container, once for each to take off.",
)
@option.reason
@option.writes
def remove(*, code: str, containers: Sequence[str], ledger: str, by: str, reason: str | None) -> None:
    """Take containers off a draft. CODE is the manifest's number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.remove_lines(book, code, containers, by=by, reason=reason or "")
        show.say(f"manifest {show.text(code)} is amended", *_progress(manifests.show(book, code)))


@manifest.command("amend")
@fields_as_options(Manifest, skip=_SKIP, amend=True)
@option.accept
@option.reason_required
@option.writes
def amend(*, code: str, ledger: str, by: str, reason: str, accept: str | None, **given: Any) -> None:
    """Change the parties or the text of a draft; the earlier version stays readable."""
    changed = changes(Manifest, given, skip=_SKIP)
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.amend(book, code, changed, by=by, reason=reason, accept=accept or "")
        show.say(f"manifest {show.text(code)} is amended", *_progress(manifests.show(book, code)))


@manifest.command("issue")
@_code
@click.option("--on", type=day, metavar="DATE", help="Day of issue, local to the site (without it: today).")
@paper_options
@option.accept
@option.writes
def issue(*, code: str, ledger: str, by: str, accept: str | None, pdf: str | None, **given: Any) -> None:
    """Issue a draft whose chain is whole; from then on its containers are shipped. CODE is its number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    _check_target(pdf)
    with open_ledger(ledger) as book:
        manifests.issue(book, code, by=by, on=given["on"], accept=accept or "")
        show.say(f"manifest {show.text(code)} is issued; its containers take no more water")
        _write(book, code, pdf, paper=given["paper"])


@manifest.command("accepted")
@_code
@click.option("--on", type=day, required=True, metavar="DATE", help="Day, local to the site.")
@option.writes
def accepted(*, code: str, ledger: str, by: str, on: date) -> None:
    """Record that the first carrier accepted the load. CODE is the manifest's number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.accepted(book, code, by=by, on=on)
    show.say(f"manifest {show.text(code)}: the first carrier accepted the load on {on}")


@manifest.command("returned")
@_code
@click.option("--on", type=day, required=True, metavar="DATE", help="Day the copy came back.")
@click.option("--signed-by", type=line, required=True, metavar="NAME", help="Name on the signed copy.")
@click.option("--copy", type=line, metavar="FILE", help="Scan of it; its SHA-256 is kept, not the scan.")
@option.writes
def returned(*, code: str, ledger: str, by: str, on: date, signed_by: str, copy: str | None) -> None:
    """Record that the signed copy is back. CODE is the manifest's number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.returned(book, code, by=by, on=on, signed_by=signed_by, copy_path=copy)
    show.say(f"manifest {show.text(code)}: the signed copy is back since {on}")


@manifest.command("void")
@_code
@option.reason_required
@option.accept
@option.writes
def void(*, code: str, ledger: str, by: str, reason: str, accept: str | None) -> None:
    """Void a manifest; it stays readable and its containers are free again. CODE is its number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        manifests.void(book, code, by=by, reason=reason, accept=accept or "")
    show.say(f"manifest {show.text(code)} is void; print it again to mark the paper")


@manifest.command("show")
@_code
@paper_options
@option.reads
def showing(*, code: str, ledger: str, as_of: str | None, as_json: bool, pdf: str | None, paper: str) -> None:
    """Show a manifest and its history, and write its paper. CODE is its number."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    _check_target(pdf)
    with open_ledger(ledger) as book:
        shown = manifests.show(book, code, as_of=as_of)
        if as_json:
            show.document(_as_document(shown, as_of=as_of))
        else:
            show.screen(*_as_text(shown))
        _write(book, code, pdf, paper=paper, as_of=as_of)


@manifest.command("list")
@option.reads
def listing(*, ledger: str, as_of: str | None, as_json: bool) -> None:
    """List every manifest, with the days since issue of those whose signed copy is not back."""
    from effluent.services import manifest as manifests
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        found = manifests.listing(book, as_of=as_of)
    if as_json:
        records = [{"days_out": each.days_out, "record": each.manifest} for each in found]
        show.document({"noun": "manifest", "as_of": as_of, "manifests": records})
    else:
        show.screen(_listed(found))


def _check_target(pdf: str | None) -> None:
    if pdf is not None:
        from effluent.services import sheet

        sheet.check_target(pdf)


def _write(book: Ledger, code: str, pdf: str | None, *, paper: str, as_of: str | None = None) -> None:
    """Write the paper where one is wanted; what is said of it stays out of an answer that others read."""
    if pdf is not None:
        from effluent.services import sheet

        try:
            sheet.pdf(book, code, pdf, paper=paper, as_of=as_of)
        except StorageFailed as error:
            raise StorageFailed(*error.args[:2], _on_record(code)) from error
        click.echo(f"the paper is in {show.text(pdf)}", err=True)


def _on_record(code: str) -> str:
    return f"the manifest is on record; print it with: effluent manifest show {show.text(code)} --pdf FILE"


def _listed(found: Sequence[Listed]) -> str:
    if not found:
        return "no manifest is recorded"
    headings = ["code", "state", "site", "facility", "containers", "issued on", "days since issue"]
    rows = [
        [m.code, m.state, m.site, m.facility, len(m.lines), m.issued_on, days]
        for m, days in ((each.manifest, each.days_out) for each in found)
    ]
    return show.table(headings, rows)


def _progress(shown: Shown) -> list[str]:
    """Return the lines of a draft, and what stands between it and its issue."""
    parts = [_lines(shown.value), _still_open(shown)]
    return [part for part in parts if part]


def _still_open(shown: Shown) -> str:
    missing = [f"  - {show.text(link)}" for link in shown.missing]
    doubts = [f"  - {show.text(doubt)}" for doubt in shown.doubts]
    heads = (["missing before it can be issued:", *missing] if missing else []) + (
        ["to be accepted when it is issued:", *doubts] if doubts else []
    )
    return "\n".join(heads)


def _lines(value: Manifest) -> str:
    if not value.lines:
        return "no container is on it"
    rows = [[each.container, each.quantity, each.waste_codes, each.description] for each in value.lines]
    return show.table(["container", "quantity", "waste codes", "description"], rows)


def _as_text(shown: Shown) -> list[str]:
    value = shown.value
    names = [field for field in vars(value) if field not in ("code", "lines")]
    card = show.card((show.label(name), getattr(value, name)) for name in names)
    history = show.table(
        ["version", "entry", "recorded at", "by", "state", "reason"],
        [_version_row(version) for version in shown.versions],
    )
    return [f"manifest {show.text(value.code)}\n{card}", _lines(value), _still_open(shown), history]


def _version_row(version: Version) -> list[object]:
    entry = version.entry
    return [
        version.number,
        entry.sequence,
        datetime.fromisoformat(entry.recorded_at).replace(microsecond=0),
        entry.recorded_by,
        version.value.state,
        entry.reason,
    ]


def _as_document(shown: Shown, *, as_of: str | None) -> dict[str, object]:
    return {
        "noun": "manifest",
        "as_of": as_of,
        "record": shown.value,
        "missing": shown.missing,
        "doubts": shown.doubts,
        "versions": [
            {
                "version": version.number,
                "entry": version.entry.sequence,
                "recorded_at": version.entry.recorded_at,
                "by": version.entry.recorded_by,
                "reason": version.entry.reason,
                "record": version.value,
            }
            for version in shown.versions
        ],
    }
