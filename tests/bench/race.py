"""Measure a work against its floor, turn by turn, each turn in a process of its own.

A module of this folder registers a work so::

    @work("import a CSV", budget=2.0, most_mib=400)
    def import_csv(folder: Path, rows: int) -> Race:
        ...  # make the input once; this is not measured
        return Race(floor=Side([sys.executable, ...]), ours=Side([...], before=remove_the_last_ledger))

and is named in ``tests/bench/__main__.py``. For growth, the floor is our own work on a tenth of the rows.
"""

from __future__ import annotations

import os
import re
import statistics
import subprocess
import tempfile
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

__all__ = ["WORKS", "Figure", "Race", "Side", "Work", "measure", "work"]


@dataclass(frozen=True)
class Side:
    """A command; `before` runs ahead of each turn and is not measured.

    The whole process counts, unless the last line it prints is ``seconds 0.123``: then that counts.
    """

    command: list[str]
    before: Callable[[], object] | None = None


@dataclass(frozen=True)
class Race:
    """The two commands that do the same job."""

    floor: Side
    ours: Side


Prepare = Callable[[Path, int], Race]


@dataclass(frozen=True)
class Work:
    """A job with its budget: a ratio to the floor, and MiB at the peak if they matter."""

    name: str
    budget: float
    most_mib: float | None
    prepare: Prepare


@dataclass(frozen=True)
class Figure:
    """What was measured: medians in seconds, and the highest peak of ours in MiB."""

    work: Work
    floor_s: float
    ours_s: float
    peak_mib: float

    @property
    def ratio(self) -> float:
        return self.ours_s / self.floor_s

    @property
    def is_over(self) -> bool:
        too_much = self.work.most_mib is not None and self.peak_mib > self.work.most_mib
        return too_much or self.ratio > self.work.budget


WORKS: dict[str, Work] = {}


def work(name: str, *, budget: float, most_mib: float | None = None) -> Callable[[Prepare], Prepare]:
    """Register the function that prepares this work."""

    def register(prepare: Prepare) -> Prepare:
        if name in WORKS:
            raise ValueError(f"two works are called {name!r}")
        WORKS[name] = Work(name, budget, most_mib, prepare)
        return prepare

    return register


def measure(chosen: Work, *, rows: int, turns: int) -> Figure:
    """Run floor and work alternately, so that a slow minute of the machine hits both."""
    with tempfile.TemporaryDirectory() as folder:
        race = chosen.prepare(Path(folder), rows)
        floor, ours = [], []
        for _ in range(turns):
            floor.append(run(race.floor))
            ours.append(run(race.ours))
    seconds = [statistics.median(turn[0] for turn in side) for side in (floor, ours)]
    return Figure(chosen, seconds[0], seconds[1], max(mib for _, mib in ours))


def run(side: Side) -> tuple[float, float]:
    """Return the seconds and the peak MiB of one turn.

    Linux counts the size of the caller as the least peak of a new process, so the bench stays small.
    """
    if side.before:
        side.before()
    with tempfile.TemporaryFile("w+") as said:
        start = time.perf_counter()
        process = subprocess.Popen(side.command, stdout=said, stderr=subprocess.STDOUT)
        _, status, usage = os.wait4(process.pid, 0)
        wall = time.perf_counter() - start
        process.returncode = os.waitstatus_to_exitcode(status)
        said.seek(0)
        text = said.read()
    if process.returncode:
        raise RuntimeError(f"{side.command} ended with {process.returncode}:\n{text}")
    own = re.search(r"^seconds (\S+)\s*\Z", text, flags=re.MULTILINE)
    return (float(own[1]) if own else wall), usage.ru_maxrss / 1024
