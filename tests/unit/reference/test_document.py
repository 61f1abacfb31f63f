"""The guide to the reference tables names each of them with its citation, edition and mark."""

from pathlib import Path

import pytest

from effluent.reference.limit import rows, tables

PAGE = (Path(__file__).parents[3] / "docs" / "reference.md").read_text(encoding="utf-8")


def line_of(table):
    return next(line for line in PAGE.splitlines() if line.startswith(f"| `{table}` |"))


@pytest.mark.parametrize("table", tables())
def test_page_gives_citation_edition_and_mark_of_each_table(table):
    cells = [cell.strip() for cell in line_of(table).split("|")]
    for limit in rows(table):
        assert cells[2].split("(")[0] == limit.source.citation.split("(")[0]
        assert cells[3].startswith(limit.source.edition)
        assert cells[4] == limit.source.mark.value


def test_page_says_reference_never_law():
    assert "reference, never law" in PAGE
    assert "Local environmental regulations govern" in PAGE
