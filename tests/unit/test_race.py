"""The bench measures what it says."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from tests.bench.race import Figure, Race, Side, Work, measure, run
from tests.docs.source import ROOT


def python(code: str) -> Side:
    return Side([sys.executable, "-c", code])


def a_work(ours: str, *, budget: float = 2.0, most_mib: float | None = None) -> Work:
    return Work(
        "a work", budget, most_mib, lambda folder, rows: Race(python("print('seconds 2')"), python(ours))
    )


def test_side_that_times_itself_is_believed() -> None:
    figure = measure(a_work("print('seconds 3')"), rows=1, turns=1)
    assert (figure.floor_s, figure.ours_s, figure.ratio) == (2, 3, 1.5)


def test_whole_process_counts_otherwise() -> None:
    seconds, _ = run(python("import time; time.sleep(0.3)"))
    assert 0.3 <= seconds < 10


def test_peak_is_of_the_process_measured() -> None:
    """Measured from a small process, as the bench is: a caller's own size would count as the least peak."""
    held = [sys.executable, "-c", "held = bytes(range(256)) * 1_200_000"]  # 293 MiB and the interpreter
    small = f"from tests.bench.race import Side, run; print(run(Side({held!r}))[1])"
    done = subprocess.run([sys.executable, "-c", small], cwd=ROOT, capture_output=True, text=True, check=True)
    assert 293 <= float(done.stdout) < 330


def test_failing_side_is_an_error_with_what_it_said() -> None:
    with pytest.raises(RuntimeError, match="no such row"):
        run(python("raise SystemExit('no such row')"))


def test_before_runs_ahead_of_each_turn(tmp_path: Path) -> None:
    count: list[int] = []
    side = Side([sys.executable, "-c", "pass"], before=lambda: count.append(1))
    measure(Work("", 9.0, None, lambda folder, rows: Race(side, side)), rows=1, turns=2)
    assert len(count) == 4


@pytest.mark.parametrize(
    ("ours_s", "peak_mib", "over"), [(4.0, 100.0, False), (4.1, 100.0, True), (4.0, 100.1, True)]
)
def test_budget_holds_up_to_its_edge(ours_s: float, peak_mib: float, over: bool) -> None:
    assert Figure(a_work("", most_mib=100), 2.0, ours_s, peak_mib).is_over is over
