"""The one check command stops where it should and closes on pytest's summary."""

from __future__ import annotations

import sys

import pytest

from tests import __main__ as check


def python(code: str) -> list[str]:
    return [sys.executable, "-c", code]


@pytest.fixture
def passing(monkeypatch: pytest.MonkeyPatch) -> pytest.MonkeyPatch:
    """Steps, tests and coverage that pass, for a test to break one of them."""
    monkeypatch.setenv("COVERAGE_FILE", "")
    monkeypatch.setattr(check, "STEPS", {"lint": python(""), "types": python("")})
    monkeypatch.setattr(check, "TESTS", python("print('dots'); print('2 passed')"))
    monkeypatch.setattr(check, "coverage_of", lambda part, floor: 0)
    return monkeypatch


def test_run_closes_on_the_summary(passing: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    assert check.main() == 0
    shown = capsys.readouterr().out.splitlines()
    assert shown[:4] == ["== lint", "== types", "== tests", "dots"]
    assert shown[-1] == "2 passed"


def test_first_failing_step_ends_the_run(
    passing: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    passing.setitem(check.STEPS, "lint", python("raise SystemExit(7)"))
    assert check.main() == 7
    assert capsys.readouterr().out == "== lint\n"


def test_failing_tests_end_the_run_on_their_summary(
    passing: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    passing.setattr(check, "TESTS", python("print('1 failed'); raise SystemExit(1)"))
    assert check.main() == 1
    assert capsys.readouterr().out == "== lint\n== types\n== tests\n1 failed\n"


def test_coverage_below_its_floor_fails_the_run(passing: pytest.MonkeyPatch) -> None:
    passing.setattr(check, "coverage_of", lambda part, floor: 2 if part == "effluent/calc" else 0)
    assert check.main() == 2
