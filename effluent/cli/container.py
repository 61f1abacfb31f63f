"""The commands of containers: the register's, and contents, transfer, withdraw."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import click

from effluent.cli import option, show
from effluent.cli.field import changes, fields_as_options
from effluent.cli.register import add_command, list_command, register_group, show_command, void_command
from effluent.cli.value import instant, line, line_or_nothing, quantity, word
from effluent.domain import Container, MeasuredBy, Movement, MovementKind

if TYPE_CHECKING:
    from effluent.services.container import Contents

__all__ = ["container"]

_commands = [make("container", Container) for make in (add_command, list_command, show_command)]
container = register_group("container", Container, commands=_commands)

_volume = click.option("--volume", type=quantity, required=True, metavar="QUANTITY", help="Volume moved.")
_at = click.option("--at", "moved_at", type=instant, required=True, metavar="DATE-TIME", help="When.")
_person = click.option("--moved-by", type=line, metavar="PERSON", help="Who did it; without it: who records.")
_measured = click.option(
    "--measured-by", type=word(MeasuredBy), metavar=f"[{'|'.join(MeasuredBy)}]", help="How it was found."
)
_remarks = click.option("--remarks", type=line_or_nothing, default="", metavar="TEXT", help="Remarks.")


@container.command("amend")
@fields_as_options(Container, amend=True)
@option.reason_required
@option.writes
def amend(*, code: str, ledger: str, by: str, reason: str, **given: object) -> None:
    """Correct a container; the earlier version stays readable. CODE is the number painted on it."""
    changed = changes(Container, given)
    from effluent.services import container as containers
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        containers.amend(book, code, changed, by=by, reason=reason)
    show.say(f"container {show.text(code)} is amended: {', '.join(map(show.label, changed))}")


@container.command("transfer")
@click.argument("source", type=line)
@click.argument("target", type=line)
@_volume
@_at
@_person
@_measured
@_remarks
@option.reason
@option.writes
def transfer(
    *,
    source: str,
    target: str,
    ledger: str,
    by: str,
    reason: str | None,
    moved_by: str | None,
    **given: Any,
) -> None:
    """Record that water went from container SOURCE into container TARGET."""
    movement = _movement(MovementKind.TRANSFER, by=moved_by or by, source=source, target=target, **given)
    code = _move(ledger, movement, by=by, reason=reason or "")
    show.say(
        f"movement {code} is recorded: {movement.volume} from {show.text(source)} into {show.text(target)}"
    )


@container.command("withdraw")
@click.argument("source", type=line)
@click.option("--destination", type=line, required=True, metavar="TEXT", help="Where the water went.")
@_volume
@_at
@_person
@_measured
@_remarks
@option.reason
@option.writes
def withdraw(
    *, source: str, ledger: str, by: str, reason: str | None, moved_by: str | None, **given: Any
) -> None:
    """Record that water left container SOURCE for somewhere else."""
    movement = _movement(MovementKind.WITHDRAWAL, by=moved_by or by, source=source, **given)
    code = _move(ledger, movement, by=by, reason=reason or "")
    where = show.text(movement.destination)
    show.say(f"movement {code} is recorded: {movement.volume} from {show.text(source)} to {where}")


@container.command("contents")
@click.argument("code", type=line)
@option.reads
def contents(*, code: str, ledger: str, as_of: str | None, as_json: bool) -> None:
    """Show how full a container is, and of what. CODE is the number painted on it."""
    from effluent.services import container as containers
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        held = containers.contents(book, code, as_of=as_of)
    if as_json:
        show.document(_as_document(held))
    else:
        show.screen(*_as_text(held))


def _movement(kind: MovementKind, *, by: str, source: str, **given: Any) -> Movement:
    return Movement(kind=kind, moved_by=by, source=source, **given)


def _move(ledger: str, movement: Movement, *, by: str, reason: str) -> str:
    from effluent.services import container as containers
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        return containers.move(book, movement, by=by, reason=reason)


def _as_text(held: Contents) -> list[str]:
    level, room = float(held.level_l), float(held.capacity_l - held.level_l)
    head = f"container {show.text(held.container.code)}: {level:.1f} L, room for {room:.1f} L"
    if not held.level_l:
        head += "\nit holds nothing"
    origins = [
        [o.wash.code, o.wash.engine, o.wash.kind, o.cleaner_type or "no cleaner", f"{float(o.volume_l):.1f}"]
        for o in held.origins
    ]
    movements = [
        [m.code, m.kind, m.moved_at, m.source, m.target, m.volume, m.wash, m.destination]
        for m in held.movements
    ]
    headings = ["movement", "kind", "at", "from", "into", "volume", "wash", "destination"]
    return [
        head,
        show.table(["wash", "engine", "kind", "cleaner type", "holds L"], origins) if origins else "",
        show.table(headings, movements) if movements else "",
    ]


def _as_document(held: Contents) -> dict[str, object]:
    return {
        "container": held.container,
        "level_l": held.level_l,
        "working_capacity_l": held.capacity_l,
        "origins": [
            {
                "wash": o.wash.code,
                "engine": o.wash.engine,
                "cleaner_type": o.cleaner_type,
                "volume_l": o.volume_l,
            }
            for o in held.origins
        ],
        "movements": list(held.movements),
    }


container.add_command(void_command("container", Container))
