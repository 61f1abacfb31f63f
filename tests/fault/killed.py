"""Do a job in one process after another, each killed one step later, until one of them lives.

``python -m tests.fault.killed JOB FOLDER [STRIDE]``: each turn works in a copy of FOLDER/start, named after
the step, and prints the step and how it ended. A step is a statement, the moment before or after a commit, or
an operation on a file.
"""

from __future__ import annotations

import os
import shutil
import signal
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

from sqlalchemy import Engine, event
from sqlalchemy.dialects.sqlite.pysqlite import SQLiteDialect_pysqlite as Dialect

from effluent.services import ledger as service
from effluent.store import migration
from tests.fault.book import SITE, new_ledger, result

FILE_OPERATIONS = {"os.link", "os.remove", "os.rename", "sqlite3.connect"}
STATEMENTS = ("do_execute", "do_executemany", "do_execute_no_params")


def record(folder: Path) -> None:
    with service.open_ledger(str(folder / "ledger")) as ledger:
        ledger.write(lambda w: w.record(replace(SITE, code="SOU")), by="MS", action="add")


def measure(folder: Path) -> None:
    with service.open_ledger(str(folder / "ledger")) as ledger:
        ledger.write(lambda w: [w.add_result(result("1")) for _ in range(3)], by="MS", action="enter")


def create(folder: Path) -> None:
    new_ledger(str(folder / "new"))


def backup(folder: Path) -> None:
    with service.open_ledger(str(folder / "ledger")) as ledger:
        service.backup(ledger, str(folder / "new"))


def restore(folder: Path) -> None:
    service.restore(str(folder / "ledger"), str(folder / "new"))


def upgrade(folder: Path) -> None:
    migration._location = lambda: folder.parent / "later"  # type: ignore[assignment]
    service.upgrade(str(folder / "ledger"))


def count_down(steps: int) -> Callable[..., None]:
    """Return what dies at that many calls."""
    left = [steps]

    def step(*_: object) -> None:
        left[0] -= 1
        if left[0] == 0:
            os.kill(os.getpid(), signal.SIGKILL)

    return step


def watch(step: Callable[..., None]) -> None:
    for hook in STATEMENTS:
        event.listen(Engine, hook, step)
    commit = Dialect.do_commit

    def commit_between(self: Any, connection: Any) -> None:
        step()
        commit(self, connection)
        step()

    Dialect.do_commit = commit_between
    sys.addaudithook(lambda name, _: step() if name in FILE_OPERATIONS else None)


def turn(job: Callable[[Path], None], folder: Path, steps: int) -> int:
    """Return how a process ended that was to die at that step."""
    shutil.copytree(folder.parent / "start", folder)
    child = os.fork()
    if child == 0:
        watch(count_down(steps))
        job(folder)
        os._exit(0)
    return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])


def main() -> None:
    job, top = globals()[sys.argv[1]], Path(sys.argv[2])
    for steps in range(1, 1000, int(sys.argv[3]) if sys.argv[3:] else 1):
        status = turn(job, top / str(steps), steps)
        print(steps, status, flush=True)
        if status != -signal.SIGKILL:
            return


if __name__ == "__main__":
    main()
