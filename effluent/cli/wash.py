"""The commands of washes: record, list, show, amend, void, balance."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

import click

from effluent.cli import option, show
from effluent.cli.field import build, changes, fields_as_options
from effluent.cli.register import list_command, register_group, show_command
from effluent.cli.value import day, in_order, line, quantity
from effluent.domain import Quantity, Wash

if TYPE_CHECKING:
    from effluent.calc.balance import Balance
    from effluent.services.wash import Balanced, Recorded

__all__ = ["wash"]

_COLUMNS = ("code", "kind", "engine", "site", "performed_at", "caught")
_BALANCE = ("put in L", "caught L", "retained L", "unaccounted L", "± L (k=2)", "share %", "threshold")
_NOT_STATED, _MORE_CAUGHT = "not stated", "more caught than put in"

wash = register_group("wash", Wash, commands=[])


def _into(
    context: click.Context, parameter: click.Parameter, given: Sequence[str]
) -> dict[str, Quantity | None]:
    """Read ``D-1`` or ``D-1=100 L``."""
    fills: dict[str, Quantity | None] = {}
    for each in given:
        container, separator, volume = each.partition("=")
        if not container.strip() or container.strip() in fills:
            raise click.BadParameter(f"{each!r}: name each container once", context, parameter)
        fills[container.strip()] = quantity(volume) if separator else None
    return fills


_into_option = click.option(
    "--into",
    "into",
    multiple=True,
    type=line,
    callback=_into,
    metavar="CONTAINER[=VOLUME]",
    help="Container that took what was caught; give the volume of each where there are several.",
)


@wash.command("record")
@fields_as_options(Wash)
@_into_option
@option.accept
@option.reason
@option.writes
def record(
    *, ledger: str, by: str, reason: str | None, accept: str | None, into: dict[str, Any], **given: object
) -> None:
    """Record a wash and the containers it filled; CODE is its number, made up if left out."""
    from effluent.services import wash as washes
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        done = washes.record(book, build(Wash, given), into, by=by, accept=accept or "", reason=reason or "")
    _say(done, "is recorded")


@wash.command("amend")
@fields_as_options(Wash, amend=True)
@_into_option
@option.accept
@option.reason_required
@option.writes
def amend(
    *,
    code: str,
    ledger: str,
    by: str,
    reason: str,
    accept: str | None,
    into: dict[str, Any],
    **given: object,
) -> None:
    """Correct a wash; the earlier version stays readable, and its fills follow. CODE is its number."""
    changed = changes(Wash, given) if not into or any(given.values()) else {}
    if into:
        changed["into"] = into
    from effluent.services import wash as washes
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        done = washes.amend(book, code, changed, by=by, reason=reason, accept=accept or "")
    _say(done, "is amended")


@wash.command("void")
@click.argument("code", type=line)
@option.reason_required
@option.accept
@option.writes
def void(*, code: str, ledger: str, by: str, reason: str, accept: str | None) -> None:
    """Void a wash and its fills; both stay readable. CODE is its number."""
    from effluent.services import wash as washes
    from effluent.wiring import open_ledger

    with open_ledger(ledger) as book:
        washes.void(book, code, by=by, reason=reason, accept=accept or "")
    show.say(f"wash {show.text(code)} is void, and what it filled")


@wash.command("balance")
@click.option("--site", type=line, metavar="SITE", help="Only washes at this site.")
@click.option("--engine-type", type=line, metavar="TYPE", help="Only engines of this type.")
@click.option("--since", type=day, metavar="DATE", help="First day, local to the site.")
@click.option("--until", type=day, metavar="DATE", help="Last day, local to the site.")
@option.reads
def balance(*, ledger: str, as_json: bool, **asked: Any) -> None:
    """Show what was put in, caught, retained and is unaccounted for, by wash and by month."""
    from effluent.services import wash as washes
    from effluent.wiring import open_ledger

    in_order(asked["since"], asked["until"])
    with open_ledger(ledger) as book:
        found = washes.balances(book, **asked)
    totals = washes.totals(found)
    if as_json:
        show.document({"washes": [_balanced(each) for each in found], "totals": _totals(totals)})
    elif not found:
        show.screen("no wash is recorded there")
    else:
        show.screen(_by_wash(found), _by_month(totals))


def _say(done: Recorded, what: str) -> None:
    lines = [f"wash {show.text(done.code)} {what}"]
    lines += [f"  {fill.volume} into {show.text(fill.target)} (movement {fill.code})" for fill in done.fills]
    result = done.balanced.balance
    if result.put_in:
        lines.append(
            f"  unaccounted: {_plus_minus(result)} of {_litres(result.put_in)} L put in{_share(result)}"
        )
    if done.balanced.flagged is not None:
        lines.append(f"  against the site's threshold: {_flag(done.balanced)}")
    show.say(*lines)


def _by_wash(found: Iterable[Balanced]) -> str:
    rows = [
        [each.wash.code, each.wash.site, each.engine_type, *_figures(each.balance), _flag(each)]
        for each in found
    ]
    return show.table(["wash", "site", "engine type", *_BALANCE], rows)


def _by_month(totals: dict[tuple[str, str, str], Balance]) -> str:
    rows = [[*group, *_figures(result)] for group, result in sorted(totals.items())]
    return show.table(["site", "engine type", "month", *_BALANCE[:-1]], rows)


def _flag(each: Balanced) -> str:
    if not each.balance.put_in:
        return "nothing put in"
    return _answer(each) or "no threshold"


def _answer(each: Balanced) -> str:
    """Return where a wash stands against the threshold; no share of more than was put in is *within* it."""
    if each.balance.put_in and each.balance.caught_exceeds_put_in:
        return _MORE_CAUGHT
    return "" if each.flagged is None else str(each.flagged)


def _figures(result: Balance) -> list[str]:
    share = "" if result.share is None else f"{float(result.share) * 100:.1f}"
    volumes = (result.put_in, result.caught, result.retained, result.unaccounted)
    return [*map(_litres, volumes), _uncertainty(result) or _NOT_STATED, share]


def _plus_minus(result: Balance) -> str:
    spread = _uncertainty(result)
    beside = f" ± {spread} L" if spread else f" L (uncertainty {_NOT_STATED})"
    return f"{_litres(result.unaccounted)}{beside}"


def _uncertainty(result: Balance) -> str:
    return f"{result.uncertainty:.1f}" if result.is_uncertainty_stated else ""


def _share(result: Balance) -> str:
    return "" if result.share is None else f" ({float(result.share) * 100:.1f} %)"


def _litres(volume: object) -> str:
    return f"{float(volume):.1f}"  # type: ignore[arg-type]


def _balanced(each: Balanced) -> dict[str, object]:
    return {
        "wash": each.wash.code,
        "site": each.wash.site,
        "engine_type": each.engine_type,
        "threshold": _answer(each) or None,
        **_exact(each.balance),
    }


def _totals(totals: dict[tuple[str, str, str], Balance]) -> list[dict[str, object]]:
    return [
        {"site": site, "engine_type": kind, "month": month, **_exact(result)}
        for (site, kind, month), result in sorted(totals.items())
    ]


def _exact(result: Balance) -> dict[str, object]:
    return {
        "put_in_l": result.put_in,
        "caught_l": result.caught,
        "retained_l": result.retained,
        "unaccounted_l": result.unaccounted,
        "unaccounted_uncertainty_l": result.uncertainty if result.is_uncertainty_stated else None,
        "share": result.share,
    }


wash.add_command(list_command("wash", Wash, columns=_COLUMNS))
wash.add_command(show_command("wash", Wash))
