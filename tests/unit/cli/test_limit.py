from __future__ import annotations

import json
from pathlib import Path

import pytest

from effluent.__main__ import run
from tests.world import world

DATED = ["--point", "SEW", "--effective-from", "2026-01-01", "--authority", "Board"]
ENTRY = ["limit", "enter", *DATED, "--analyte", "Cd", "--document", "permit", "--value"]
ADOPTION = ["limit", "adopt", "40CFR433.17/cadmium/daily", *DATED]


@pytest.fixture(autouse=True)
def _ledger(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    place = str(tmp_path / "a.ledger")
    with world(place):
        monkeypatch.setenv("EFFLUENT_LEDGER", place)
    monkeypatch.setenv("EFFLUENT_BY", "RS")


def listed(capsys: pytest.CaptureFixture[str]) -> list[dict[str, object]]:
    capsys.readouterr()
    assert run(["limit", "list", "--json"]) == 0
    limits: list[dict[str, object]] = json.loads(capsys.readouterr().out)["limits"]
    return limits


def test_enter_then_verify_by_another(capsys: pytest.CaptureFixture[str]) -> None:
    assert run([*ENTRY, "0.11 mg/L"]) == 0
    assert "limit L-0001 is recorded, not verified by a second person" in capsys.readouterr().out
    assert run(["limit", "verify", "L-0001"]) == 4
    assert "another person has to compare it with its source" in capsys.readouterr().err
    assert run(["limit", "verify", "L-0001", "--by", "JT"]) == 0
    assert listed(capsys)[0]["verified_by"] == "JT"


def test_a_wrong_unit_is_one_paragraph(capsys: pytest.CaptureFixture[str]) -> None:
    assert run([*ENTRY, "5 s.u."]) == 2
    assert capsys.readouterr().err.startswith("E103: 's.u.' cannot be converted to 'mg/L or mg/kg'")


def test_adopt_keeps_the_acknowledgement(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(ADOPTION) == 2
    said = ["--acknowledge", "permit, page 3", "--value", "0.1 mg/L", "--action-level", "0.05 mg/L"]
    assert run([*ADOPTION, *said]) == 0
    found = listed(capsys)[0]
    assert (found["value"], found["action_level"]) == ("0.1 mg/L", "0.05 mg/L")
    run(["limit", "show", "L-0001"])
    assert "acknowledged: permit, page 3" in capsys.readouterr().out


def test_amend_then_retire(capsys: pytest.CaptureFixture[str]) -> None:
    run([*ENTRY, "0.11 mg/L"])
    run(["limit", "verify", "L-0001", "--by", "JT"])
    assert run(["limit", "amend", "L-0001", "--value", "0.07 mg/L", "--reason", "misread"]) == 0
    assert capsys.readouterr().out.endswith("is amended: value; not verified by a second person\n")
    assert run(["limit", "retire", "L-0001", "--last-day", "2026-06-30", "--reason", "new permit"]) == 0
    found = listed(capsys)[0]
    assert (found["value"], found["effective_to"]) == ("0.07 mg/L", "2026-06-30")


def test_list_names_who_has_not_verified(capsys: pytest.CaptureFixture[str]) -> None:
    run(["limit", "list"])
    assert capsys.readouterr().out.startswith("no limit is recorded")
    run([*ENTRY, "0.11 mg/L"])
    capsys.readouterr()
    run(["limit", "list", "--point", "SEW", "--on", "2026-02-01"])
    assert capsys.readouterr().out.splitlines()[2].endswith("NOBODY YET")


def test_reference_needs_no_ledger(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.delenv("EFFLUENT_LEDGER")
    assert run(["limit", "reference", "40CFR433.17", "--analyte", "Cd"]) == 0
    said = capsys.readouterr().out
    assert "40CFR433.17/cadmium/daily  maximum  0.11 mg/L" in said
    assert "Reference only: a published table is not a permit." in said
    run(["limit", "reference", "40CFR403.5", "--analyte", "Cd"])
    assert capsys.readouterr().out.startswith("no published row")
    run(["limit", "reference", "40CFR403.5", "--json"])
    assert json.loads(capsys.readouterr().out)["rows"][0]["table"] == "40CFR403.5"
