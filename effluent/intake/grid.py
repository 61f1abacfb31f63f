"""A block of a laboratory's rows, turned into columns under our names."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import compress

from effluent.errors import RowError
from effluent.intake.layout import FIELDS, Layout
from effluent.intake.table import Block, Table

__all__ = ["Grid", "Gridder"]

_Unfolded = tuple[dict[str, Sequence[str]], Sequence[int], Sequence[str]]


@dataclass(frozen=True)
class Grid:
    """Cells as written, one list a column of `effluent.intake.layout.FIELDS` that is given at all.

    ``numbers`` has the row of the file of each result; ``headings`` the heading its value stands under,
    which differs within a row of a wide file.
    """

    cells: Mapping[str, Sequence[str]]
    numbers: Sequence[int]
    headings: Sequence[str]
    errors: list[RowError]
    skipped: int
    share: float

    def column(self, name: str) -> Sequence[str]:
        """Return a column, empty cells where it is not given."""
        return self.cells[name] if name in self.cells else [""] * len(self.numbers)


class Gridder:
    """Turns blocks of one table into grids, as its bound layout says."""

    def __init__(self, table: Table, layout: Layout) -> None:
        self._table = table
        self._layout = layout
        index = {heading: place for place, heading in enumerate(table.headings) if heading}
        self._places = {ours: index[theirs] for ours, theirs in layout.columns.items()}
        self._skip = {index[heading]: cells for heading, cells in layout.skip.items()}
        self._wide = {index[heading]: facts for heading, facts in layout.wide.items()}

    def heading(self, name: str) -> str:
        """Return the heading of one of our columns, or where its constant stands."""
        if name in self._layout.columns:
            return self._layout.columns[name]
        return f"{name} (constant of the mapping file)" if name in self._layout.constants else name

    def grids(self) -> Iterator[Grid]:
        """Yield the results of the file, block by block."""
        for block in self._table.blocks():
            columns, numbers = self._kept(block)
            skipped = len(block.numbers) - len(numbers)
            unfold = self._wide_cells if self._wide else self._cells
            cells, numbers, headings = unfold(columns, numbers)
            yield Grid(cells, numbers, headings, block.errors, skipped, block.share)

    def _kept(self, block: Block) -> tuple[list[Sequence[str]], Sequence[int]]:
        """Leave out the rows that the layout says are no results."""
        if not self._skip:
            return block.columns, block.numbers
        kept = [True] * len(block.numbers)
        for place, cells in self._skip.items():
            kept = [
                keep and cell.strip() not in cells
                for keep, cell in zip(kept, block.columns[place], strict=True)
            ]
        return [list(compress(column, kept)) for column in block.columns], list(compress(block.numbers, kept))

    def _cells(self, columns: list[Sequence[str]], numbers: Sequence[int]) -> _Unfolded:
        cells = {name: columns[place] for name, place in self._places.items()}
        return self._filled(cells, len(numbers)), numbers, [self.heading("value")] * len(numbers)

    def _wide_cells(self, columns: list[Sequence[str]], numbers: Sequence[int]) -> _Unfolded:
        """Make one result of each cell that is filled in a column of one analyte."""
        found = [
            (at, place) for at in range(len(numbers)) for place in self._wide if columns[place][at].strip()
        ]
        given: dict[str, Sequence[str]] = {
            name: [columns[place][at] for at, _ in found] for name, place in self._places.items()
        }
        cells = self._filled(given, len(found))
        for name in FIELDS:
            if any(name in facts for facts in self._wide.values()):
                under = cells.get(name, [""] * len(found))
                cells[name] = [
                    self._wide[place].get(name, cell) for (_, place), cell in zip(found, under, strict=True)
                ]
        cells["value"] = [columns[place][at] for at, place in found]
        headings = [self._table.headings[place] for _, place in found]
        return cells, [numbers[at] for at, _ in found], headings

    def _filled(self, cells: dict[str, Sequence[str]], count: int) -> dict[str, Sequence[str]]:
        """Fill empty cells and absent columns with the constants; fractions come later.

        A fraction in the analyte's own name counts more than a constant.
        """
        for name, constant in self._layout.constants.items():
            if name == "fraction":
                continue
            if name in cells:
                cells[name] = [cell if cell.strip() else constant for cell in cells[name]]
            else:
                cells[name] = [constant] * count
        return cells
