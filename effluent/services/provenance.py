"""The samples that speak for one engine, and those whose water was mixed with that of others."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from fractions import Fraction
from typing import NamedTuple

from effluent.domain import Sample
from effluent.services.container import origins_at
from effluent.store.reading import Reading

__all__ = ["Provenance", "samples_of_engine"]


class Provenance(NamedTuple):
    """``own`` speak for the engine alone; ``mixed`` names for each of the others the engines in it."""

    own: tuple[Sample, ...]
    mixed: tuple[tuple[Sample, tuple[str, ...]], ...]


def samples_of_engine(reading: Reading, engine: str) -> Provenance:
    """Return the samples of an engine's washes and of containers that held its water when they were drawn.

    Raises
    ------
    RecordMissing
        If there is no such engine.
    """
    reading.value("engine", engine)
    washes = [wash.code for wash in reading.values("wash", engine=engine)]
    own: list[Sample] = list(reading.values("sample", wash=washes))
    mixed = []
    for sample, engines in _of_containers(reading, washes):
        if engines == (engine,):
            own.append(sample)
        elif engine in engines:
            mixed.append((sample, tuple(other for other in engines if other != engine)))
    return Provenance(tuple(own), tuple(mixed))


def _of_containers(reading: Reading, washes: list[str]) -> Iterator[tuple[Sample, tuple[str, ...]]]:
    """Yield the samples of containers that water of the washes reached, with the engines it came from."""
    for container in _reached(reading, washes):
        samples: tuple[Sample, ...] = reading.values("sample", container=container)
        moments = [sample.ended_at or sample.started_at for sample in samples]
        held = origins_at(reading, container, moments) if samples else ()
        engines = _engines(reading, held)
        for sample, origins in zip(samples, held, strict=True):
            yield sample, tuple(sorted({engines[wash] for wash in origins}))


def _engines(reading: Reading, held: tuple[Mapping[str, Fraction], ...]) -> dict[str, str]:
    washes = {wash for origins in held for wash in origins}
    return {wash.code: wash.engine for wash in reading.values("wash", key=sorted(washes))}


def _reached(reading: Reading, washes: list[str]) -> tuple[str, ...]:
    """Return the containers into which water of the washes was filled, or poured later."""
    found: dict[str, None] = {}
    movements = reading.values("movement", wash=washes)
    while movements:
        fresh = {m.target: None for m in movements if m.target and m.target not in found}
        found |= fresh
        movements = reading.values("movement", source=list(fresh)) if fresh else ()
    return tuple(found)
