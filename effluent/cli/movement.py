"""The commands of movements: list, show, void; they are recorded with washes and with containers."""

from __future__ import annotations

import click

from effluent.cli import option, show
from effluent.cli.register import list_command, register_group, show_command
from effluent.cli.value import line
from effluent.domain import Movement

__all__ = ["movement"]

_COLUMNS = ("code", "kind", "moved_at", "source", "target", "volume", "wash", "destination")

movement = register_group("movement", Movement, commands=[])
movement.add_command(list_command("movement", Movement, columns=_COLUMNS))
movement.add_command(show_command("movement", Movement))


@movement.command("void")
@click.argument("code", type=line)
@option.reason_required
@option.writes
def void(*, code: str, ledger: str, by: str, reason: str) -> None:
    """Void a transfer or withdrawal; it stays readable. CODE is its number."""
    from effluent.services import container as containers
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        containers.void_movement(book, code, by=by, reason=reason)
    show.say(f"movement {show.text(code)} is void")
