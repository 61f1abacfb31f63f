"""Washes: recorded with the water they put in and caught, corrected, voided, and balanced."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import date
from fractions import Fraction
from typing import Any

from effluent.calc.balance import Answer, Balance, balance, summary
from effluent.calc.units import canonical
from effluent.domain import Movement, MovementKind, Quantity, Site, Wash
from effluent.errors import ValueRefused
from effluent.services.container import check_levels
from effluent.services.drawn import drawn_with, unsettled
from effluent.services.locality import localised
from effluent.services.moment import local, local_day, past
from effluent.services.question import answer
from effluent.services.register import check, need_reason
from effluent.services.rule import check_trade, questions
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading
from effluent.store.writing import Writing

__all__ = ["Balanced", "Recorded", "amend", "balance_of", "balances", "put_in", "record", "totals", "void"]

Fills = Mapping[str, Quantity | None]


@dataclass(frozen=True)
class Balanced:
    """The volume balance of one wash against its site's own threshold, if the site has one."""

    wash: Wash
    engine_type: str
    balance: Balance
    flagged: Answer | None


@dataclass(frozen=True)
class Recorded:
    """A wash as recorded: its number, its fills and its balance."""

    code: str
    fills: tuple[Movement, ...]
    balanced: Balanced


def put_in(wash: Wash) -> tuple[Quantity, ...]:
    """Return the liquids that a wash put in."""
    liquids = (wash.concentrate, wash.solution_water, wash.rinse_water, wash.additive_volume)
    return tuple(liquid for liquid in liquids if liquid is not None)


def record(
    ledger: Ledger, wash: Wash, fills: Fills, *, by: str, accept: str = "", reason: str = ""
) -> Recorded:
    """Record a wash and what it filled, as one entry.

    Parameters
    ----------
    fills : mapping of container to Quantity
        What went where; a single container without a volume takes all that was caught.
    accept : str
        The reason why what is questioned is right all the same.

    Raises
    ------
    ValueRefused
        If the wash contradicts itself or a rule of the trade.
    Questioned
        If something is implausible and nobody accepted it.
    VolumeRefused, StateRefused
        If a container cannot take the water.
    """

    def job(writing: Writing) -> Recorded:
        placed = _checked(writing, wash, ledger)
        answer(writing, questions(writing, placed), accept=accept)
        code = writing.record(placed)
        placed = replace(placed, code=code)
        made = tuple(_record_fill(writing, fill) for fill in _fills(placed, fills))
        check_levels(writing, fills)
        return Recorded(code, made, balance_of(writing, placed))

    return ledger.write(job, by=by, action="record wash", reason=reason)


def amend(
    ledger: Ledger,
    code: str,
    changes: Mapping[str, Any],
    *,
    by: str,
    reason: str,
    accept: str = "",
) -> Recorded:
    """Record a new version of a wash; its fills follow. The old version stays readable.

    `changes` may hold ``into``, the fills as for `record`. Without it, a wash that filled one container
    fills it with what is now caught.

    Raises
    ------
    Questioned
        If something is implausible, or samples were drawn from water that the correction changes, and
        nobody accepted it.
    """
    need_reason(reason, "amend")
    fields = {name: value for name, value in changes.items() if name != "into"}
    fills: Fills | None = changes.get("into")

    def job(writing: Writing) -> Recorded:
        old: Wash = writing.value("wash", code)
        placed = _checked(writing, replace(old, **fields), ledger)
        before = writing.values("movement", wash=code, kind=MovementKind.FILL)
        drawn = drawn_with(writing, code)
        wanted = _fills(placed, _fills_after(before, placed) if fills is None else fills)
        if placed != old:
            writing.amend(placed)
        made = _replace_fills(writing, before, wanted, moved=placed.site != old.site)
        if placed == old and made == before:
            raise ValueRefused("wash", code, "nothing would change; name what to change")
        asked = (*questions(writing, placed), *unsettled(code, drawn, drawn_with(writing, code)))
        answer(writing, asked, accept=accept)
        check_levels(writing, {fill.target for fill in {*before} ^ {*made}})
        return Recorded(code, made, balance_of(writing, placed))

    return ledger.write(job, by=by, action="amend wash", reason=reason)


def void(ledger: Ledger, code: str, *, by: str, reason: str, accept: str = "") -> None:
    """Record that a wash does not stand, and its fills with it.

    Raises
    ------
    StateRefused
        If a sample of the wash itself rests on it.
    Questioned
        If samples were drawn from a container that held its water, and nobody accepted it.
    """
    need_reason(reason, "void")

    def job(writing: Writing) -> None:
        before = writing.values("movement", wash=code, kind=MovementKind.FILL)
        drawn = drawn_with(writing, code)
        for fill in before:
            writing.void("movement", fill.code)
        writing.void("wash", code)
        answer(writing, unsettled(code, drawn, {}), accept=accept)
        check_levels(writing, {fill.target for fill in before})

    ledger.write(job, by=by, action="void wash", reason=reason)


def balance_of(reading: Reading, wash: Wash) -> Balanced:
    """Return the volume balance of one wash."""
    site: Site = reading.value("site", wash.site)
    engine = reading.value("engine", wash.engine)
    return _balanced(wash, site, engine.type_label)


def balances(
    ledger: Ledger,
    *,
    site: str | None = None,
    engine_type: str | None = None,
    since: date | None = None,
    until: date | None = None,
    as_of: str | None = None,
) -> tuple[Balanced, ...]:
    """Return the volume balances of washes, in the order they were recorded, at the times of their sites."""
    with ledger.reading(as_of) as reading:
        sites = {s.code: s for s in reading.values("site")}
        types = {e.code: e.type_label for e in reading.values("engine")}
        if site is not None:
            reading.value("site", site)
        washes = localised(reading, reading.values("wash", **({"site": site} if site else {})))
    return tuple(
        _balanced(wash, sites[wash.site], types[wash.engine])
        for wash in washes
        if engine_type in (None, types[wash.engine])
        and _between(local_day(wash.performed_at, sites[wash.site]), since, until)
    )


def totals(balanced: Sequence[Balanced]) -> dict[tuple[str, str, str], Balance]:
    """Return balances summed by site, engine type and month of the wash."""
    return summary(
        ((each.wash.site, each.engine_type, f"{each.wash.performed_at:%Y-%m}"), each.balance)
        for each in balanced
    )


def _checked(reading: Reading, wash: Wash, ledger: Ledger) -> Wash:
    site: Site = reading.value("site", wash.site)
    moment = past("time of the wash", local(wash.performed_at, site), ledger.clock(), site=site)
    placed = replace(wash, performed_at=moment)
    check(placed)
    check_trade(placed)
    return placed


def _fills(wash: Wash, fills: Fills) -> tuple[Movement, ...]:
    """Return the fills of a wash; together they hold exactly what was caught."""
    caught = canonical(wash.caught, "volume") if wash.caught else Fraction(0)
    if caught and not fills:
        raise ValueRefused("caught", str(wash.caught), "say into which container it went, as in --into D-1")
    if fills and not caught:
        raise ValueRefused(
            "container", ", ".join(fills), "nothing was caught that could go into it; give --caught"
        )
    volumes = _volumes(wash, fills)
    made = tuple(_fill(wash, container, volume) for container, volume in volumes.items())
    for fill in made:
        check(fill)
    total = sum((canonical(volume, "volume") for volume in volumes.values()), Fraction(0))
    if total != caught:
        listed = ", ".join(f"{container} {volume}" for container, volume in volumes.items())
        raise ValueRefused("containers", listed, f"together they must hold the {wash.caught} that was caught")
    return made


def _volumes(wash: Wash, fills: Fills) -> dict[str, Quantity]:
    given = {container: volume for container, volume in fills.items() if volume is not None}
    if len(given) == len(fills):
        return given
    if len(fills) > 1 or wash.caught is None:
        remedy = "give the volume of each container, as in --into 'D-1=100 L' --into 'D-2=18 L'"
        raise ValueRefused("containers", ", ".join(fills), remedy)
    return dict.fromkeys(fills, wash.caught)


def _fill(wash: Wash, container: str, volume: Quantity) -> Movement:
    return Movement(
        kind=MovementKind.FILL,
        moved_at=wash.performed_at,
        moved_by=wash.performed_by,
        volume=volume,
        wash=wash.code,
        target=container,
        measured_by=wash.caught_by,
    )


def _record_fill(writing: Writing, fill: Movement) -> Movement:
    _check_same_site(writing, fill)
    return replace(fill, code=writing.record(fill))


def _check_same_site(reading: Reading, fill: Movement) -> None:
    target, wash = reading.value("container", fill.target or ""), reading.value("wash", fill.wash or "")
    if target.site != wash.site:
        remedy = (
            f"it stands at {target.site}, the wash was at {wash.site}; amend the container if it was moved"
        )
        raise ValueRefused("container", target.code, remedy)


def _fills_after(before: Sequence[Movement], wash: Wash) -> Fills:
    """Return the fills of a corrected wash whose containers stay the same."""
    if wash.caught is None:
        return {}
    if len(before) == 1:
        return {str(before[0].target): wash.caught}
    return {str(fill.target): fill.volume for fill in before}


def _replace_fills(
    writing: Writing, before: Sequence[Movement], after: Sequence[Movement], *, moved: bool
) -> tuple[Movement, ...]:
    """Bring the fills of a wash to what they should be, changing only what differs."""
    standing = {fill.target: fill for fill in before}
    made = []
    for fill in after:
        old = standing.pop(fill.target, None)
        made.append(_record_fill(writing, fill) if old is None else _amend_fill(writing, fill, old))
        if moved:
            _check_same_site(writing, fill)
    for fill in standing.values():
        writing.void("movement", fill.code)
    return tuple(made)


def _amend_fill(writing: Writing, fill: Movement, old: Movement) -> Movement:
    amended = replace(fill, code=old.code)
    if amended != old:
        writing.amend(amended)
    return amended


def _balanced(wash: Wash, site: Site, engine_type: str) -> Balanced:
    result = balance(put_in(wash), wash.caught, wash.retained)
    threshold = site.unaccounted_threshold
    share = canonical(threshold, "share") / 100 if threshold else None
    return Balanced(
        wash, engine_type, result, None if share is None or not result.put_in else result.flagged(share)
    )


def _between(day: date, since: date | None, until: date | None) -> bool:
    return (since is None or since <= day) and (until is None or day <= until)
