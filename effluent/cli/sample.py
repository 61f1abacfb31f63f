"""The commands of samples: take, list, show, void."""

from __future__ import annotations

import click

from effluent.cli import option, show
from effluent.cli.field import build, fields_as_options
from effluent.cli.register import list_command, register_group, show_command
from effluent.cli.value import line
from effluent.domain import Sample

__all__ = ["sample"]

_COLUMNS = ("code", "container", "wash", "point", "method", "started_at", "taken_by")

sample = register_group("sample", Sample, commands=[])


@sample.command("take")
@fields_as_options(Sample)
@option.reason
@option.writes
def take(*, ledger: str, by: str, reason: str | None, **given: object) -> None:
    """Record a sample of a container, a wash stream or a discharge point; CODE is its number."""
    from effluent.services import sample as samples
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        code = samples.take(book, build(Sample, given), by=by, reason=reason or "")
    show.say(f"sample {show.text(code)} is recorded")


sample.add_command(list_command("sample", Sample, columns=_COLUMNS))
sample.add_command(show_command("sample", Sample))


@sample.command("void")
@click.argument("code", type=line)
@option.reason_required
@option.writes
def void(*, code: str, ledger: str, by: str, reason: str) -> None:
    """Void a sample whose results are void; it stays readable. CODE is its number."""
    from effluent.services import sample as samples
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        samples.void(book, code, by=by, reason=reason)
    show.say(f"sample {show.text(code)} is void")
