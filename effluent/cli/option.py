"""Options that mean the same on every command that has them; they stand after the verb."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click

from effluent.cli.value import line
from effluent.settings import LEDGER_VARIABLE, PERSON_VARIABLE

__all__ = [
    "accept",
    "as_json",
    "as_of",
    "by",
    "ledger",
    "reads",
    "reason",
    "reason_required",
    "writes",
]

_Body = TypeVar("_Body", bound=Callable[..., Any])


def _needed(what: str) -> Callable[[click.Context, click.Parameter, str | None], str]:
    """Return a check that refuses a missing value, naming the option and the environment variable."""

    def check(context: click.Context, parameter: click.Parameter, value: str | None) -> str:
        if not value and not context.resilient_parsing:
            raise click.UsageError(
                f"{what}: give {parameter.opts[0]} or set the environment variable {parameter.envvar}",
                context,
            )
        return value or ""

    return check


def ledger(body: _Body) -> _Body:
    """Add ``--ledger``, the place of the ledger, or its environment variable."""
    return click.option(
        "--ledger",
        metavar="PLACE",
        envvar=LEDGER_VARIABLE,
        callback=_needed("no ledger is named"),
        type=line,
        help=f"The ledger: a file, or postgresql+psycopg://…; or set {LEDGER_VARIABLE}.",
    )(body)


def by(body: _Body) -> _Body:
    """Add ``--by``, the person who records, or its environment variable."""
    return click.option(
        "--by",
        metavar="PERSON",
        envvar=PERSON_VARIABLE,
        callback=_needed("it is not said who records this"),
        type=line,
        help=f"Who records this; or set {PERSON_VARIABLE}.",
    )(body)


def reason(body: _Body) -> _Body:
    """Add ``--reason``, which the entry keeps; it may be left out."""
    return click.option("--reason", metavar="TEXT", type=line, help="Why; the entry keeps it.")(body)


def reason_required(body: _Body) -> _Body:
    """Add ``--reason``, without which a correction is not recorded."""
    return click.option(
        "--reason", metavar="TEXT", type=line, required=True, help="Why; the entry keeps it."
    )(body)


def accept(body: _Body) -> _Body:
    """Add ``--accept``, the answer to what was questioned."""
    return click.option(
        "--accept",
        metavar="REASON",
        type=line,
        help="Why what was questioned is right all the same; the entry keeps it.",
    )(body)


def as_of(body: _Body) -> _Body:
    """Add ``--as-of``, passed on as text."""
    return click.option(
        "--as-of",
        metavar="MOMENT",
        type=line,
        help="Answer with what was known then: an entry number, a date, or a date and time.",
    )(body)


def as_json(body: _Body) -> _Body:
    """Add ``--json``; the parameter is ``as_json``."""
    return click.option("--json", "as_json", is_flag=True, help="Answer as JSON.")(body)


def reads(body: _Body) -> _Body:
    """Add what every read of a ledger takes: ``--ledger``, ``--as-of`` and ``--json``."""
    return ledger(as_of(as_json(body)))


def writes(body: _Body) -> _Body:
    """Add what every entry takes: ``--ledger`` and ``--by``."""
    return ledger(by(body))
