from pathlib import Path

import pytest
import xlsxwriter

from effluent.intake.explain import explain
from effluent.intake.layout import PLAIN, Layout

LABORATORY = Path(__file__).parents[3] / "fixtures" / "laboratory"


def test_explanation_says_how_each_column_was_understood():
    layout = Layout.read(LABORATORY / "ribeira-long.toml")
    assert explain(LABORATORY / "ribeira-long.csv", layout, time_zone="UTC").lines() == [
        "ribeira-long.csv: text in latin-1, cells divided by semicolon, headings in row 1",
        "local times are those of Europe/Lisbon; a comma is the decimal mark",
        "columns:",
        "  'Probenahme' is sample: sample number, as in the ledger",
        "  'Parameter' is analyte: name, symbol or CAS number",
        "  'Anteil' is fraction: total, total recoverable, dissolved or TCLP extract",
        "  'Messwert' is value: what the laboratory found, as in 0.11, <0.005, 0.005 U, ND or >200",
        "  'Einheit' is unit: unit of the value and of all limits in the row",
        "  'Kennz.' is flag: laboratory's flag, as in J or U",
        "  'Best.-Grenze' is reporting_limit: reporting limit",
        "  'Verdünnung' is dilution_factor: how many times the sample was diluted",
        "  'Unsicherheit' is uncertainty: expanded uncertainty (k = 2)",
        "  'Verfahren' is test_method: test method",
        "  'Analysiert' is analysed_at: when analysed, local time of the site unless an offset is given",
        "  'Bericht' is report: laboratory's report number",
        "  laboratory is 'RIBEIRA' where nothing else says it",
        "  ignored: none",
        "  not given: detection_limit, density, replicate, reissue_of",
        "results: 6, rows skipped: 1",
        "  cadmium, total, mg/l read as mg/L: 1",
        "  chromium, total, µg/l read as mg/L: 1",
        "  lead, dissolved, mg/l read as mg/L: 1",
        "  nickel, total, mg/l read as mg/L: 1",
        "  ph, total, no unit read as s.u.: 1",
        "  zinc, total, µg/l read as mg/L: 1",
        "first results as read:",
        "  row 2: sample S-0001, cadmium, total, '0,045' mg/l is 0.045 mg/L, reporting_limit 0.005, "
        "analysed_at 2026-03-05 09:15 UTC",
        "  row 3: sample S-0001, nickel, total, '< 0,01' mg/l is <0.01 mg/L, flag U, reporting_limit 0.01, "
        "analysed_at 2026-03-05 09:20 UTC",
        "  row 4: sample S-0001, chromium, total, '12,5' µg/l is 0.0125 mg/L, reporting_limit 2.0, "
        "analysed_at 2026-03-05 09:25 UTC",
        "  row 5: sample S-0001, ph, total, '7,4' is 7.4 s.u., analysed_at 2026-03-04 16:05 UTC",
        "  row 7: sample S-0002, lead, dissolved, '0,0123 J' mg/l is 0.0123 mg/L, flag J, "
        "reporting_limit 0.005, analysed_at 2026-03-06 11:00 UTC",
        "bad cells: 0",
    ]  # fmt: skip


def test_explanation_shows_bad_cells_without_refusing():
    found = explain(LABORATORY / "faulty.csv", PLAIN, time_zone="Europe/Lisbon")
    assert (found.result_count, found.error_count, len(found.errors)) == (10, 19, 19)
    assert "  row 9, replicate '0': write 1, or 2 and up for a laboratory duplicate" in found.lines()


def test_explanation_names_headings_that_nobody_reads():
    layout = Layout.read(LABORATORY / "sandgate-commented.toml")
    found = explain(LABORATORY / "sandgate-commented.csv", layout, time_zone="UTC")
    assert found.ignored == ("CAS",)


def test_explanation_counts_bad_cells_it_does_not_show(tmp_path):
    rows = "".join(f"S-{n},Cd,total,x,mg/L\n" for n in range(30))
    (tmp_path / "bad.csv").write_text("sample,analyte,fraction,value,unit\n" + rows)
    lines = explain(tmp_path / "bad.csv", PLAIN, time_zone="UTC").lines()
    assert "bad cells: 30" in lines
    assert lines[-1] == "  and 10 more"


@pytest.fixture
def workbook(tmp_path):
    with xlsxwriter.Workbook(tmp_path / "wide.xlsx") as book:
        sheet = book.add_worksheet("Results")
        headings = ["Bottle", "Analysed", "Report", "pH", "Cd (mg/L)", "Ni (ug/L)", "TSS (mg/L)"]
        sheet.write_row(0, 0, headings)
        sheet.write_row(1, 0, ["S-1", "2026-03-30", "SG-78", 7.1])
    return tmp_path / "wide.xlsx"


def test_explanation_of_a_wide_workbook_names_sheet_and_analytes(workbook):
    layout = Layout.read(LABORATORY / "sandgate-wide.toml")
    lines = explain(workbook, layout, time_zone="UTC").lines()
    assert lines[0] == "wide.xlsx: workbook, sheet 'Results', headings in row 1"
    assert "  'pH' holds one analyte: analyte pH, unit s.u." in lines
    assert "  ph, total, s.u. read as s.u.: 1" in lines
