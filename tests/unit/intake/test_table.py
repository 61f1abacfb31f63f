import zipfile
from datetime import datetime

import pytest
import xlsxwriter

from effluent.errors import FileMissing, ValueRefused
from effluent.intake.table import Table, open_table


def rows(table: Table) -> list[tuple[int, list[str]]]:
    return [
        (number, list(cells))
        for block in table.blocks()
        for number, *cells in zip(block.numbers, *block.columns, strict=True)
    ]


def write(path, text, encoding="utf-8", newline=""):
    path.write_text(text, encoding=encoding, newline=newline)
    return path


@pytest.fixture
def file(tmp_path):
    return tmp_path / "results.csv"


@pytest.mark.parametrize("mark", [",", ";", "\t", "|"])
def test_delimiter_is_found_from_the_heading_row(file, mark):
    write(file, f"Sample{mark}Value\nS-1{mark}0,5\n" if mark != "," else 'Sample,Value\nS-1,"0,5"\n')
    assert rows(open_table(file)) == [(2, ["S-1", "0,5"])]


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
def test_encoding_is_found_from_the_bytes(file, encoding):
    write(file, "Probe;Wert µg/l\nS-1;5\n", encoding)
    assert open_table(file).headings == ("Probe", "Wert µg/l")


def test_declared_encoding_is_used(file):
    write(file, "Sample;Name\nS-1;Жидкость\n", "cp1251")
    assert rows(open_table(file, encoding="cp1251")) == [(2, ["S-1", "Жидкость"])]


def test_unknown_encoding_is_refused(file):
    write(file, "a,b\n")
    with pytest.raises(ValueRefused, match="name one such as utf-8"):
        open_table(file, encoding="klingon")


def test_declared_encoding_that_does_not_fit_is_refused(file):
    write(file, "Probe;µ\n", "cp1252")
    with pytest.raises(ValueRefused, match="not utf-8 text; declare its encoding"):
        open_table(file, encoding="utf-8")


def test_rows_are_counted_as_a_spreadsheet_counts_them(file):
    write(file, 'a,b\n1,"two\nlines"\n\n,\n3,4\n')
    assert rows(open_table(file)) == [(2, ["1", "two\nlines"]), (5, ["3", "4"])]


def test_row_numbers_go_on_from_block_to_block(file):
    write(file, "# made up\n#\na,b\n" + "".join(f"{n},x\n" for n in range(4, 50_000)))
    table = open_table(file, skip_rows=2)
    assert len(list(table.blocks())) > 2
    assert [number for number, _ in rows(table)] == [int(row[0]) for _, row in rows(table)]


def test_rows_of_another_width_are_named(file):
    write(file, "a,b\n1\n1,2\n1,2,3\n1,2,,\n")
    (block,) = open_table(file).blocks()
    assert [(error.row, error.value) for error in block.errors] == [(2, "1"), (4, "1 | 2 | 3")]
    assert "it has 3 cells where the heading row has 2" in block.errors[1].reason
    assert list(block.numbers) == [3, 5]


def test_line_breaks_in_headings_count_as_blanks(file):
    write(file, 'a,"b\n(mg/L)",\n1,2,\n')
    assert open_table(file).headings == ("a", "b (mg/L)")


def test_repeated_heading_is_refused(file):
    write(file, "a,b,a\n1,2,3\n")
    with pytest.raises(ValueRefused, match="heading 'a' stands twice in row 1"):
        open_table(file)


def test_missing_file_is_named(file):
    with pytest.raises(FileMissing, match=r"results\.csv is not there"):
        open_table(file)


@pytest.mark.parametrize(
    ("content", "reason"),
    [
        (b"", "it is empty"),
        (b"a,b\n1,\0\n", "NUL"),
        (b"one column\n1\n", "no comma, semicolon, tab or bar"),
        (b"PK\x03\x04 cut short", "cut short or damaged"),
        (bytes.fromhex("d0cf11e0a1b11ae1") + b"x" * 600, "password-protected"),
        (b"a,b\n\x81\x8d,2\n", "not utf-8 or cp1252 text"),
        (b"\xff\xfea", "not utf-16 text"),
    ],
)
def test_what_is_no_table_is_refused(file, content, reason):
    file.write_bytes(content)
    with pytest.raises(ValueRefused, match=reason):
        open_table(file)


@pytest.mark.parametrize("body", ['1,"never closed\n2,3\n', '1,"two"x\n', f"1,{'9' * 200_000}\n"])
def test_broken_quotation_and_endless_cells_are_refused_with_their_line(file, body):
    write(file, "a,b\n" + body)
    with pytest.raises(ValueRefused, match=r"line \d+ breaks the table"):
        rows(open_table(file))


def test_heading_row_beyond_the_end_is_refused(file):
    write(file, "a,b\n1,2\n")
    with pytest.raises(ValueRefused, match=r"heading row|heading_row|skip_rows"):
        open_table(file, skip_rows=7)


def test_folder_is_not_a_file(tmp_path):
    with pytest.raises(FileMissing):
        open_table(tmp_path)


def test_sheet_of_a_text_file_is_refused(file):
    write(file, "a,b\n1,2\n")
    with pytest.raises(ValueRefused, match="has no sheets"):
        open_table(file, sheet="Results")


@pytest.mark.parametrize("name", ["book.xlsm", "book.xlsb", "book.xls"])
def test_macro_and_binary_workbooks_are_refused_by_name(tmp_path, name):
    (tmp_path / name).write_bytes(b"a,b\n1,2\n")
    with pytest.raises(ValueRefused, match="never opened"):
        open_table(tmp_path / name)


def test_macro_workbook_under_another_name_is_refused(tmp_path):
    path = tmp_path / "book.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("xl/workbook.xml", "")
        archive.writestr("xl/vbaProject.bin", "")
    with pytest.raises(ValueRefused, match="macros"):
        open_table(path)


def test_archive_that_is_no_workbook_is_refused(tmp_path):
    path = tmp_path / "results.csv"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("results.csv", "a,b\n1,2\n")
    with pytest.raises(ValueRefused, match="an archive but not a workbook"):
        open_table(path)


def test_workbook_that_unpacks_to_an_absurd_size_is_refused(tmp_path, monkeypatch):
    monkeypatch.setattr("effluent.intake.workbook._UNPACKED_BYTES", 100)
    with pytest.raises(ValueRefused, match="unpacks to more than"):
        open_table(book(tmp_path, {"Results": [["a", "b"]]}))


def book(folder, sheets, hidden=()):
    path = folder / "results.xlsx"
    with xlsxwriter.Workbook(path, {"default_date_format": "dd/mm/yyyy hh:mm"}) as workbook:
        for name, cells in sheets.items():
            sheet = workbook.add_worksheet(name)
            if name in hidden:
                sheet.hide()
            for number, row in enumerate(cells):
                sheet.write_row(number, 0, row)
    return path


def test_cells_of_a_workbook_come_as_they_show(tmp_path):
    shown = datetime.fromisoformat("2026-03-05T14:30")
    cells = [["a", "b", "c"], [0.1 + 0.2, 5, shown], [], [1e-7, True, "<0.5"]]
    assert rows(open_table(book(tmp_path, {"Results": cells}))) == [
        (2, ["0.3", "5", "2026-03-05T14:30:00"]),
        (4, ["1e-07", "TRUE", "<0.5"]),
    ]


def test_hidden_sheets_are_passed_over(tmp_path):
    path = book(tmp_path, {"Results": [["a", "b"], ["1", "2"]], "Lists": [["x", "y"]]}, hidden={"Lists"})
    assert open_table(path).headings == ("a", "b")


def test_choice_between_sheets_is_asked_for(tmp_path):
    path = book(tmp_path, {"Results": [["a", "b"]], "Blanks": [["x", "y"]]})
    with pytest.raises(ValueRefused, match="2 sheets; name one of Results, Blanks"):
        open_table(path)
    assert open_table(path, sheet="Blanks").headings == ("x", "y")
    with pytest.raises(ValueRefused, match="has Results, Blanks"):
        open_table(path, sheet="Result")


@pytest.mark.parametrize("share", [0.1, 0.5, 0.9, 0.99])
def test_workbook_cut_short_is_refused(tmp_path, share):
    path = book(tmp_path, {"Results": [["a", "b"], *[["1", "2"]] * 50]})
    path.write_bytes(path.read_bytes()[: int(path.stat().st_size * share)])
    with pytest.raises(ValueRefused, match="cut short or damaged"):
        open_table(path)


def rewritten(folder, member, content):
    """Return a workbook with one of its parts replaced."""
    whole = book(folder, {"Results": [["a", "b"], ["1", "2"]]})
    parts = {name: zipfile.ZipFile(whole).read(name) for name in zipfile.ZipFile(whole).namelist()}
    with zipfile.ZipFile(folder / "rewritten.xlsx", "w") as archive:
        for name, part in {**parts, member: content}.items():
            archive.writestr(name, part)
    return folder / "rewritten.xlsx"


def test_workbook_whose_contents_list_is_broken_is_refused(tmp_path):
    with pytest.raises(ValueRefused, match="not a readable workbook"):
        open_table(rewritten(tmp_path, "xl/workbook.xml", b"<workbook"))


def test_workbook_whose_sheet_is_broken_is_refused(tmp_path):
    with pytest.raises(ValueRefused, match="sheet 'Results' cannot be read"):
        open_table(rewritten(tmp_path, "xl/worksheets/sheet1.xml", b"<worksheet><sheetData><row></c>"))


@pytest.mark.parametrize(
    ("place", "said"),
    [
        ('r="XFD1048576"', "column 16384, and one in row 1048576"),
        ("r='XFD1048576'", "column 16384, and one in row 1048576"),
        ('\tr\n=\n"BZ800000"', "column 78, and one in row 800000"),
        ('r="A99999999999"', "column 1, and one in row 99999999999"),
        ('r="ZZZZZZZ9000"', "row 9000"),
    ],
)
def test_cell_that_would_unfold_a_sheet_without_end_is_refused(tmp_path, place, said):
    sheet = f'<worksheet><sheetData><row r="1"><c {place}><v>1</v></c></row></sheetData></worksheet>'
    with pytest.raises(ValueRefused, match=said):
        open_table(rewritten(tmp_path, "xl/worksheets/sheet1.xml", sheet.encode()))


def test_duration_in_a_workbook_comes_as_text(tmp_path):
    with xlsxwriter.Workbook(tmp_path / "results.xlsx") as workbook:
        sheet = workbook.add_worksheet()
        sheet.write_row(0, 0, ["a", "b"])
        sheet.write_number(1, 0, 1.5, workbook.add_format({"num_format": "[hh]:mm:ss"}))
    assert rows(open_table(tmp_path / "results.xlsx")) == [(2, ["1 day, 12:00:00", ""])]


def test_sheet_with_one_column_has_no_heading_row(tmp_path):
    with pytest.raises(ValueRefused, match="row 1 is not a heading row"):
        open_table(book(tmp_path, {"Results": [["notes"], ["1"]]}))


def test_line_without_end_is_refused(file):
    write(file, "a,b\n" + "x" * 3_000_000)
    with pytest.raises(ValueRefused, match="a line in it has no end"):
        open_table(file)


def test_file_that_may_not_be_read_is_refused(file, monkeypatch):
    def deny(_):
        raise PermissionError(13, "Permission denied")

    write(file, "a,b\n")
    monkeypatch.setattr("effluent.intake.table.is_workbook", deny)
    with pytest.raises(ValueRefused, match="it cannot be read: Permission denied"):
        open_table(file)


def test_cell_that_holds_the_inner_mark_is_read_as_it_is(file):
    write(file, "a,b\n1\x1f,2\n")
    assert rows(open_table(file)) == [(2, ["1\x1f", "2"])]


def test_short_quoted_rows_are_named_among_plain_ones(file):
    write(file, 'a,b\n"1, or 2",x\n"3"\n4,"5"\n')
    (block,) = open_table(file).blocks()
    assert [list(column) for column in block.columns] == [["1, or 2", "4"], ["x", "5"]]
    assert [error.row for error in block.errors] == [3]
