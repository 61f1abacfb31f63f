"""Laboratory files: whatever is in them, only results, named bad cells or an error of ours come out."""

import csv
import io
from fractions import Fraction
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from effluent.calc.units import KINDS, convert
from effluent.domain.quantity import Quantity
from effluent.errors import EffluentError
from effluent.intake.layout import PLAIN, Layout
from effluent.intake.result import read_results
from effluent.intake.sheet import safe_cell
from effluent.intake.table import open_table

LABORATORY = Path(__file__).parents[2] / "fixtures" / "laboratory"
CELL = st.text(st.characters(codec="utf-8", exclude_characters="\0\r"), max_size=12)
WRITTEN = st.sampled_from(["0.11", "<0.005", "ND", "0.005 U", "1,234.5", ">200", "1e999", "=1", "", " ", "-"])
NAMES = ("sample", "analyte", "fraction", "value", "unit", "reporting_limit", "flag")
NUMBER = st.decimals(0, 10**9, allow_nan=False, places=6).map(lambda number: f"{number:f}")


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    return tmp_path_factory.mktemp("intake")


def save(folder: Path, content: bytes) -> Path:
    path = folder / "results.csv"
    path.write_bytes(content)
    return path


def table(rows, headings=NAMES) -> bytes:
    text = io.StringIO()
    csv.writer(text).writerows([headings, *rows])
    return text.getvalue().encode()


def read(path, layout=PLAIN):
    return list(read_results(path, layout, time_zone="Europe/Lisbon"))


def columns(chunks, *names):
    return [row for chunk in chunks for row in zip(*(chunk.columns[name] for name in names), strict=True)]


def outcome(path):
    """Return the chunks, or the text of an error of ours; any other exception fails the test."""
    try:
        return read(path)
    except EffluentError as error:
        return str(error)


@given(content=st.binary(max_size=300) | st.text(max_size=300).map(str.encode))
def test_any_bytes_give_chunks_or_an_error_of_ours(folder, content):
    assert isinstance(outcome(save(folder, content)), list | str)


@given(data=st.data(), name=st.sampled_from(["plain.csv", "faulty.csv"]))
def test_damaged_file_gives_chunks_or_an_error_of_ours(folder, data, name):
    whole = (LABORATORY / name).read_bytes()
    start, end = sorted(data.draw(st.tuples(*[st.integers(0, len(whole))] * 2)))
    damaged = whole[:start] + data.draw(st.binary(max_size=8)) + whole[end:]
    assert isinstance(outcome(save(folder, damaged)), list | str)


@given(rows=st.lists(st.tuples(*[CELL | WRITTEN] * len(NAMES)), max_size=8))
def test_any_cells_give_results_or_named_bad_cells(folder, rows):
    chunks = read(save(folder, table(rows)))
    errors = [error for chunk in chunks for error in chunk.errors]
    kept = sum(len(chunk) for chunk in chunks)
    bad_rows = {error.row for error in errors}
    assert kept + sum(error.column == "row" for error in errors) <= len(rows)
    assert all(2 <= row <= len(rows) + 1 for row in bad_rows)
    assert all(chunk.columns["file_row"][place] in bad_rows for chunk in chunks for place in chunk.bad)


@given(rows=st.lists(st.lists(CELL, min_size=3, max_size=3), max_size=12), delimiter=st.sampled_from(",;\t|"))
def test_rows_and_numbers_are_those_of_the_csv_module(folder, rows, delimiter):
    text = io.StringIO()
    csv.writer(text, delimiter=delimiter, lineterminator="\n").writerows([["a", "b", "c"], *rows])
    wanted = [
        (number, [cell.lstrip(" ") for cell in row])
        for number, row in enumerate(csv.reader(io.StringIO(text.getvalue()), delimiter=delimiter), start=1)
        if number > 1 and any(cell.lstrip(" ") for cell in row)
    ]
    opened = open_table(save(folder, text.getvalue().encode()), delimiter=delimiter, encoding="utf-8")
    assert [
        (number, [cell.lstrip(" ") for cell in cells])
        for block in opened.blocks()
        for number, *cells in zip(block.numbers, *block.columns, strict=True)
        if any(cell.lstrip(" ") for cell in cells)
    ] == wanted


READING = st.one_of(
    st.tuples(st.just("cadmium"), st.sampled_from(["mg/L", "ug/L", "µg/l", "g/L", "ng/L"]), st.just("")),
    st.tuples(st.just("cadmium"), st.sampled_from(["ppm", "ppb", "mg/kg"]), st.just("0.998 kg/L")),
    st.tuples(st.just("temperature"), st.sampled_from(["degC", "°F", "K"]), st.just("")),
    st.tuples(st.just("conductivity"), st.sampled_from(["uS/cm", "mS/cm", "S/m"]), st.just("")),
)  # fmt: skip


@given(rows=st.lists(st.tuples(READING, NUMBER), min_size=1, max_size=8))
def test_values_are_the_doubles_nearest_to_the_exact_rationals(folder, rows):
    headings = ("sample", "analyte", "fraction", "value", "unit", "density")
    cells = [("S-1", analyte, "total", number, unit, density) for (analyte, unit, density), number in rows]
    (chunk,) = read(save(folder, table(cells, headings)))
    assert chunk.errors == []
    for (analyte, unit, density), number in rows:
        kind = {"cadmium": "concentration"}.get(analyte, analyte)
        through = Quantity.parse(density) if density else None
        exact = convert(Fraction(number), unit, KINDS[kind], density=through)
        assert chunk.columns["value"].pop(0) == exact.numerator / exact.denominator


@given(data=st.data())
def test_order_of_rows_does_not_matter(folder, data):
    rows = data.draw(st.lists(st.tuples(st.just("S-1"), st.just("Cd"), st.just("total"), WRITTEN | NUMBER,
                                        st.sampled_from(["mg/L", "ug/L"]), st.sampled_from(["", "5"]),
                                        st.sampled_from(["", "U", "J"])), max_size=8))  # fmt: skip
    shuffled = data.draw(st.permutations(rows))
    names = ("text", "qualifier", "number", "value", "flag", "reporting_value")
    one, other = (read(save(folder, table(each))) for each in (rows, shuffled))
    assert sorted(map(repr, columns(one, *names))) == sorted(map(repr, columns(other, *names)))
    assert sorted(e[1:] for c in one for e in c.errors) == sorted(e[1:] for c in other for e in c.errors)


@given(numbers=st.lists(NUMBER, min_size=1, max_size=6))
def test_decimal_comma_means_the_same_as_a_point(folder, numbers):
    names = ("sample", "analyte", "fraction", "value", "unit")
    layout = Layout(columns={name: name for name in names}, decimal=",", delimiter=",")
    point = [("S-1", "Cd", "total", number, "ug/L") for number in numbers]
    comma = [(*row[:3], row[3].replace(".", ","), row[4]) for row in point]
    wanted = columns(read(save(folder, table(point, names))), "number", "value")
    assert columns(read(save(folder, table(comma, names)), layout), "number", "value") == wanted


@given(text=st.text(max_size=20))
def test_safe_cells_never_begin_like_a_formula_unless_they_are_numbers(text):
    safe = safe_cell(text)
    if safe.lstrip(" \u00a0")[:1] in {"=", "+", "-", "@", "\t", "\r"} - {""}:
        assert float(safe) is not None
    assert safe_cell(safe) == safe
