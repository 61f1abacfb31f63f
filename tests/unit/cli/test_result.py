from __future__ import annotations

import json
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.cli import result as commands
from effluent.settings import CAUTION
from tests.world import add_result, add_sample, world

ROWS = "sample,analyte,fraction,value,unit,analysed_at\nS-0001,pH,,7.1,,2026-03-04 09:00\n"


@pytest.fixture
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with a ledger that has one sample, and a laboratory file about it."""
    place = str(tmp_path / "a.ledger")
    with world(place) as book:
        add_sample(book)
    monkeypatch.setenv("EFFLUENT_LEDGER", place)
    monkeypatch.setenv("EFFLUENT_BY", "RS")
    (tmp_path / "lab.csv").write_text(ROWS, encoding="utf-8")
    return tmp_path


def test_import_says_what_was_recorded(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["result", "import", str(folder / "lab.csv")]) == 0
    assert capsys.readouterr() == (
        f"file F-0001: lab.csv\n1 result is recorded, number 1\n\n{CAUTION}\n",
        "",
    )


def test_import_as_json(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    run(["result", "import", str(folder / "lab.csv"), "--json"])
    answer = json.loads(capsys.readouterr().out)
    assert (answer["results"], answer["files"]) == (1, [{"code": "F-0001", "name": "lab.csv"}])


def test_explain_records_nothing(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["result", "import", str(folder / "lab.csv"), "--explain"]) == 0
    said = capsys.readouterr().out
    assert "'value' is value" in said
    assert "nothing was recorded" in said
    run(["result", "list"])
    assert capsys.readouterr().out.startswith("no result is recorded")


def test_explain_as_json(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    run(["result", "import", str(folder / "lab.csv"), "--explain", "--json"])
    assert json.loads(capsys.readouterr().out)["files"][0]["columns"]["value"] == "value"


def test_a_refused_file_names_its_rows(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (folder / "bad.csv").write_text(ROWS.replace("S-0001", "S-0002"), encoding="utf-8")
    assert run(["result", "import", str(folder / "bad.csv")]) == 2
    assert capsys.readouterr().err.splitlines() == [
        "E104: bad.csv: 1 bad cell; nothing was recorded",
        "  row 2, sample 'S-0002': no such sample in this ledger; did you mean S-0001?",
    ]


def test_entered_by_hand_and_listed_with_its_holding_time(
    folder: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    entry = ["--sample", "S-0001", "--analyte", "pH", "--value", "7.1", "--analysed-at", "2026-03-04"]
    assert run(["result", "enter", *entry]) == 0
    assert capsys.readouterr().out == "result 1 is recorded\n"
    run(["result", "list", "--container", "T-1", "--since", "2026-03-02", "--analyte", "pH"])
    row = capsys.readouterr().out.splitlines()[2]
    assert row.split() == ["1", "S-0001", "2026-03-02", "pH", "total", "7.1", "2026-03-04", "1", "EXCEEDED"]


def test_list_as_json(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    run(["result", "import", str(folder / "lab.csv")])
    capsys.readouterr()
    run(["result", "list", "--json"])
    listed = json.loads(capsys.readouterr().out)["results"][0]
    assert (listed["result"]["text"], listed["outside_holding_time"]) == ("7.1", True)


def test_exports_carry_no_formula(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    with world(str(folder / "b.ledger")) as book:
        add_result(book, add_sample(book), "zinc", "1", "mg/L", report="=1+1")
    out = ["--csv", str(folder / "out.csv"), "--xlsx", str(folder / "out.xlsx")]
    assert run(["result", "list", "--ledger", str(folder / "b.ledger"), *out]) == 0
    assert capsys.readouterr().out == ""
    assert ",'=1+1," in (folder / "out.csv").read_text(encoding="utf-8-sig")
    assert (folder / "out.xlsx").stat().st_size > 0
    assert run(["result", "list", *out]) == 4


def test_a_voided_result_is_gone(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    run(["result", "import", str(folder / "lab.csv")])
    assert run(["result", "void", "1", "--reason", "wrong bottle"]) == 0
    assert run(["result", "void", "1", "--reason", "again"]) == 3
    assert "no result 1 in this ledger" in capsys.readouterr().err


def test_a_bar_is_drawn_on_a_terminal_only(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    with commands.progress_bar() as progress:
        assert progress is None
    monkeypatch.setattr("sys.stderr.isatty", lambda: True)
    with commands.progress_bar() as progress:
        assert progress is not None
        for name, share in (("a.csv", 0.5), ("a.csv", 1.0), ("b.csv", 0.1)):
            progress(name, share)
    assert capsys.readouterr().out == ""


def test_decimal_comma_is_an_option(folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["result", "import", str(folder / "lab.csv"), "--decimal-comma", "--explain"]) == 0
    assert "a comma is the decimal mark" in capsys.readouterr().out
