"""The batches of one container: which water was in it together, from one emptying to the next."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Sequence
from fractions import Fraction

from effluent.calc.units import canonical
from effluent.domain import Movement, Sample

__all__ = ["Batches"]


class Batches:
    """The movements of a container in the order of time, each with the number of its batch.

    A batch ends when the container runs empty. A place is the position of a movement, ``None`` stands for
    all of them.
    """

    def __init__(self, movements: Sequence[Movement], container: str) -> None:
        self._movements = tuple(movements)
        self._container = container
        self._times = [movement.moved_at for movement in movements]
        self._places = {movement.code: place for place, movement in enumerate(movements)}
        self._batches = _batches(movements, container)

    @property
    def last(self) -> int:
        """The place of the latest movement; -1 where there is none."""
        return len(self._movements) - 1

    def place(self, movement: Movement) -> int:
        """Return the place of a movement."""
        return self._places[movement.code]

    def at(self, sample: Sample) -> int:
        """Return the place of the last movement before a sample was complete; -1 where there is none."""
        return bisect_right(self._times, sample.ended_at or sample.started_at) - 1

    def batch(self, place: int) -> int:
        """Return the number of the batch at a place; -1 before the first movement."""
        return self._batches[place] if place >= 0 else -1

    def inflows(self, place: int | None) -> list[Movement]:
        """Return what went in of the batch at a place, up to there."""
        return [
            movement
            for here, movement in enumerate(self._movements)
            if movement.target == self._container
            and (place is None or (self._same(here, place) and here <= place))
        ]

    def outflows(self, place: int | None) -> list[Movement]:
        """Return what left of the batch at a place, after it."""
        return [
            movement
            for here, movement in enumerate(self._movements)
            if movement.source == self._container
            and (place is None or (self._same(here, place) and here > place))
        ]

    def speaks_for(self, sample: Sample, place: int | None) -> bool:
        """Tell whether a sample of this container is of the batch at a place, and later."""
        if place is None:
            return True
        return self.at(sample) >= place and self._same(self.at(sample), place)

    def is_last(self, place: int | None) -> bool:
        """Tell whether the batch at a place is the latest."""
        return place is None or self._same(place, self.last)

    def _same(self, first: int, second: int) -> bool:
        return self.batch(first) == self.batch(second)


def _batches(movements: Sequence[Movement], container: str) -> list[int]:
    level, batch, batches = Fraction(0), 0, []
    for movement in movements:
        batches.append(batch)
        volume = canonical(movement.volume, "volume")
        level += volume if movement.target == container else -volume
        if not level:
            batch += 1
    return batches
