"""What receiving results needs to know of a sample, without making a record of each."""

from __future__ import annotations

from collections.abc import Iterable
from typing import NamedTuple

from effluent.store.reading import Reading

__all__ = ["Bottle", "Bottles"]

_MOST = 500_000
_COLUMNS = ("key", "container", "wash", "point", "started_at", "ended_at")


class Bottle(NamedTuple):
    """When drawing a sample began and ended, as UTC texts, and the place whose history and limits count.

    ``place`` is ``point/CODE`` for a sample at a discharge point and ``site/CODE`` for caught water.
    """

    place: str
    started_at: str
    drawn_at: str


class Bottles(dict[str, Bottle]):
    """Samples by number; those that `learn` did not find are not in the ledger."""

    def __init__(self, reading: Reading) -> None:
        super().__init__()
        self._reading = reading
        self._places: dict[str, str] = {}

    def learn(self, codes: Iterable[str]) -> None:
        """Look up samples that are not known yet; forget all first if there are too many."""
        if len(self) > _MOST:
            self.clear()
        unknown = sorted({*codes} - self.keys())
        rows = self._reading.record_columns("sample", _COLUMNS, codes=unknown)
        self._learn_places({origin for _, *origins, _, _ in rows for origin in origins[:2] if origin})
        for key, container, wash, point, started_at, ended_at in rows:
            place = point or self._places.get(container or wash, "")
            self[key.partition("/")[2]] = Bottle(place, started_at, ended_at or started_at)

    def _learn_places(self, origins: Iterable[str]) -> None:
        """Look up the sites of containers and washes."""
        for noun in ("container", "wash"):
            keys = [key for key in origins if key.startswith(f"{noun}/") and key not in self._places]
            codes = [key.partition("/")[2] for key in keys]
            self._places |= dict(self._reading.record_columns(noun, ("key", "site"), codes=codes))
