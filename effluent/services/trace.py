"""From any record along the chain to the nozzle and to the manifest."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

from effluent.domain import Movement
from effluent.errors import ValueRefused
from effluent.services.check import verdicts_for
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading

__all__ = ["NOUNS", "Link", "Trace", "trace"]

NOUNS = ("engine", "wash", "movement", "container", "sample", "manifest", "point", "cleaner")


@dataclass(frozen=True)
class Link:
    """One record on the way, and where the way leads from it."""

    noun: str
    code: str
    said: str
    further: tuple[Link, ...] = ()


@dataclass(frozen=True)
class Trace:
    """Where a record's water came from, and where it went."""

    start: Link
    back: tuple[Link, ...]
    forth: tuple[Link, ...]


def trace(ledger: Ledger, noun: str, code: str, *, as_of: str | None = None) -> Trace:
    """Walk both ways from a record.

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
        walk = _Walk(reading)
        start = walk.link(noun, code)
        return Trace(start, walk.tree(noun, code, walk.back), walk.tree(noun, code, walk.forth))


Step = tuple[str, str]


class _Walk:
    """The links of the chain in one view of the ledger."""

    def __init__(self, reading: Reading) -> None:
        self._reading = reading

    def tree(
        self,
        noun: str,
        code: str,
        step: Callable[[str, str], Iterator[Step]],
        seen: frozenset[Step] = frozenset(),
    ) -> tuple[Link, ...]:
        """Return what one step leads to, and further, never the same record twice on one way."""
        seen = seen | {(noun, code)}
        links = []
        for next_noun, next_code in dict.fromkeys(step(noun, code)):
            if (next_noun, next_code) not in seen:
                link = self.link(next_noun, next_code)
                further = self.tree(next_noun, next_code, step, seen)
                links.append(Link(link.noun, link.code, link.said, further))
        return tuple(links)

    def link(self, noun: str, code: str) -> Link:
        """Return a record as a link without its way."""
        if noun == "verdict":
            return Link(noun, code, self._verdict(code))
        return Link(noun, code, _SAID[noun](self._reading.value(noun, code)))

    def back(self, noun: str, code: str) -> Iterator[Step]:
        """Yield what a record's water came from."""
        value: Any = self._reading.value(noun, code) if noun != "verdict" else None
        if noun == "wash":
            yield "engine", value.engine
            if value.cleaner:
                yield "cleaner", value.cleaner
        elif noun == "movement":
            yield from _given(wash=value.wash, container=value.source)
        elif noun == "container":
            for movement in self._reading.values("movement", target=code):
                yield from _given(wash=movement.wash, container=movement.source)
        elif noun == "sample":
            yield from _given(container=value.container, wash=value.wash, point=value.point)
        elif noun == "manifest":
            yield from (("container", line.container) for line in value.lines)

    def forth(self, noun: str, code: str) -> Iterator[Step]:
        """Yield where a record's water went and what was found in it."""
        values = self._reading.values
        if noun in ("engine", "cleaner"):
            yield from (("wash", wash.code) for wash in values("wash", **{noun: code}))
        elif noun == "wash":
            yield from (("container", m.target) for m in values("movement", wash=code) if m.target)
            yield from self._samples(noun, code)
        elif noun == "movement":
            yield from _given(container=self._reading.value(noun, code).target)
        elif noun == "container":
            yield from self._from_container(code)
        elif noun == "point":
            yield from self._samples(noun, code)
        elif noun == "sample":
            yield "verdict", code

    def _from_container(self, code: str) -> Iterator[Step]:
        movements: tuple[Movement, ...] = self._reading.values("movement", source=code)
        for movement in movements:
            yield ("container", movement.target) if movement.target else ("movement", movement.code)
        yield from self._samples("container", code)
        for manifest in self._reading.values("manifest"):
            if any(line.container == code for line in manifest.lines):
                yield "manifest", manifest.code

    def _samples(self, noun: str, code: str) -> Iterator[Step]:
        yield from (("sample", sample.code) for sample in self._reading.values("sample", **{noun: code}))

    def _verdict(self, sample: str) -> str:
        verdicts = verdicts_for(self._reading, [self._reading.value("sample", sample)])
        if not verdicts:
            return "no verdict: no results, or no limit in force for them"
        counted = [
            f"{sum(v.outcome is o for v in verdicts)} {o}" for o in sorted({v.outcome for v in verdicts})
        ]
        return ", ".join(counted)


def _given(**ends: str | None) -> Iterator[Step]:
    return ((noun, code) for noun, code in ends.items() if code is not None)


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
