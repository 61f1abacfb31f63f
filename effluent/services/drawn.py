"""What the samples of containers were drawn from, and whether a correction of a wash changes it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from fractions import Fraction
from typing import TypeAlias

from effluent.domain import Movement, Sample
from effluent.services.container import origins_at
from effluent.store.reading import Reading

__all__ = ["Drawn", "drawn_with", "unsettled"]

Drawn: TypeAlias = Mapping[tuple[str, str], Mapping[str, Fraction]]


def drawn_with(reading: Reading, wash: str) -> Drawn:
    """Return what each sample of a container held of each wash, in litres of the container, exactly.

    Only samples with water of `wash` are in it, each under its container and its number.
    """
    found: dict[tuple[str, str], Mapping[str, Fraction]] = {}
    for container in sorted(_reached(reading, wash)):
        samples: tuple[Sample, ...] = reading.values("sample", container=container)
        held = origins_at(reading, container, [sample.started_at for sample in samples])
        for sample, origins in zip(samples, held, strict=True):
            if wash in origins:
                found[container, sample.code] = origins
    return found


def unsettled(wash: str, before: Drawn, after: Drawn) -> Iterator[str]:
    """Yield one question for each container of which samples were drawn from other water than was thought."""
    changed: dict[str, list[str]] = {}
    for key in {**before, **after}:
        if before.get(key) != after.get(key):
            changed.setdefault(key[0], []).append(key[1])
    for container, samples in changed.items():
        noun, verb = ("sample", "speaks") if len(samples) == 1 else ("samples", "speak")
        yield (
            f"container {container}: {noun} {', '.join(samples)} {verb} for water of {wash}, "
            "which this correction changes: was it drawn from what is now recorded?"
        )


def _reached(reading: Reading, wash: str) -> set[str]:
    """Return the containers that a wash filled, and those its water was poured into."""
    reached = _targets(reading.values("movement", wash=wash))
    fresh = reached
    while fresh:
        fresh = _targets(reading.values("movement", source=sorted(fresh))) - reached
        reached = reached | fresh
    return reached


def _targets(movements: Iterable[Movement]) -> set[str]:
    return {movement.target for movement in movements if movement.target}
