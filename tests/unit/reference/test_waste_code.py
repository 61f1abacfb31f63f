"""The characteristic codes come in one order, each with its level."""

import pytest

from effluent.errors import RecordMissing
from effluent.reference.waste_code import waste_code, waste_codes


def test_codes_run_from_d001_to_d043_without_a_gap():
    assert [waste.code for waste in waste_codes()] == [f"D{number:03}" for number in range(1, 44)]


def test_characteristics_have_no_single_level():
    assert [waste.level for waste in waste_codes()[:3]] == [None, None, None]


def test_code_is_found_in_any_case():
    assert waste_code(" d006 ").name == "Cadmium"


def test_unknown_code_is_missing():
    with pytest.raises(RecordMissing, match="near ones are D0"):
        waste_code("D060")


def test_code_like_none_names_the_range():
    with pytest.raises(RecordMissing, match="D001 to D043"):
        waste_code("F999XYZ")
