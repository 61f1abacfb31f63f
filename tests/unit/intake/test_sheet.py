import csv

import openpyxl
import pytest

from effluent.errors import FileMissing, StorageFailed, ValueRefused, WouldOverwrite
from effluent.intake.sheet import safe_cell, write_csv, write_xlsx

WRITERS = {"out.csv": write_csv, "out.xlsx": write_xlsx}


@pytest.mark.parametrize(
    "text", ["=1+1", "+cmd|' /C calc'!A0", "-2+3", "@SUM(A1)", "\t=1", "\r=1", "\n=1", " =1", "＝1"]
)
def test_formulas_are_led_in_by_an_apostrophe(text):
    assert safe_cell(text) == "'" + text


@pytest.mark.parametrize("text", ["", "-0.5", "+1.2e-3", "<0.005", "Cd", "a=b", "1-2", "µg/L"])
def test_numbers_and_plain_texts_stay_as_they_are(text):
    assert safe_cell(text) == text


def test_control_characters_are_taken_out():
    assert safe_cell("a\x00b\x1b=") == "ab="
    assert safe_cell("\x00=1") == "'=1"


def test_csv_reads_back(tmp_path):
    write_csv(tmp_path / "out.csv", ["Sample", "=Value"], [["S-1", 0.5], ['a "b"\nc', None], ["=1", "-1"]])
    with (tmp_path / "out.csv").open(encoding="utf-8-sig", newline="") as handle:
        assert list(csv.reader(handle)) == [
            ["Sample", "'=Value"], ["S-1", "0.5"], ['a "b"\nc', ""], ["'=1", "-1"],
        ]  # fmt: skip


def test_workbook_reads_back_without_formulas(tmp_path):
    write_xlsx(tmp_path / "out.xlsx", ["Sample", "Value"], [["=1+1", 0.5], ["https://example.org", None]])
    sheet = openpyxl.load_workbook(tmp_path / "out.xlsx").active
    assert [[cell.value for cell in row] for row in sheet] == [
        ["Sample", "Value"], ["'=1+1", 0.5], ["https://example.org", None],
    ]  # fmt: skip
    assert {cell.data_type for row in sheet for cell in row} == {"s", "n"}


def test_values_that_are_no_numbers_leave_a_cell_empty(tmp_path):
    write_xlsx(tmp_path / "out.xlsx", ["a"], [[float("nan")], [float("inf")], [1]])
    sheet = openpyxl.load_workbook(tmp_path / "out.xlsx").active
    assert [row[0].value for row in sheet] == ["a", None, None, 1]


@pytest.mark.parametrize("name", WRITERS)
def test_same_rows_give_the_same_bytes(tmp_path, name):
    for folder in ("one", "two"):
        (tmp_path / folder).mkdir()
        WRITERS[name](tmp_path / folder / name, ["a", "b"], [["x", 1], ["µ", 2.5]])
    assert (tmp_path / "one" / name).read_bytes() == (tmp_path / "two" / name).read_bytes()


@pytest.mark.parametrize("name", WRITERS)
def test_file_in_the_way_is_never_overwritten(tmp_path, name):
    (tmp_path / name).write_text("mine")
    with pytest.raises(WouldOverwrite):
        WRITERS[name](tmp_path / name, ["a"], [])
    assert (tmp_path / name).read_text() == "mine"


def test_file_that_appears_meanwhile_is_never_overwritten(tmp_path):
    def rows():
        (tmp_path / "out.csv").write_text("mine")
        yield ["x"]

    with pytest.raises(WouldOverwrite):
        write_csv(tmp_path / "out.csv", ["a"], rows())
    assert (tmp_path / "out.csv").read_text() == "mine"


@pytest.mark.parametrize("name", WRITERS)
def test_failure_half_way_leaves_nothing_behind(tmp_path, name):
    def rows():
        yield ["x"]
        raise OSError(28, "No space left on device")

    with pytest.raises(StorageFailed, match="No space left"):
        WRITERS[name](tmp_path / name, ["a"], rows())
    assert list(tmp_path.iterdir()) == []


def test_disk_without_links_gets_the_file_by_renaming(tmp_path, monkeypatch):
    def refuse(*_):
        raise PermissionError(1, "Operation not permitted")

    monkeypatch.setattr("os.link", refuse)
    write_csv(tmp_path / "out.csv", ["a"], [["x"]])
    assert [path.name for path in tmp_path.iterdir()] == ["out.csv"]


def test_missing_folder_is_named(tmp_path):
    with pytest.raises(FileMissing, match="make the folder first"):
        write_csv(tmp_path / "none" / "out.csv", ["a"], [])


def test_cell_too_long_for_a_sheet_is_refused(tmp_path):
    with pytest.raises(ValueRefused, match="32767 characters"):
        write_xlsx(tmp_path / "out.xlsx", ["a"], [["x" * 40_000]])
    assert list(tmp_path.iterdir()) == []


def test_more_rows_than_a_sheet_holds_are_refused(tmp_path, monkeypatch):
    monkeypatch.setattr("effluent.intake.sheet._MOST_ROWS", 3)
    with pytest.raises(ValueRefused, match="write CSV"):
        write_xlsx(tmp_path / "out.xlsx", ["a"], [["x"]] * 3)
