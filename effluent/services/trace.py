"""From any record along the chain to the nozzle and to the manifest."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import Any, NamedTuple

from effluent.domain import Movement, Sample
from effluent.errors import ValueRefused
from effluent.services.batch import Batches
from effluent.services.check import verdicts_for
from effluent.services.container import movements_of
from effluent.services.locality import localised
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading

__all__ = ["NOUNS", "Link", "Trace", "trace"]

NOUNS = ("engine", "cleaner", "wash", "movement", "container", "sample", "point", "manifest")


@dataclass(frozen=True)
class Link:
    """One record on the way, and where the way leads from it; `above` means that it was told already."""

    noun: str
    code: str
    said: str
    further: tuple[Link, ...] = ()
    above: bool = False


@dataclass(frozen=True)
class Trace:
    """Where a record's water came from, and where it went."""

    start: Link
    back: tuple[Link, ...]
    forth: tuple[Link, ...]


def trace(ledger: Ledger, noun: str, code: str, *, as_of: str | None = None) -> Trace:
    """Walk both ways from a record, along its own water.

    What had left a container before the water came, or came after it ran empty, is not on the way.

    Raises
    ------
    ValueRefused
        If the noun is not on the chain.
    RecordMissing
        If there is no such record.
    """
    if noun not in NOUNS:
        raise ValueRefused("noun", noun, f"trace from one of: {', '.join(NOUNS)}")
    with ledger.reading(as_of) as reading:
        chain, start = _Chain(reading), _Step(noun, code)
        return Trace(
            chain.link(start), _Walk(chain, chain.back).tree(start), _Walk(chain, chain.forth).tree(start)
        )


class _Step(NamedTuple):
    """A record on the way; of a container, the place among its movements at which the way meets it."""

    noun: str
    code: str
    place: int | None = None


class _Walk:
    """One direction of a trace; every step is told once."""

    def __init__(self, chain: _Chain, onward: Callable[[_Step], Iterator[_Step]]) -> None:
        self._chain = chain
        self._onward = onward
        self._told: set[_Step] = set()

    def tree(self, step: _Step, way: frozenset[_Step] = frozenset()) -> tuple[Link, ...]:
        """Return what one step leads to, and further."""
        self._told.add(step)
        way = way | {self._chain.batch(step)}
        return tuple(self._branch(onward, way) for onward in dict.fromkeys(self._onward(step)))

    def _branch(self, step: _Step, way: frozenset[_Step]) -> Link:
        link = self._chain.link(step)
        above = step in self._told or self._chain.batch(step) in way
        if above and not any(True for _ in self._onward(step)):
            return link
        return Link(link.noun, link.code, link.said, () if above else self.tree(step, way), above)


class _Chain:
    """The links of the chain in one view of the ledger."""

    def __init__(self, reading: Reading) -> None:
        self._reading = reading
        self._records: dict[tuple[str, str], Any] = {}
        self._batches: dict[str, Batches] = {}
        self._verdicts: dict[str, str] = {}

    def link(self, step: _Step) -> Link:
        """Return a record as a link without its way."""
        if step.noun == "verdict":
            return Link(step.noun, step.code, self._verdict(step.code))
        return Link(step.noun, step.code, _SAID[step.noun](self._record(step.noun, step.code)))

    def batch(self, step: _Step) -> _Step:
        """Return a step with the batch of water in place of the movement, for a container."""
        if step.place is None or step.noun != "container":
            return step
        return _Step(step.noun, step.code, self._batches_of(step.code).batch(step.place))

    def back(self, step: _Step) -> Iterator[_Step]:
        """Yield what a record's water came from."""
        noun, code, _ = step
        if noun == "container":
            yield from map(self._before, self._batches_of(code).inflows(step.place))
        elif noun == "verdict":
            yield _Step("sample", code)
        elif noun == "manifest":
            for line in self._record(noun, code).lines:
                yield from self._behind(line.container)
        else:
            yield from self._named_by(noun, self._record(noun, code))

    def forth(self, step: _Step) -> Iterator[_Step]:
        """Yield where a record's water went and what was found in it."""
        noun, code, place = step
        if noun in ("engine", "cleaner"):
            yield from (_Step("wash", wash.code) for wash in self._reading.values("wash", **{noun: code}))
        elif noun == "wash":
            yield from map(self._after, self._reading.values("movement", wash=code))
            yield from self._samples(noun, code)
        elif noun == "movement":
            movement = self._record(noun, code)
            yield from [self._after(movement)] if movement.target else []
        elif noun == "container":
            yield from self._from_container(code, place)
        elif noun == "point":
            yield from self._samples(noun, code)
        elif noun == "sample":
            yield _Step("verdict", code)
        elif noun == "verdict":
            yield from self._resting_on(self._record("sample", code))

    def _named_by(self, noun: str, value: Any) -> Iterator[_Step]:
        if noun == "wash":
            yield _Step("engine", value.engine)
            yield from _given("cleaner", value.cleaner)
        elif noun == "movement":
            yield self._before(value)
        elif noun == "sample":
            if value.container:
                yield _Step("container", value.container, self._batches_of(value.container).at(value))
            yield from (*_given("wash", value.wash), *_given("point", value.point))

    def _before(self, movement: Movement) -> _Step:
        """Return what a movement's water came from."""
        if movement.source is None:
            return _Step("wash", movement.wash or "")
        return _Step("container", movement.source, self._batches_of(movement.source).place(movement))

    def _after(self, movement: Movement) -> _Step:
        """Return what a movement's water went into, or the movement itself where it left."""
        if movement.target is None:
            return _Step("movement", movement.code)
        return _Step("container", movement.target, self._batches_of(movement.target).place(movement))

    def _from_container(self, code: str, place: int | None) -> Iterator[_Step]:
        batches = self._batches_of(code)
        yield from map(self._after, batches.outflows(place))
        for sample in self._reading.values("sample", container=code):
            if batches.speaks_for(sample, place):
                yield _Step("sample", sample.code)
        if batches.is_last(place):
            yield from self._manifests(code)

    def _behind(self, container: str) -> Iterator[_Step]:
        """Yield the verdicts that a manifest's container rests on, or itself where there are none."""
        batches = self._batches_of(container)
        samples = [
            s
            for s in self._reading.values("sample", container=container)
            if batches.speaks_for(s, batches.last)
        ]
        yield from (_Step("verdict", sample.code) for sample in samples)
        if not samples:
            yield _Step("container", container, batches.last)

    def _resting_on(self, sample: Sample) -> Iterator[_Step]:
        if sample.container:
            batches = self._batches_of(sample.container)
            if batches.speaks_for(sample, batches.last):
                yield from self._manifests(sample.container)

    def _manifests(self, container: str) -> Iterator[_Step]:
        for manifest in self._all_manifests:
            if any(line.container == container for line in manifest.lines):
                yield _Step("manifest", manifest.code)

    @cached_property
    def _all_manifests(self) -> tuple[Any, ...]:
        return self._reading.values("manifest")

    def _samples(self, noun: str, code: str) -> Iterator[_Step]:
        for sample in self._reading.values("sample", **{noun: code}):
            yield _Step("sample", sample.code)

    def _record(self, noun: str, code: str) -> Any:
        if (noun, code) not in self._records:
            self._records[noun, code] = localised(self._reading, [self._reading.value(noun, code)])[0]
        return self._records[noun, code]

    def _batches_of(self, container: str) -> Batches:
        if container not in self._batches:
            self._batches[container] = Batches(movements_of(self._reading, container), container)
        return self._batches[container]

    def _verdict(self, sample: str) -> str:
        if sample not in self._verdicts:
            self._verdicts[sample] = self._judged(sample)
        return self._verdicts[sample]

    def _judged(self, sample: str) -> str:
        verdicts = verdicts_for(self._reading, [self._record("sample", sample)])
        if not verdicts:
            return "no verdict: no results, or no limit in force for them"
        outcomes = [verdict.outcome for verdict in verdicts]
        return ", ".join(f"{outcomes.count(outcome)} {outcome}" for outcome in sorted({*outcomes}))


def _given(noun: str, code: str | None) -> Iterator[_Step]:
    if code is not None:
        yield _Step(noun, code)


_SAID: dict[str, Callable[[Any], str]] = {
    "engine": lambda e: " ".join(filter(None, [e.type_label, e.aircraft, e.position])),
    "cleaner": lambda c: f"{c.label}, {c.type}",
    "wash": lambda w: f"{w.kind}, {w.performed_at:%Y-%m-%d}, caught {w.caught or 'nothing'}",
    "movement": lambda m: (
        f"{m.kind} of {m.volume}, {m.moved_at:%Y-%m-%d}" + (f", to {m.destination}" if m.destination else "")
    ),
    "container": lambda c: f"{c.kind} at {c.site}",
    "sample": lambda s: f"{s.method}, {s.started_at:%Y-%m-%d}",
    "manifest": lambda m: f"{m.state}, to {m.facility}",
    "point": lambda p: f"{p.kind}, {p.name}",
}
