"""Every shipped row says where it comes from."""

from datetime import date

import pytest

from effluent.reference.analyte import by_key
from effluent.reference.table import Mark, Source, near_names, read

FILES = ("analytes", "limits", "holding", "container_codes", "unit_codes", "waste_codes")


@pytest.mark.parametrize("name", FILES)
def test_every_row_has_source_edition_date_and_mark(name):
    for row in read(name):
        source = Source.of(row)
        assert source.citation, row
        assert source.edition, row
        assert date(2026, 1, 1) <= source.read_on <= date(2100, 1, 1)


@pytest.mark.parametrize("name", FILES)
def test_no_row_has_missing_or_surplus_cells(name):
    assert all(None not in row and None not in row.values() for row in read(name))


@pytest.mark.parametrize("name", ["limits", "holding"])
def test_every_row_names_a_shipped_analyte(name):
    assert all(by_key(row["analyte"]) for row in read(name))


def test_mark_of_a_row_is_read_as_written():
    row = {"source": "a", "edition": "b", "read_on": "2026-12-01", "mark": "memory"}
    assert Source.of(row) == Source("a", "b", date(2026, 12, 1), Mark.MEMORY)


def test_near_names_of_nothing_alike_are_empty():
    assert near_names("zzzz", ["cadmium"]) == ""


def test_near_names_look_alike():
    assert near_names("cadmum", ["cadmium", "lead"]) == "cadmium"
