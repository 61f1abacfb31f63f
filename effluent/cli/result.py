"""The commands of laboratory results: import, enter, list, void."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from effluent.cli import option, show
from effluent.cli.group import TABLE, Group
from effluent.cli.value import count, day, file, in_order, line, line_or_nothing
from effluent.intake.layout import FIELDS
from effluent.reference.analyte import called

if TYPE_CHECKING:
    from effluent.services.importing import Imported, Order, Progress
    from effluent.services.result import Listed
    from effluent.services.wanted import Wanted
    from effluent.store.ledger import Ledger

__all__ = ["progress_bar", "result", "wanted_from", "wanted_options"]

_Body = TypeVar("_Body", bound=Callable[..., Any])
_NEEDED = ("sample", "analyte", "value")

result = Group("result", help=TABLE["result"][1])


def wanted_options(body: _Body) -> _Body:
    """Add the options that say which samples are asked about."""
    for name, reader, metavar, meaning in (
        ("until", day, "DATE", "Only samples drawn on this local day or before."),
        ("since", day, "DATE", "Only samples drawn on this local day or later."),
        ("site", line, "SITE", "Only samples drawn at this site."),
        ("point", line, "POINT", "Only samples drawn at this discharge point."),
        ("container", line, "CONTAINER", "Only samples of this container."),
        ("sample", line, "SAMPLE", "Only this sample."),
    ):
        body = click.option(f"--{name}", type=reader, metavar=metavar, help=meaning)(body)
    return body


def wanted_from(given: dict[str, Any]) -> Wanted:
    """Take the values of `wanted_options` out of what was given."""
    from effluent.services.wanted import Wanted

    wanted = Wanted(**{name: given.pop(name) for name in Wanted._fields})
    in_order(wanted.since, wanted.until)
    return wanted


@result.command("import")
@click.argument("files", metavar="FILE...", nargs=-1, required=True, type=file)
@click.option(
    "--layout", type=file, metavar="MAPPING", help="Mapping file (TOML) of the laboratory's columns."
)
@click.option("--time-zone", type=line, metavar="ZONE", help="Zone of local times, as in Europe/Lisbon.")
@click.option("--decimal-comma", is_flag=True, help="A comma is the decimal mark, as in 0,005.")
@click.option("--explain", is_flag=True, help="Show how each column is understood; record nothing.")
@option.accept
@option.reason
@option.as_json
@option.writes
def import_command(
    *,
    files: tuple[Path, ...],
    layout: Path | None,
    time_zone: str | None,
    decimal_comma: bool,
    explain: bool,
    **given: Any,
) -> None:
    """Read laboratory files into the ledger: all of them, or nothing.

    FILE is CSV or XLSX with our own column set, or with the laboratory's columns and a mapping file.
    """
    from effluent.services.importing import Order
    from effluent.wiring import open_ledger

    order = Order(paths=files, layout=layout, time_zone=time_zone or "", decimal_comma=decimal_comma)
    with open_ledger(given["ledger"]) as book:
        if explain:
            _explain(book, order, as_json=given["as_json"])
        else:
            _import(book, order, given)


def _explain(book: Ledger, order: Order, *, as_json: bool) -> None:
    from effluent.services.importing import explain_files

    explanations = explain_files(book, order)
    if as_json:
        show.document({"files": explanations})
    else:
        show.screen(*("\n".join(each.lines()) for each in explanations), "nothing was recorded")


def _import(book: Ledger, order: Order, given: dict[str, Any]) -> None:
    from effluent.services.importing import import_files

    reason, accept = given["reason"] or "", given["accept"] or ""
    with progress_bar() as progress:
        imported = import_files(book, order, by=given["by"], reason=reason, accept=accept, progress=progress)
    if given["as_json"]:
        show.document(_imported_document(imported))
    else:
        show.screen(_imported_text(imported))


@contextmanager
def progress_bar() -> Iterator[Progress | None]:
    """Give what draws a bar on a terminal; nothing anywhere else."""
    if not sys.stderr.isatty():
        yield None
        return
    with click.progressbar(length=1000, file=sys.stderr, show_pos=False) as bar:

        def progress(name: str, share: float) -> None:
            bar.label = name
            bar.update(max(0, int(share * 1000)) - bar.pos)

        yield progress


def _imported_text(imported: Imported) -> str:
    files = [f"file {code}: {show.text(name)}" for code, name in imported.files]
    skipped = f"{imported.skipped} rows are skipped, as the mapping file says" if imported.skipped else ""
    return "\n".join(filter(None, [*files, _counted(imported.first_number, imported.result_count), skipped]))


def _counted(first: int, count: int) -> str:
    if count == 1:
        return f"1 result is recorded, number {first}"
    return f"{count} results are recorded, numbers {first} to {first + count - 1}"


def _imported_document(imported: Imported) -> dict[str, object]:
    return {
        "files": [{"code": code, "name": name} for code, name in imported.files],
        "first_number": imported.first_number,
        "results": imported.result_count,
        "skipped_rows": imported.skipped,
    }


def _cell_options(body: _Body) -> _Body:
    for name, meaning in reversed([*FIELDS.items()]):
        body = click.option(
            f"--{name.replace('_', '-')}",
            name,
            type=line if name in _NEEDED else line_or_nothing,
            metavar="TEXT",
            required=name in _NEEDED,
            help=f"{meaning[:1].upper()}{meaning[1:]}.",
        )(body)
    return body


@result.command("enter")
@_cell_options
@option.accept
@option.reason
@option.writes
def enter_command(*, ledger: str, by: str, reason: str | None, accept: str | None, **given: Any) -> None:
    """Record one result by hand, read and checked as those of a file are."""
    from effluent.services.result import enter
    from effluent.wiring import open_ledger

    cells = {name: cell for name, cell in given.items() if cell is not None} | {"unit": given["unit"] or ""}
    with open_ledger(ledger) as book:
        number = enter(book, cells, by=by, reason=reason or "", accept=accept or "")
    show.say(f"result {number} is recorded")


@result.command("list")
@wanted_options
@click.option("--analyte", type=line, metavar="NAME", help="Only this analyte: name, symbol or CAS number.")
@click.option("--csv", "csv_path", type=file, metavar="FILE", help="Write them to a new CSV file.")
@click.option("--xlsx", "xlsx_path", type=file, metavar="FILE", help="Write them to a new XLSX file.")
@option.reads
def list_command(*, analyte: str | None, csv_path: Path | None, xlsx_path: Path | None, **given: Any) -> None:
    """List the results that stand, with those analysed outside their holding time marked."""
    from effluent.services.result import export, listing
    from effluent.wiring import open_ledger

    wanted = wanted_from(given)
    with open_ledger(given["ledger"]) as book:
        found = listing(book, wanted, analyte=analyte or "", as_of=given["as_of"])
    for path in filter(None, (csv_path, xlsx_path)):
        export(found, path, as_workbook=path == xlsx_path)
        click.echo(f"{show.text(str(path))}: {len(found)} results", err=True)
    if given["as_json"]:
        show.document({"as_of": given["as_of"], "results": [_listed_document(each) for each in found]})
    elif not (csv_path or xlsx_path):
        show.screen(_listed_text(found))


_HEADINGS = (
    "number", "sample", "drawn", "analyte", "fraction", "value", "unit", "analysed", "report",
    "replicate", "holding time",
)  # fmt: skip


def _listed_text(found: tuple[Listed, ...]) -> str:
    return show.table(_HEADINGS, map(_listed_cells, found)) if found else "no result is recorded"


def _listed_cells(each: Listed) -> list[object]:
    one = each.result
    late = "EXCEEDED" if each.late else ""
    return [
        one.row, one.sample, each.drawn_on, called(one.analyte), one.fraction, one.text, one.unit,
        each.analysed_on, one.report, one.replicate, late,
    ]  # fmt: skip


def _listed_document(each: Listed) -> dict[str, object]:
    return {"result": each.result, "drawn_at": each.sample.started_at, "outside_holding_time": each.late}


@result.command("void")
@click.argument("number", type=count)
@option.reason_required
@option.writes
def void_command(*, number: int, ledger: str, by: str, reason: str) -> None:
    """Withdraw a result without another in its place; it stays readable."""
    from effluent.services.result import void
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        void(book, number, by=by, reason=reason)
    show.say(f"result {number} is void")
