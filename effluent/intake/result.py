"""Laboratory results of a file, column by column, with every bad cell named."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from effluent.errors import RowError
from effluent.intake.column import column_memos
from effluent.intake.fault import Faults
from effluent.intake.grid import Grid, Gridder
from effluent.intake.instant import Clock
from effluent.intake.layout import FIELDS, PLAIN, Layout, zone
from effluent.intake.memo import Memo
from effluent.intake.plan import Key, Plan, Planner
from effluent.intake.table import Table, open_table
from effluent.intake.value import ValueReader

__all__ = ["COLUMNS", "ResultChunk", "ResultReader", "read_cells", "read_results"]

COLUMNS = (
    "sample", "analyte", "fraction", "text", "unit", "qualifier", "number", "value", "canonical_unit", "flag",
    "detection_limit", "reporting_limit", "reporting_value", "dilution_factor", "uncertainty", "density",
    "test_method", "analysed_at", "laboratory", "report", "replicate", "reissue_of", "file_row",
)  # fmt: skip
"""Names of the columns of a `ResultChunk`: fields of `effluent.domain.Result`, and ``reissue_of``."""


@dataclass(frozen=True)
class ResultChunk:
    """Some results of a file.

    ``columns`` has one list for each name of `COLUMNS`, all of one length. ``errors`` names every bad
    cell; ``bad`` has the places in the columns of the results they concern, whose other cells can still
    be looked at. ``headings`` gives the file's heading for each of our names, for whoever finds more
    that is wrong; ``skipped`` counts the rows that are no results, ``share`` how much of the file is read.
    """

    columns: dict[str, list[Any]]
    errors: list[RowError]
    bad: frozenset[int]
    headings: Mapping[str, str]
    skipped: int
    share: float

    def __len__(self) -> int:
        return len(self.columns["file_row"])


class ResultReader:
    """An opened laboratory file whose columns are understood; every call of `chunks` reads it anew.

    Parameters
    ----------
    path : Path
        CSV or XLSX.
    layout : Layout
        `effluent.intake.layout.PLAIN` or a mapping file's.
    time_zone : str
        IANA name of the zone of local times, unless the layout names one.

    Raises
    ------
    FileMissing, ValueRefused
        If the file is no table, or its headings and the layout do not agree.
    """

    def __init__(self, path: Path, layout: Layout, *, time_zone: str) -> None:
        self.table = _open(path, layout)
        self.layout = layout.bind(self.table.headings, path.name)
        self.time_zone = self.layout.time_zone or time_zone
        self._clock = Clock(zone(self.time_zone), layout.date_format)

    def chunks(self) -> Iterator[ResultChunk]:
        """Yield the results in chunks of bounded size.

        Raises
        ------
        ValueRefused
            If the file breaks off as a table. Bad cells are not raised: they stand in ``errors``.
        """
        gridder = Gridder(self.table, self.layout)
        reading = _Reading(gridder.heading, self.layout, self._clock)
        for grid in gridder.grids():
            yield reading.chunk(grid)


def read_results(path: Path, layout: Layout, *, time_zone: str) -> Iterator[ResultChunk]:
    """Yield the results of a laboratory file in chunks of bounded size.

    Parameters, and what is raised, are those of `ResultReader`.
    """
    return ResultReader(path, layout, time_zone=time_zone).chunks()


def read_cells(cells: Mapping[str, str], *, time_zone: str) -> ResultChunk:
    """Return one result whose cells are given under our own names, read as those of a file are.

    Raises
    ------
    ValueRefused
        If a name is not one of ours, or a required cell is not given. Bad cells are not raised.
    """
    layout = PLAIN.bind(cells, "the result")
    grid = Grid({name: [cell] for name, cell in cells.items()}, [1], ["value"], [], 0, 1.0)
    return _Reading(str, layout, Clock(zone(time_zone))).chunk(grid)


def _open(path: Path, layout: Layout) -> Table:
    return open_table(
        path,
        encoding=layout.encoding,
        delimiter=layout.delimiter,
        sheet=layout.sheet,
        skip_rows=layout.skip_rows,
    )


class _Reading:
    """Reads grid after grid and remembers the cells it has seen."""

    def __init__(self, heading: Callable[[str], str], layout: Layout, clock: Clock) -> None:
        self._headings = {name: heading(name) for name in FIELDS}
        self._wide_names = frozenset(name for facts in layout.wide.values() for name in facts)
        self._memos = column_memos(layout.decimal, clock)
        self._planner = Planner(layout.constants.get("fraction", ""))
        self._plans: Memo[Key, Plan] = Memo(self._planner.plan, Plan())
        self._values = ValueReader(layout.decimal)

    def chunk(self, grid: Grid) -> ResultChunk:
        """Read one grid."""
        faults = Faults(grid, self._headings, self._wide_names)
        columns = self._simple(grid, faults)
        plans = self._plan_columns(columns, grid, faults)
        self._values.add_values(columns, plans, faults)
        self._values.add_limits(columns, plans, faults)
        return ResultChunk(
            {name: columns[name] for name in COLUMNS},
            faults.sorted(),
            frozenset(faults.places),
            self._headings,
            grid.skipped,
            grid.share,
        )

    def _simple(self, grid: Grid, faults: Faults) -> dict[str, list[Any]]:
        """Read the columns that need nothing from their neighbours."""
        columns: dict[str, list[Any]] = {
            "file_row": list(grid.numbers),
            "text": list(map(str.strip, grid.column("value"))),
        }
        for name, memo in self._memos.items():
            if name not in grid.cells:
                columns[name] = [memo[""]] * len(grid.numbers)
                continue
            columns[name] = memo.column(grid.cells[name])
            faults.add_refused(name, grid.cells[name], memo)
        return columns

    def _plan_columns(self, columns: dict[str, list[Any]], grid: Grid, faults: Faults) -> list[Plan]:
        """Read analyte, unit, fraction and density together."""
        keys = zip(*(grid.column(name) for name in ("analyte", "unit", "fraction", "density")), strict=True)
        plans = self._plans.column(keys)
        columns["analyte"] = [plan.analyte for plan in plans]
        columns["fraction"] = [plan.fraction for plan in plans]
        columns["unit"] = [plan.unit for plan in plans]
        columns["canonical_unit"] = [plan.canonical_unit for plan in plans]
        columns["density"] = [plan.density for plan in plans]
        if self._planner.any_problems:
            for place, plan in enumerate(plans):
                for name, reason in plan.problems:
                    faults.add(place, name, reason)
        return plans
