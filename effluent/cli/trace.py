"""The command that walks the chain."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import click

from effluent.cli import option, show
from effluent.cli.group import TABLE
from effluent.cli.value import line

if TYPE_CHECKING:
    from effluent.services.trace import Link

__all__ = ["trace"]

_NOUNS = ("engine", "cleaner", "wash", "movement", "container", "sample", "point", "manifest")


@click.command(
    "trace", help=f"{TABLE['trace'][1]}\n\nNOUN is one of {', '.join(_NOUNS)}; CODE is its number."
)
@click.argument("noun", type=line)
@click.argument("code", type=line)
@option.reads
def trace(*, noun: str, code: str, ledger: str, as_of: str | None, as_json: bool) -> None:
    """Walk the chain both ways."""
    from effluent.services import trace as tracing
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        walked = tracing.trace(book, noun, code, as_of=as_of)
    if as_json:
        show.document({"start": walked.start, "back": walked.back, "forth": walked.forth})
        return
    parts = [_line(walked.start)]
    for heading, links in (("came from:", walked.back), ("went to:", walked.forth)):
        parts.append("\n".join([heading, *_tree(links)]) if links else f"{heading} nothing recorded")
    show.screen(*parts)


def _tree(links: tuple[Link, ...], depth: int = 1) -> Iterator[str]:
    for link in links:
        yield f"{'  ' * depth}{_line(link)}"
        yield from _tree(link.further, depth + 1)


def _line(link: Link) -> str:
    above = " (see above)" if link.above else ""
    noun = "verdict on sample" if link.noun == "verdict" else link.noun
    return f"{noun} {show.text(link.code)}: {show.text(link.said)}{above}"
