"""Levels and contents of containers, from the flows into, between and out of them."""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from datetime import datetime
from fractions import Fraction

from effluent.errors import ValueRefused, VolumeRefused

__all__ = ["Flow", "Violation", "contents", "contents_at", "first_violation", "levels"]

_ZERO = Fraction(0)


@dataclass(frozen=True, kw_only=True)
class Flow:
    """One volume that moved: a fill has a target, a withdrawal a source, a transfer both.

    ``volume_l`` is in litres, exact, never negative; ``origin`` is the wash the water came from, for a
    fill; ``order`` decides between flows of the same instant.

    Raises
    ------
    ValueRefused
        If the volume is negative, or neither a source nor a target is named.
    """

    at: datetime
    order: int
    volume_l: Fraction
    origin: str | None = None
    source: str | None = None
    target: str | None = None

    def __post_init__(self) -> None:
        if self.volume_l < 0:
            raise ValueRefused("volume moved", f"{float(self.volume_l)} L", "a volume is never negative")
        if self.source is None and self.target is None:
            raise ValueRefused("movement", str(self.at), "name the container it left, it went into, or both")


@dataclass(frozen=True, kw_only=True)
class Violation:
    """The first moment at which a container could not have held what the flows say; litres, exact."""

    container: str
    at: datetime
    order: int
    level: Fraction
    capacity: Fraction | None
    what: str


@dataclass
class _Mix:
    """Perfectly mixed water: what leaves takes every origin in proportion, so one scale serves all."""

    level: Fraction = _ZERO
    scale: Fraction = Fraction(1)
    parts: dict[str, Fraction] = field(default_factory=dict)

    def add(self, origin: str, volume: Fraction) -> None:
        self.level += volume
        self.parts[origin] = self.parts.get(origin, _ZERO) + volume / self.scale

    def drain(self, volume: Fraction) -> None:
        left = self.level - volume
        if left:
            self.scale *= left / self.level
        else:
            self.scale, self.parts = Fraction(1), {}
        self.level = left

    def portion(self, volume: Fraction) -> dict[str, Fraction]:
        if not volume:
            return {}
        share = self.scale * volume / self.level
        return {origin: part * share for origin, part in self.parts.items()}


def levels(flows: Iterable[Flow]) -> dict[str, Fraction]:
    """Return how much each container holds after all flows.

    Parameters
    ----------
    flows : iterable of Flow
        In any order; the sum does not depend on it.

    Returns
    -------
    dict of str to fractions.Fraction
        Litres, exact, for every container that a flow names.

    Raises
    ------
    ValueRefused
        Never here; a `Flow` refuses a negative volume when it is made.

    Notes
    -----
    Conservation of volume; no source needed.
    """
    total: dict[str, Fraction] = defaultdict(Fraction)
    for flow in flows:
        for container, change in _changes(flow):
            total[container] += change
    return dict(total)


def contents(flows: Iterable[Flow]) -> dict[str, dict[str, Fraction]]:
    """Return how much water of each origin each container holds after all flows.

    Parameters
    ----------
    flows : iterable of Flow
        In any order; they are taken by time, then by ``order``.

    Returns
    -------
    dict of str to dict of str to fractions.Fraction
        Container to origin to litres, exact. Water of no recorded wash stands under ``""``.
        The parts of a container add up to its level exactly.

    Raises
    ------
    VolumeRefused
        If a container would run below empty on the way.

    Notes
    -----
    Each container is taken as perfectly mixed: what leaves it carries every origin in proportion to
    its share (common practice, no source; oil floats, so a real tank only comes near to it).
    """
    mixes: dict[str, _Mix] = defaultdict(_Mix)
    for flow in _in_time(flows):
        _apply(flow, mixes)
    return {name: mix.portion(mix.level) for name, mix in mixes.items()}


def contents_at(
    flows: Iterable[Flow], container: str, moments: Sequence[datetime]
) -> tuple[dict[str, Fraction], ...]:
    """Return how much water of each origin one container held at each of several moments.

    Parameters
    ----------
    flows : iterable of Flow
        In any order, those of every container whose water could have reached this one.
    container : str
        The one asked about.
    moments : sequence of datetime, length n
        In any order; a flow of just that moment counts.

    Returns
    -------
    tuple of dict of str to fractions.Fraction, length n
        Origin to litres, exact, in the order of `moments`; empty where the container held nothing.

    Raises
    ------
    VolumeRefused
        If a container would run below empty on the way.

    Notes
    -----
    As `contents`; the flows are gone through once.
    """
    mixes: dict[str, _Mix] = defaultdict(_Mix)
    to_come = deque(_in_time(flows))
    found = {}
    for moment in sorted({*moments}):
        while to_come and to_come[0].at <= moment:
            _apply(to_come.popleft(), mixes)
        found[moment] = mixes[container].portion(mixes[container].level)
    return tuple(found[moment] for moment in moments)


def first_violation(flows: Iterable[Flow], capacities: Mapping[str, Fraction]) -> Violation | None:
    """Return the earliest moment at which a container was below empty or above its working capacity.

    Every state along the time line is looked at, not only the last, so a back-dated fill is caught.

    Parameters
    ----------
    flows : iterable of Flow
        In any order; they are taken by time, then by ``order``.
    capacities : mapping of str to fractions.Fraction
        Working capacity in litres; a container that is not in it has none.

    Returns
    -------
    Violation or None
        `None` means that every state was possible.

    Raises
    ------
    ValueRefused
        Never here; a `Flow` refuses a negative volume when it is made.

    Notes
    -----
    Conservation of volume; no source needed.
    """
    level: dict[str, Fraction] = defaultdict(Fraction)
    for flow in _in_time(flows):
        for container, change in _changes(flow):
            level[container] += change
        for container, _ in _changes(flow):
            what = _wrong(level[container], capacities.get(container))
            if what:
                return Violation(
                    container=container,
                    at=flow.at,
                    order=flow.order,
                    level=level[container],
                    capacity=capacities.get(container),
                    what=what,
                )
    return None


def _in_time(flows: Iterable[Flow]) -> list[Flow]:
    return sorted(flows, key=lambda flow: (flow.at, flow.order))


def _changes(flow: Flow) -> Iterator[tuple[str, Fraction]]:
    if flow.source is not None:
        yield flow.source, -flow.volume_l
    if flow.target is not None:
        yield flow.target, flow.volume_l


def _wrong(level: Fraction, capacity: Fraction | None) -> str:
    if level < 0:
        return "below empty"
    return "above working capacity" if capacity is not None and level > capacity else ""


def _apply(flow: Flow, mixes: dict[str, _Mix]) -> None:
    moved = {flow.origin or "": flow.volume_l}
    if flow.source is not None:
        mix = mixes[flow.source]
        if flow.volume_l > mix.level:
            held, wanted = float(mix.level), float(flow.volume_l)
            raise VolumeRefused(flow.source, f"holds {held:g} L, so {wanted:g} L cannot leave it")
        moved = mix.portion(flow.volume_l) if flow.target is not None else {}
        mix.drain(flow.volume_l)
    if flow.target is not None:
        mix = mixes[flow.target]
        for origin, volume in moved.items():
            mix.add(origin, volume)
