from __future__ import annotations

import json
from pathlib import Path
from types import SimpleNamespace
from typing import Any

import pytest
from click.testing import CliRunner

from effluent.__main__ import run
from effluent.cli import register
from effluent.domain import Person, Point, PointKind, Site
from effluent.errors import RecordMissing
from effluent.services.ledger import create
from effluent.settings import CAUTION
from tests.unit.cli.conftest import Noted

ANA = Person(code="AM", name="Ana Moreira")


def version(number: int, value: Any, *, voided: bool = False, reason: str = "") -> SimpleNamespace:
    at = f"2026-03-0{number}T09:00:00Z"
    entry = SimpleNamespace(sequence=number * 10, recorded_at=at, recorded_by="AM", reason=reason)
    return SimpleNamespace(number=number, voided=voided, entry=entry, value=value)


def shown() -> SimpleNamespace:
    amended = Person(code="AM", name="Ana Moreira", role="supervisor")
    versions = (
        version(1, ANA),
        version(2, amended, reason="left out"),
        version(3, amended, voided=True, reason="twice"),
    )
    return SimpleNamespace(value=amended, versions=versions, voided=True)


def test_add_records_the_value(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["add"] = "AM"
    assert run(["person", "add", "AM", "--name", "Ana Moreira", "--ledger", "b.ledger"]) == 0
    assert noted.calls == [("open", "b.ledger"), ("add", "book", ANA, {"by": "AM", "reason": ""})]
    assert capsys.readouterr().out == "person AM is recorded\n"


def test_point_takes_its_kind_by_a_beginning(noted: Noted) -> None:
    noted.answers["add"] = "P1"
    run(["point", "add", "P1", "--site", "LIS", "--name", "pit", "--kind", "sewer", "--reason", "new"])
    point = Point(code="P1", site="LIS", name="pit", kind=PointKind.SEWER)
    assert noted.calls[1] == ("add", "book", point, {"by": "AM", "reason": "new"})


def test_list_is_a_table_with_the_caution(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["listing"] = (ANA, Person(code="東", name="X"))
    assert run(["person", "list", "--as-of", "7"]) == 0
    assert noted.calls[1] == ("listing", "book", "person", {"as_of": "7"})
    assert capsys.readouterr().out.splitlines() == [
        "code  name",
        "----  -----------",
        "AM    Ana Moreira",
        "東    X",
        "",
        CAUTION,
    ]


def test_list_of_nothing_says_so(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["listing"] = ()
    run(["site", "list"])
    assert capsys.readouterr().out == f"no site is recorded\n\n{CAUTION}\n"


def test_list_as_json_holds_every_field(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["listing"] = (ANA,)
    run(["person", "list", "--json"])
    assert json.loads(capsys.readouterr().out) == {
        "noun": "person",
        "as_of": None,
        "records": [{"code": "AM", "name": "Ana Moreira", "role": ""}],
        "caution": CAUTION,
    }


def test_show_tells_what_each_version_changed(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["show"] = shown()
    assert run(["person", "show", "AM"]) == 0
    assert capsys.readouterr().out.splitlines() == [
        "person AM (void)",
        "name: Ana Moreira",
        "role: supervisor",
        "",
        "version  entry  recorded at           by  reason    what",
        "-------  -----  --------------------  --  --------  ---------------------------",
        "1        10     2026-03-01 09:00 UTC  AM            first recorded",
        "2        20     2026-03-02 09:00 UTC  AM  left out  role: nothing -> supervisor",
        "3        30     2026-03-03 09:00 UTC  AM  twice     voided",
        "",
        CAUTION,
    ]


def test_show_as_json_holds_every_version(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["show"] = shown()
    run(["person", "show", "AM", "--json", "--as-of", "2026-03-05"])
    answer = json.loads(capsys.readouterr().out)
    assert list(answer) == ["noun", "as_of", "voided", "record", "versions", "caution"]
    assert answer["versions"][1] == {
        "version": 2,
        "voided": False,
        "entry": 20,
        "recorded_at": "2026-03-02T09:00:00Z",
        "by": "AM",
        "reason": "left out",
        "record": {"code": "AM", "name": "Ana Moreira", "role": "supervisor"},
    }


def test_amend_passes_on_the_changes(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    run(["person", "amend", "AM", "--name", "Ana M.", "--clear", "role", "--reason", "married"])
    changed = {"name": "Ana M.", "role": ""}
    assert noted.calls[1] == ("amend", "book", "person", "AM", changed, {"by": "AM", "reason": "married"})
    assert capsys.readouterr().out == "person AM is amended: name, role\n"


def test_amend_without_a_change_opens_no_ledger(noted: Noted) -> None:
    assert run(["person", "amend", "AM", "--reason", "r"]) == 2
    assert noted.calls == []


def test_void_needs_a_reason(noted: Noted) -> None:
    command = register.void_command("site", Site)
    assert CliRunner().invoke(command, ["LIS"]).exit_code == 2
    assert CliRunner().invoke(command, ["LIS", "--reason", "twice"]).output == "site LIS is void\n"
    assert noted.calls[1] == ("void", "book", "site", "LIS", {"by": "AM", "reason": "twice"})


def test_missing_record_is_one_line(noted: Noted, capsys: pytest.CaptureFixture[str]) -> None:
    noted.answers["show"] = RecordMissing("person", "XX", "see: effluent person list")
    assert run(["person", "show", "XX"]) == 3
    assert capsys.readouterr().err == "E201: no person 'XX' in this ledger: see: effluent person list\n"


@pytest.mark.parametrize("code", ["\x1b[2J", "a\nb", "\udc80", "x" * 10_000_000, ""], ids=range(5))
@pytest.mark.parametrize("verb", ["add", "show", "amend"])
def test_hostile_code_is_refused(
    noted: Noted, capsys: pytest.CaptureFixture[str], verb: str, code: str
) -> None:
    assert run(["person", verb, code]) == 2
    complaint = capsys.readouterr().err.splitlines()
    assert complaint[-1].startswith("Error: Invalid value for 'CODE': ")
    assert len(complaint) == 4
    assert all(line.isprintable() and len(line) < 1200 for line in complaint)
    assert noted.calls == []


def test_container_takes_further_verbs() -> None:
    group = register.register_group("container", Site, commands=[])
    group.command("contents")(lambda: None)
    assert list(group.commands) == ["contents"]


def test_amended_site_reads_back_from_a_real_ledger(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    place = str(tmp_path / "a.ledger")
    create(place, ANA)
    common = ["--ledger", place, "--by", "AM"]
    site = ["--name", "Station", "--operator", "Invented Air", "--address", "Apron", "--time-zone", "UTC"]
    assert run(["site", "add", "LIS", *site, *common]) == 0
    assert run(["site", "amend", "LIS", "--phone", "+1", "--reason", "left out", *common]) == 0
    capsys.readouterr()
    assert run(["site", "show", "LIS", "--json", "--ledger", place]) == 0
    versions = json.loads(capsys.readouterr().out)["versions"]
    assert [(v["version"], v["entry"], v["record"]["phone"]) for v in versions] == [(1, 2, ""), (2, 3, "+1")]
