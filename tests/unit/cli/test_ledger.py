from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.services.ledger import open_ledger
from effluent.settings import CAUTION
from tests.fault.book import NUMBER, filled_ledger, tamper


@pytest.fixture
def place(tmp_path: Path) -> str:
    path = str(tmp_path / "ledger.effluent")
    filled_ledger(path).close()
    return path


def said(capsys: pytest.CaptureFixture[str], *arguments: str, status: int = 0) -> str:
    capsys.readouterr()
    assert run(arguments) == status
    return capsys.readouterr().out


def test_create_says_what_it_made(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    answer = said(
        capsys, *["ledger", "create", "--by", "MS", "--name", "Mira", "--ledger"], str(tmp_path / "new")
    )
    assert re.fullmatch(r"ledger [0-9a-f]{12} is made; its first entry records person MS\n", answer)


def test_verify_shows_the_head_and_that_all_holds(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    lines = said(capsys, "ledger", "verify", "--ledger", place).splitlines()
    assert lines[:2] == [f"ledger:      {NUMBER}", "entries:     7"]
    assert re.fullmatch("head digest: [0-9a-f]{64}", lines[2])
    assert lines[3:] == ["verified:    everything holds", "", CAUTION]


def test_verify_lists_what_does_not_hold(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    tamper(open_ledger(place), "UPDATE site SET name = 'x'")
    lines = said(capsys, "ledger", "verify", "--ledger", place, status=1).splitlines()
    assert lines[3:5] == ["verified:    IT DOES NOT HOLD", "  entry 2: changed row: site row 1"]


def test_verify_answers_as_json(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    answer = json.loads(said(capsys, "ledger", "verify", "--json", "--ledger", place))
    digest = answer["digest"]
    assert answer == {
        "ledger": NUMBER,
        "entries": 7,
        "digest": digest,
        "witness": None,
        "holds": True,
        "findings": [],
        "caution": CAUTION,
    }
    held = said(capsys, "ledger", "verify", "--witness", f"7:{digest[:12]}", "--ledger", place)
    assert "verified:    everything holds, and so does the witness" in held
    other = said(
        capsys, "ledger", "verify", "--json", "--witness", "9:" + digest, "--ledger", place, status=1
    )
    assert json.loads(other)["findings"] == [
        {"entry": 9, "kind": "missing entry", "detail": "a page witnesses it"}
    ]


def test_history_lists_who_when_what_and_why(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    lines = said(capsys, "ledger", "history", "--as-of", "2", "--ledger", place).splitlines()
    heads = ["entry", "recorded at (UTC)", "by", "what", "brought", "digest", "why"]
    assert re.split(r" {2,}", lines[0]) == heads
    assert re.split(r" {2,}", lines[3])[2:5] == ["MS", "test", "1 record, 1 site"]
    assert lines[3].endswith("  because")
    assert lines[4:] == ["", CAUTION]


def test_history_answers_as_json(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    answer = json.loads(said(capsys, "ledger", "history", "--json", "--ledger", place))
    assert answer["entries"][4]["brought"] == {"result": 3}
    assert answer["entries"][1]["previous_digest"] == answer["entries"][0]["digest"]


def test_backup_and_restore_say_where_the_ledger_is(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    copy, restored = f"{place}.copy", f"{place}.restored"
    answer = said(capsys, "ledger", "backup", copy, "--ledger", place)
    assert answer.startswith(f"{copy} holds the ledger up to entry 7, digest ")
    answer = said(capsys, "ledger", "restore", copy, "--ledger", restored)
    assert answer == f"{restored} holds ledger {NUMBER} up to entry 7; it verifies\n"


def test_upgrade_of_a_ledger_at_the_head_says_so(place: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert said(capsys, "ledger", "upgrade", "--ledger", place).startswith("the ledger has the schema 2")
