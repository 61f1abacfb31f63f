"""Containers: how full they are, of what, and water moved between or out of them."""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from fractions import Fraction

from effluent.calc import contents as mixing
from effluent.calc.contents import Flow, Violation
from effluent.calc.units import canonical
from effluent.domain import CleanerType, Container, Movement, MovementKind, Site, Wash
from effluent.errors import StateRefused, ValueRefused, VolumeRefused
from effluent.services import register
from effluent.services.locality import localised
from effluent.services.moment import at_site, local, past, shown
from effluent.services.register import check, need_reason
from effluent.services.shipment import shipped_containers
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading
from effluent.store.writing import Writing

__all__ = [
    "Contents",
    "Origin",
    "amend",
    "check_levels",
    "contents",
    "contents_of",
    "flows_of",
    "in_time",
    "move",
    "movements_of",
    "origins_at",
    "void_movement",
    "working_capacity",
]


@dataclass(frozen=True)
class Origin:
    """Water in a container that came from one wash, in litres, exactly."""

    wash: Wash
    volume_l: Fraction
    cleaner_type: CleanerType | None


@dataclass(frozen=True)
class Contents:
    """What a container holds: level and working capacity in litres, exactly, and its origins."""

    container: Container
    level_l: Fraction
    capacity_l: Fraction
    origins: tuple[Origin, ...]
    movements: tuple[Movement, ...]


def working_capacity(container: Container) -> Fraction:
    """Return the litres a container may be filled to, exactly."""
    return canonical(container.capacity, "volume") * canonical(container.fill_fraction, "share") / 100


def contents(ledger: Ledger, code: str, *, as_of: str | None = None) -> Contents:
    """Return what a container holds, by origin; times are those of its site."""
    with ledger.reading(as_of) as reading:
        held = contents_of(reading, code)
        return replace(held, movements=localised(reading, held.movements))


def contents_of(reading: Reading, code: str) -> Contents:
    """Return what a container holds in an open view; origins and movements in the order of time."""
    container: Container = reading.value("container", code)
    movements = _connected(reading, {code})
    volumes = mixing.contents(flows_of(movements.values())).get(code, {})
    washes = {wash.code: wash for wash in reading.values("wash", key=[w for w in volumes if w])}
    origins = [_origin(reading, washes[name], volume) for name, volume in volumes.items() if name and volume]
    own = in_time(m for m in movements.values() if code in (m.source, m.target))
    level = sum(volumes.values(), Fraction(0))
    ordered = tuple(sorted(origins, key=lambda origin: origin.wash.performed_at))
    return Contents(container, level, working_capacity(container), ordered, own)


def origins_at(
    reading: Reading, code: str, moments: Sequence[datetime]
) -> tuple[Mapping[str, Fraction], ...]:
    """Return for each moment the litres of each wash that a container held; what moved just then counts."""
    flows = flows_of(_connected(reading, {code}).values())
    held = mixing.contents_at(flows, code, moments)
    return tuple({wash: litres for wash, litres in each.items() if litres} for each in held)


def amend(ledger: Ledger, code: str, changes: Mapping[str, object], *, by: str, reason: str) -> str:
    """Record a new version of a container; what it held at any time must still fit.

    Raises
    ------
    VolumeRefused
    """
    need_reason(reason, "amend")

    def job(writing: Writing) -> str:
        register.change(writing, "container", code, changes)
        _check_fit(writing, [code])
        return code

    return ledger.write(job, by=by, action="amend container", reason=reason)


def move(ledger: Ledger, movement: Movement, *, by: str, reason: str = "") -> str:
    """Record a transfer or a withdrawal and return its number.

    Raises
    ------
    ValueRefused, VolumeRefused, StateRefused
        If it contradicts itself, would leave a container below empty or above its working
        capacity at any time, or touches a container that was shipped.
    """
    check(movement)
    _check_ends(movement)

    def job(writing: Writing) -> str:
        source: Container = writing.value("container", movement.source or "")
        site: Site = writing.value("site", source.site)
        _check_same_site(writing, source, movement)
        code = writing.record(replace(movement, moved_at=_moment(movement, site, ledger)))
        check_levels(writing, {movement.source, movement.target})
        return code

    return ledger.write(job, by=by, action=f"record {movement.kind}", reason=reason)


def void_movement(ledger: Ledger, code: str, *, by: str, reason: str) -> None:
    """Record that a transfer or withdrawal does not stand."""
    need_reason(reason, "void")

    def job(writing: Writing) -> None:
        movement: Movement = writing.value("movement", code)
        if movement.kind is MovementKind.FILL:
            raise StateRefused(
                f"movement {code}", "the fill of a wash", f"amend wash {movement.wash} instead"
            )
        writing.void("movement", code)
        check_levels(writing, {movement.source, movement.target})

    ledger.write(job, by=by, action="void movement", reason=reason)


def check_levels(writing: Writing, touched: Iterable[str | None]) -> None:
    """Refuse what would leave a touched container impossible at any time, or touches a shipped one.

    Raises
    ------
    StateRefused, VolumeRefused
    """
    codes = sorted({code for code in touched if code is not None})
    shipped = shipped_containers(writing) if codes else frozenset()
    for code in codes:
        if code in shipped:
            remedy = "nothing goes in or out any more; use another, or void the manifest if it never left"
            raise StateRefused(f"container {code}", "shipped on a manifest", remedy)
    _check_fit(writing, codes)


def _check_fit(writing: Writing, codes: Sequence[str]) -> None:
    """Refuse containers that would have been below empty or too full at any time.

    Raises
    ------
    VolumeRefused
    """
    containers = {code: writing.value("container", code) for code in codes}
    capacities = {code: working_capacity(container) for code, container in containers.items()}
    found = mixing.first_violation(_within(flows_of(_touching(writing, codes).values()), codes), capacities)
    if found is not None:
        site: Site = writing.value("site", containers[found.container].site)
        raise VolumeRefused(found.container, _impossible(found, site))


def _within(flows: Iterable[Flow], codes: Collection[str | None]) -> list[Flow]:
    """Return flows with only those ends that are asked about; the whole story of the others is elsewhere."""
    return [
        replace(
            flow,
            source=flow.source if flow.source in codes else None,
            target=flow.target if flow.target in codes else None,
        )
        for flow in flows
    ]


def _impossible(found: Violation, site: Site) -> str:
    when = shown(at_site(found.at, site))
    if found.level < 0 or found.capacity is None:
        missing = _told_apart(-found.level, Fraction(0))[0]
        return (
            f"at {when} it would be {missing} L below empty: more would leave than had gone in; "
            f"look at: effluent container contents {found.container}"
        )
    level, capacity = _told_apart(found.level, found.capacity)
    return (
        f"at {when} it would hold {level} L, above its working capacity of {capacity} L; "
        "use another container, or split the water between several"
    )


def _told_apart(first: Fraction, second: Fraction) -> tuple[str, str]:
    """Return two volumes with as many decimals as it takes to see that they differ."""
    for places in range(1, 12):
        told = f"{float(first):.{places}f}", f"{float(second):.{places}f}"
        if told[0] != told[1]:
            break
    return told


def flows_of(movements: Iterable[Movement]) -> list[Flow]:
    """Return movements as exact flows, in the order of `in_time`."""
    return [
        Flow(
            at=m.moved_at,
            order=order,
            volume_l=canonical(m.volume, "volume"),
            origin=m.wash,
            source=m.source,
            target=m.target,
        )
        for order, m in enumerate(in_time(movements))
    ]


def in_time(movements: Iterable[Movement]) -> tuple[Movement, ...]:
    """Return movements in the order of time.

    At equal times fills come first, then transfers, then withdrawals, each in the order given: so it
    does not matter which of them was recorded first.
    """
    rank = list(MovementKind)
    return tuple(sorted(movements, key=lambda m: (m.moved_at, rank.index(m.kind))))


def movements_of(reading: Reading, code: str) -> tuple[Movement, ...]:
    """Return the movements into and out of a container, in the order of time."""
    return in_time(_touching(reading, [code]).values())


def _touching(reading: Reading, codes: Iterable[str]) -> dict[str, Movement]:
    wanted = list(codes)
    found = (*reading.values("movement", source=wanted), *reading.values("movement", target=wanted))
    return _in_order(reading, {movement.code: movement for movement in found})


def _connected(reading: Reading, codes: set[str]) -> dict[str, Movement]:
    """Return the movements of containers and of every container whose water reached them."""
    movements: dict[str, Movement] = {}
    fresh = codes
    while fresh:
        found = _touching(reading, fresh)
        movements |= found
        known = codes
        codes = codes | {m.source for m in found.values() if m.source}
        fresh = codes - known
    return _in_order(reading, movements)


def _in_order(reading: Reading, movements: Mapping[str, Movement]) -> dict[str, Movement]:
    order = {code: place for place, code in enumerate(reading.in_record_order("movement", list(movements)))}
    return dict(sorted(movements.items(), key=lambda item: order[item[0]]))


def _origin(reading: Reading, wash: Wash, volume: Fraction) -> Origin:
    kind = reading.value("cleaner", wash.cleaner).type if wash.cleaner else None
    return Origin(wash, volume, kind)


def _check_ends(movement: Movement) -> None:
    if movement.kind is MovementKind.FILL:
        raise ValueRefused("movement", movement.kind.value, "a fill is recorded with its wash")
    if movement.source is None:
        raise ValueRefused("movement", movement.kind.value, "name the container it left")
    if (movement.kind is MovementKind.TRANSFER) != (movement.target is not None):
        raise ValueRefused(
            "movement", movement.kind.value, "a transfer goes into a container, a withdrawal does not"
        )
    if movement.source == movement.target:
        raise ValueRefused("movement", movement.source, "it cannot go into the container it left")
    if movement.kind is MovementKind.WITHDRAWAL and not movement.destination:
        raise ValueRefused("destination", "", "say where the water went")
    if canonical(movement.volume, "volume") == 0:
        raise ValueRefused("volume", str(movement.volume), "nothing would move")


def _check_same_site(reading: Reading, source: Container, movement: Movement) -> None:
    if movement.target is None:
        return
    target: Container = reading.value("container", movement.target)
    if target.site != source.site:
        remedy = (
            f"it stands at {target.site}, {source.code} at {source.site}; water goes from site to site on a "
            "manifest; amend the site of a container that was moved"
        )
        raise ValueRefused("container", target.code, remedy)


def _moment(movement: Movement, site: Site, ledger: Ledger) -> datetime:
    return past("time of the movement", local(movement.moved_at, site), ledger.clock(), site=site)
