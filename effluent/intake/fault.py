"""The bad cells of one grid, each under the heading it has in the file."""

from __future__ import annotations

from collections.abc import Hashable, Iterable, Mapping
from operator import itemgetter
from typing import Any

from effluent.errors import RowError
from effluent.intake.grid import Grid
from effluent.intake.layout import FIELDS
from effluent.intake.memo import Memo

__all__ = ["Faults"]

_LONGEST_SHOWN = 80
_ORDER = {name: place for place, name in enumerate(FIELDS)}


class Faults:
    """Collects what is wrong with the cells of one grid.

    ``headings`` gives the heading of each of our names; ``wide_names`` are those that a wide file says
    by the heading of the value itself.
    """

    def __init__(self, grid: Grid, headings: Mapping[str, str], wide_names: frozenset[str]) -> None:
        self._grid = grid
        self._headings = headings
        self._wide_names = wide_names
        self._errors = [(error.row, -1, error) for error in grid.errors]
        self.places: set[int] = set()

    def add(self, place: int, name: str, reason: str) -> None:
        """Note that the cell of one of our columns is bad."""
        by_value = name == "value" or name in self._wide_names
        heading = self._grid.headings[place] if by_value else self._headings[name]
        cell = self._grid.column(name)[place] if name in self._grid.cells else ""
        shown = cell if len(cell) <= _LONGEST_SHOWN else cell[: _LONGEST_SHOWN - 1] + "…"
        row = self._grid.numbers[place]
        self._errors.append((row, _ORDER[name], RowError(row, heading, shown, reason)))
        self.places.add(place)

    def add_refused(self, name: str, cells: Iterable[Hashable], memo: Memo[Any, Any]) -> None:
        """Note every place whose cell the memo refused."""
        if memo.refused:
            for place, cell in enumerate(cells):
                if cell in memo.refused:
                    self.add(place, name, memo.refused[cell])

    def sorted(self) -> list[RowError]:
        """Return the bad cells row by row, within a row in the order of our columns."""
        return [error for *_, error in sorted(self._errors, key=itemgetter(0, 1))]
