"""The examples of docs/laboratory-files.md, run."""

import re
from pathlib import Path

import pytest

from effluent.intake.explain import explain
from effluent.intake.layout import FIELDS, PLAIN, Layout

PAGE = (Path(__file__).parents[3] / "docs" / "laboratory-files.md").read_text(encoding="utf-8")
EXAMPLE = re.compile(r"(?:```toml\n(.*?)```\n\n)?```csv\n(.*?)```\n\n```text\n(.*?)```", re.DOTALL)
KEYS = set(Layout.__dataclass_fields__) - {"plain"}


@pytest.mark.parametrize(("mapping", "rows", "wanted"), EXAMPLE.findall(PAGE))
def test_example_reads_as_the_page_says(tmp_path, mapping, rows, wanted):
    (tmp_path / "results.csv").write_text(rows, encoding="utf-8")
    (tmp_path / "map.toml").write_text(mapping, encoding="utf-8")
    layout = Layout.read(tmp_path / "map.toml") if mapping else PLAIN
    found = explain(tmp_path / "results.csv", layout, time_zone="Europe/Lisbon")
    assert found.error_count == 0
    assert list(found.first) == wanted.splitlines()


def test_page_has_an_example_of_each_kind():
    assert [bool(mapping) for mapping, _, _ in EXAMPLE.findall(PAGE)] == [False, True, True]


def test_page_names_every_column_and_every_key():
    documented = set(re.findall(r"^\| `\[?(\w+)\]?`", PAGE, re.MULTILINE))
    assert documented >= set(FIELDS) | KEYS
