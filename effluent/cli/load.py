"""The options that describe the lines of a manifest, and its paper."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

import click

from effluent.cli.value import line, quantity, short
from effluent.domain import ManifestLine, Quantity

__all__ = ["line_options", "lines_of", "paper_options"]

_Body = TypeVar("_Body", bound=Callable[..., Any])


def line_options(body: _Body) -> _Body:
    """Add the options that describe one line, or one line for each of several containers."""
    options = [
        click.option(
            "--container",
            "containers",
            type=line,
            multiple=True,
            metavar="CONTAINER",
            help="Container, once for each that the description fits.",
        ),
        click.option(
            "--description", type=line, metavar="TEXT", help="What it is, as the place's rules ask."
        ),
        click.option(
            "--quantity",
            type=quantity,
            metavar="QUANTITY",
            help="Whole units of one container, as in '190 L'; left out, what it holds on record.",
        ),
        click.option(
            "--unit", type=short, metavar="UNIT", help="Unit of what is left out (without it: L), as in gal."
        ),
        click.option(
            "--waste-code",
            "waste_codes",
            type=short,
            multiple=True,
            metavar="CODE",
            help="Waste code; up to six.",
        ),
    ]
    for decorate in reversed(options):
        body = decorate(body)
    return body


def paper_options(body: _Body) -> _Body:
    """Add ``--pdf``, a new file for the paper, and ``--paper``, its size."""
    paper = click.option(
        "--paper",
        type=click.Choice(["A4", "Letter"], case_sensitive=False),
        default="A4",
        show_default=True,
        metavar="[A4|Letter]",
        help="Size of the sheets.",
    )
    return click.option("--pdf", type=line, metavar="FILE", help="Write the paper to this new file.")(
        paper(body)
    )


def lines_of(given: dict[str, Any]) -> tuple[ManifestLine, ...]:
    """Take the line options out of what was given, and return the lines they make.

    Raises
    ------
    click.UsageError
        If they contradict each other, or a container has no description.
    """
    containers, described, amount, unit, codes = (
        given.pop(name) for name in ("containers", "description", "quantity", "unit", "waste_codes")
    )
    if not containers:
        if described or amount or unit or codes:
            raise click.UsageError("a line is described, but no --container is named")
        return ()
    if not described:
        raise click.UsageError("no --description says what the containers hold")
    if amount and (len(containers) > 1 or unit):
        raise click.UsageError("--quantity is for one --container, with its own unit and without --unit")
    wanted = amount or Quantity("", unit or "L")
    return tuple(
        ManifestLine(container=each, description=described, quantity=wanted, waste_codes=" ".join(codes))
        for each in containers
    )
