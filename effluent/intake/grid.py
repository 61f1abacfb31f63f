"""A block of a laboratory's rows, turned into columns under our names."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from operator import itemgetter

from effluent.errors import RowError
from effluent.intake.layout import FIELDS, Layout
from effluent.intake.table import Block, Table

__all__ = ["Grid", "Gridder"]


@dataclass(frozen=True)
class Grid:
    """Cells as written, one list a column of `effluent.intake.layout.FIELDS` that is given at all.

    ``numbers`` has the row of the file of each result; ``headings`` the heading its value stands under,
    which differs within a row of a wide file.
    """

    cells: Mapping[str, list[str]]
    numbers: Sequence[int]
    headings: Sequence[str]
    errors: list[RowError]
    skipped: int
    share: float

    def column(self, name: str) -> list[str]:
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
        self.fraction_constant = layout.constants.get("fraction", "")

    def heading(self, name: str) -> str:
        """Return the heading of one of our columns, or where its constant stands."""
        if name in self._layout.columns:
            return self._layout.columns[name]
        return f"{name} (constant of the mapping file)" if name in self._layout.constants else name

    def grids(self) -> Iterator[Grid]:
        """Yield the results of the file, block by block."""
        for block in self._table.blocks():
            rows, numbers = self._kept(block)
            skipped = len(block.rows) - len(rows)
            cells, numbers, headings = (
                self._wide_cells(rows, numbers) if self._wide else self._cells(rows, numbers)
            )
            yield Grid(cells, numbers, headings, block.errors, skipped, block.share)

    def _kept(self, block: Block) -> tuple[list[list[str]], Sequence[int]]:
        """Leave out the rows that the layout says are no results."""
        if not self._skip:
            return block.rows, block.numbers
        skip = self._skip.items()
        kept = [
            (row, number)
            for row, number in zip(block.rows, block.numbers, strict=True)
            if not any(row[place].strip() in cells for place, cells in skip)
        ]
        return [row for row, _ in kept], [number for _, number in kept]

    def _cells(
        self, rows: list[list[str]], numbers: Sequence[int]
    ) -> tuple[dict[str, list[str]], Sequence[int], Sequence[str]]:
        cells = {name: list(map(itemgetter(place), rows)) for name, place in self._places.items()}
        return self._filled(cells, len(rows)), numbers, [self.heading("value")] * len(rows)

    def _wide_cells(
        self, rows: list[list[str]], numbers: Sequence[int]
    ) -> tuple[dict[str, list[str]], Sequence[int], Sequence[str]]:
        """Make one result of each cell that is filled in a column of one analyte."""
        places = list(self._wide)
        found = [(at, place) for at, row in enumerate(rows) for place in places if row[place].strip()]
        cells = {name: [rows[at][place] for at, _ in found] for name, place in self._places.items()}
        cells = self._filled(cells, len(found))
        for name in FIELDS:
            if any(name in facts for facts in self._wide.values()):
                under = cells.get(name, [""] * len(found))
                cells[name] = [
                    self._wide[place].get(name, cell) for (_, place), cell in zip(found, under, strict=True)
                ]
        cells["value"] = [rows[at][place] for at, place in found]
        headings = [self._table.headings[place] for _, place in found]
        return cells, [numbers[at] for at, _ in found], headings

    def _filled(self, cells: dict[str, list[str]], count: int) -> dict[str, list[str]]:
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
