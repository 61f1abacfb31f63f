import re
from fractions import Fraction
from pathlib import Path

import pytest
import xlsxwriter

from effluent.domain.sample import Result
from effluent.intake.layout import PLAIN, Layout
from effluent.intake.result import COLUMNS, read_results

LABORATORY = Path(__file__).parents[3] / "fixtures" / "laboratory"
HEAD = "sample,analyte,fraction,value,unit,flag,reporting_limit,density\n"


def read(path, layout=PLAIN):
    """Return every result as a mapping, and every bad cell."""
    chunks = list(read_results(path, layout, time_zone="Europe/Lisbon"))
    results = [
        dict(zip(COLUMNS, row, strict=True))
        for chunk in chunks
        for place, row in enumerate(zip(*(chunk.columns[name] for name in COLUMNS), strict=True))
        if place not in chunk.bad
    ]
    return results, [error for chunk in chunks for error in chunk.errors]


def read_fixture(name, layout):
    return read(LABORATORY / name, Layout.read(LABORATORY / layout))


@pytest.fixture
def read_rows(tmp_path):
    def read_rows(*rows, layout=PLAIN, head=HEAD):
        (tmp_path / "results.csv").write_text(head + "\n".join(rows), encoding="utf-8")
        return read(tmp_path / "results.csv", layout)

    return read_rows


def test_columns_are_fields_of_a_result():
    assert set(COLUMNS) - {"reissue_of"} <= set(Result.__dataclass_fields__)


@pytest.mark.parametrize(
    ("cells", "qualifier", "number", "value", "flag"),
    [
        ("0.11,mg/L,,,", "=", "0.11", 0.11, ""),
        ("110,ug/L,,,", "=", "110", 0.11, ""),
        ("110,µg/l,,,", "=", "110", 0.11, ""),
        ("<0.005,mg/L,,,", "<", "0.005", 0.005, ""),
        ("0.005 U,mg/L,,,", "<", "0.005", 0.005, "U"),
        ("0.005,mg/L,U,,", "<", "0.005", 0.005, "U"),
        ("0.005,mg/L,<,,", "<", "0.005", 0.005, ""),
        ("<0.005,mg/L,<,,", "<", "0.005", 0.005, ""),
        ("5,mg/L,=,,", "=", "5", 5.0, ""),
        ("0.0123,mg/L,J,,", "=", "0.0123", 0.0123, "J"),
        ("ND,ug/L,U,5,", "<", "5", 0.005, "ND U"),
        (">200,mg/L,,,", ">", "200", 200.0, ""),
        ('"1,234.5",ug/L,,,', "=", "1234.5", 1.2345, ""),
        ("1.2E-3,mg/L,,,", "=", "0.0012", 0.0012, ""),
        ("5,mg/kg,,,", "=", "5", 5.0, ""),
        ("5,ppb,,,0.998 kg/L", "=", "5", 0.00499, ""),
    ],
)
def test_cells_are_read_as_laboratories_mean_them(read_rows, cells, qualifier, number, value, flag):
    (result,), errors = read_rows("S-1,Cd,total," + cells)
    assert errors == []
    found = tuple(result[name] for name in ("qualifier", "number", "value", "flag"))
    assert found == (qualifier, number, value, flag)


@pytest.mark.parametrize(
    ("name", "fraction", "unit", "read_as"),
    [
        ("cadmium", "Dissolved", "mg/L", "dissolved"),
        ('"Cadmium, total recoverable"', "", "mg/L", "total recoverable"),
        ("7440-43-9", "TCLP", "mg/L", "TCLP extract"),
        ("pH", "", "", "total"),
        ("TSS", "", "mg/L", "total"),
    ],
)
def test_fraction_comes_from_column_then_name_then_kind_of_analyte(read_rows, name, fraction, unit, read_as):
    (result,), _ = read_rows(f"S-1,{name},{fraction},5,{unit},,,")
    assert result["fraction"] == read_as


def test_constant_fraction_fills_in_where_the_name_says_none(read_rows):
    names = ("sample", "analyte", "fraction", "value", "unit")
    layout = Layout(columns={name: name for name in names}, constants={"fraction": "total"})
    results, _ = read_rows("S-1,Cd,,5,mg/L,,,", 'S-1,"Cd, dissolved",,5,mg/L,,,', layout=layout)
    assert [result["fraction"] for result in results] == ["total", "dissolved"]


@pytest.mark.parametrize(
    ("row", "column", "reason"),
    [
        (",Cd,total,5,mg/L,,,", "sample", "the cell is empty"),
        ("S-1,,total,5,mg/L,,,", "analyte", "the cell is empty"),
        ("S-1,unobtainium,total,5,mg/L,,,", "analyte", "near names"),
        ("S-1,7440-43-8,total,5,mg/L,,,", "analyte", "check digit"),
        ("S-1,Cd,,5,mg/L,,,", "fraction", "say total"),
        ("S-1,Cd,half,5,mg/L,,,", "fraction", "write total"),
        ('S-1,"Cd, total",dissolved,5,mg/L,,,', "fraction", "make both agree"),
        ("S-1,Cd,total,,mg/L,,,", "value", "the cell is empty"),
        ("S-1,Cd,total,about 3,mg/L,,,", "value", "write a number"),
        ("S-1,Cd,total,-3,mg/L,,,", "value", "never below zero"),
        ("S-1,Cd,total,ND,mg/L,,,", "value", "reporting limit"),
        ("S-1,Cd,total,>5,mg/L,U,,", "value", "above and not detected at once"),
        ("S-1,Cd,total,5,,,,", "unit", "without its unit"),
        ("S-1,Cd,total,5,furlong,,,", "unit", "write it as in mg/L"),
        ("S-1,pH,,5,mg/L,,,", "unit", r"write a unit like s\.u\."),
        ("S-1,Cd,total,5,ppm,,,", "unit", "need its density"),
        ("S-1,Cd,total,5,ppm,,,heavy", "density", "number and a unit|number with"),
        ("S-1,Cd,total,5,ppm,,,0 kg/L", "density", "above zero"),
        ("S-1,Cd,total,5,mg/L,R,,", "flag", "cannot be understood"),
        ("S-1,Cd,total,5,mg/L,,-1,", "reporting_limit", "never below zero"),
        ("S-1,Cd,total,5,mg/L,,few,", "reporting_limit", "write a number"),
        ("S-1,Cd,total,5,mg/L,,5 J,", "reporting_limit", "the number alone"),
    ],
)
def test_bad_cell_is_named_with_what_to_do(read_rows, row, column, reason):
    results, errors = read_rows("S-0,Cd,total,1,mg/L,,,", row)
    assert [result["sample"] for result in results] == ["S-0"]
    error = next(error for error in errors if error.column == column)
    assert error.row == 3
    assert re.search(reason, error.reason)


@pytest.mark.parametrize(
    ("column", "cell"),
    [
        ("replicate", "0"), ("replicate", "two"), ("replicate", "1.5"), ("replicate", "9" * 5000),
        ("dilution_factor", "0"), ("dilution_factor", "1:5"), ("uncertainty", "-1"),
        ("detection_limit", "x"), ("analysed_at", "5/3/2026"), ("report", "x" * 600),
    ],
)  # fmt: skip
def test_bad_cell_of_the_other_columns_is_named(read_rows, column, cell):
    results, (error,) = read_rows(
        f"S-1,Cd,total,5,mg/L,{cell}", head=f"sample,analyte,fraction,value,unit,{column}\n"
    )
    assert results == []
    assert (error.row, error.column) == (2, column)
    assert len(error.value) <= 80


def test_every_bad_cell_of_a_row_is_named():
    _, errors = read(LABORATORY / "faulty.csv")
    assert [(error.row, error.column) for error in errors] == [
        (3, "analyte"), (4, "analyte"), (5, "unit"), (6, "unit"), (7, "unit"), (8, "value"),
        (9, "value"), (9, "reporting_limit"), (9, "analysed_at"), (9, "replicate"),
        (10, "fraction"), (10, "unit"), (10, "analysed_at"),
        (11, "sample"), (11, "fraction"), (11, "flag"), (11, "density"), (11, "analysed_at"), (12, "row"),
    ]  # fmt: skip


def test_good_rows_of_a_faulty_file_can_be_told_apart():
    results, _ = read(LABORATORY / "faulty.csv")
    assert [result["file_row"] for result in results] == [2]


def test_plain_file_is_read_without_a_mapping():
    results, errors = read(LABORATORY / "plain.csv")
    assert errors == []
    assert [result["value"] for result in results] == [0.11, 0.11, 5.0]
    assert [result["replicate"] for result in results] == [1, 2, 1]
    assert [result["reporting_value"] for result in results] == [0.005, 0.005, 5.0]
    assert results[2]["analysed_at"] == "2026-03-06T23:59:00.000000Z"


def test_decimal_comma_latin_1_and_semicolons_are_read():
    results, errors = read_fixture("ribeira-long.csv", "ribeira-long.toml")
    assert errors == []
    read_as = [
        (r["file_row"], r["analyte"], r["qualifier"], r["value"], r["canonical_unit"]) for r in results
    ]
    assert read_as == [
        (2, "cadmium", "=", 0.045, "mg/L"),
        (3, "nickel", "<", 0.01, "mg/L"),
        (4, "chromium", "=", 0.0125, "mg/L"),
        (5, "ph", "=", 7.4, "s.u."),
        (7, "lead", "=", 0.0123, "mg/L"),
        (8, "zinc", "=", 1.2345, "mg/L"),
    ]
    assert {result["laboratory"] for result in results} == {"RIBEIRA"}


def test_comments_above_the_headings_and_headings_with_line_breaks_are_read():
    results, errors = read_fixture("sandgate-commented.csv", "sandgate-commented.toml")
    assert errors == []
    assert [result["file_row"] for result in results] == list(range(5, 13))
    assert [result["qualifier"] for result in results] == ["=", "=", "<", "=", "<", ">", "=", "="]
    assert results[0]["analysed_at"] == "2026-03-30T14:00:00.000000Z"
    assert results[6]["value"] == 40.0  # 104 °F, NIST SP 811, B.8: t/°C = (t/°F - 32)/1.8


def test_reissued_report_names_the_one_it_replaces():
    (result,), _ = read_fixture("sandgate-reissued.csv", "sandgate-commented.toml")
    assert (result["report"], result["reissue_of"]) == ("SG-77A", "SG-77")


@pytest.fixture
def wide(tmp_path):
    rows = [
        ["Bottle", "Analysed", "Report", "pH", "Cd (mg/L)", "Ni (ug/L)", "TSS (mg/L)"],
        ["S-0006", "2026-03-30 10:00", "SG-78", 7.1, 0.07, "ND", 12],
        ["S-0007", "2026-03-30 10:00", "SG-78", "", "<0.005", "lots", ""],
    ]
    with xlsxwriter.Workbook(tmp_path / "wide.xlsx") as workbook:
        sheet = workbook.add_worksheet("Results")
        workbook.add_worksheet("Notes").write(0, 0, "invented")
        for number, row in enumerate(rows):
            sheet.write_row(number, 0, row)
    return read(tmp_path / "wide.xlsx", Layout.read(LABORATORY / "sandgate-wide.toml"))


def test_wide_workbook_gives_a_result_for_each_filled_cell(wide):
    read_as = [(r["file_row"], r["analyte"], r["qualifier"], r["text"], r["value"]) for r in wide[0]]
    assert read_as == [
        (2, "ph", "=", "7.1", 7.1),
        (2, "cadmium", "=", "0.07", 0.07),
        (2, "nickel", "<", "ND", 0.01),
        (2, "total suspended solids", "=", "12", 12.0),
        (3, "cadmium", "<", "<0.005", 0.005),
    ]


def test_bad_cell_of_a_wide_file_is_named_by_its_own_heading(wide):
    (error,) = wide[1]
    assert (error.row, error.column, error.value) == (3, "Ni (ug/L)", "lots")


def test_bad_constant_is_named_as_one(read_rows):
    names = ("sample", "analyte", "fraction", "value")
    layout = Layout(columns={name: name for name in names}, constants={"unit": "furlong"})
    _, (error,) = read_rows("S-1,Cd,total,5,,,,", layout=layout)
    assert (error.column, error.value) == ("unit (constant of the mapping file)", "furlong")


def test_constant_fills_empty_cells_of_its_column(read_rows):
    names = ("sample", "analyte", "fraction", "value", "unit")
    layout = Layout(columns={name: name for name in names}, constants={"unit": "mg/L"})
    results, _ = read_rows("S-1,Cd,total,5,,,,", "S-1,Cd,total,5,ug/L,,,", layout=layout)
    assert [result["value"] for result in results] == [5.0, 0.005]


def test_value_is_the_double_nearest_to_the_exact_rational(read_rows):
    (result,), _ = read_rows("S-1,temperature,,98.6,°F,,,")
    exact = (Fraction("98.6") - 32) * 5 / 9
    assert result["value"] == exact.numerator / exact.denominator == 37.0


def test_share_of_the_file_grows_to_one(tmp_path):
    rows = "".join(f"S-{n},Cd,total,{n},mg/L,,,\n" for n in range(1, 9000))
    (tmp_path / "long.csv").write_text(HEAD + rows)
    shares = [chunk.share for chunk in read_results(tmp_path / "long.csv", PLAIN, time_zone="UTC")]
    assert shares == sorted(shares)
    assert shares[0] < 0.8 < shares[-1] == 1.0


def test_memory_of_repeated_cells_is_bounded(read_rows, monkeypatch):
    monkeypatch.setattr("effluent.intake.memo._MOST", 10)
    results, errors = read_rows(*(f"S-{n},Cd,total,<{n},mg/L,,x,\n" for n in range(1, 5000)))
    assert results == []
    assert len(errors) == 4999
