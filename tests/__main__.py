"""The one check command: ``python -m tests``.

Format, lint, types, layers, then the tests in random order on two processes with branch coverage. The first
step that fails ends the run with its exit status; a run that reaches the tests closes on pytest's summary.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
BIN = Path(sys.executable).parent

STEPS = {
    "format": [sys.executable, "-m", "ruff", "format", "--check", "."],
    "lint": [sys.executable, "-m", "ruff", "check", "--output-format", "concise", "."],
    "types": [sys.executable, "-m", "mypy"],
    "layers": [str(BIN / "lint-imports"), "--no-logo"],
}
TESTS = [sys.executable, "-m", "pytest", "-n", "2", "--cov", "--cov-report="]
# Branch coverage in percent that each part must reach.
FLOORS = {"effluent": 95, "effluent/domain": 100, "effluent/calc": 100}


def heading(text: str) -> None:
    print(f"== {text}", flush=True)


def status_of(command: list[str]) -> int:
    return subprocess.run(command, cwd=ROOT, check=False).returncode


def run_tests() -> tuple[int, str]:
    """Show pytest's output as it comes, but keep its last line back, to close the run with."""
    closing = ""
    with subprocess.Popen(TESTS, cwd=ROOT, stdout=subprocess.PIPE, text=True) as pytest:
        assert pytest.stdout is not None
        for line in pytest.stdout:
            if closing:
                print(closing, end="", flush=True)
            closing = line
    return pytest.returncode, closing


def coverage_of(part: str, floor: int) -> int:
    report = [sys.executable, "-m", "coverage", "report", "--skip-covered", "--show-missing"]
    return status_of([*report, f"--include={part}/*", f"--fail-under={floor}"])


def check_coverage() -> int:
    for part, floor in FLOORS.items():
        heading(f"coverage of {part}, at least {floor} %")
        if status := coverage_of(part, floor):
            return status
    return 0


def main() -> int:
    os.environ["COVERAGE_FILE"] = str(ROOT / ".coverage")
    for name, command in STEPS.items():
        heading(name)
        if status := status_of(command):
            return status
    heading("tests")
    status, closing = run_tests()
    status = status or check_coverage()
    print(closing, end="", flush=True)
    return status


if __name__ == "__main__":
    sys.exit(main())
