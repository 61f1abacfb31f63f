"""Names as laboratories write them lead to one analyte and one fraction."""

import pytest

from effluent.domain.sample import Fraction
from effluent.errors import RecordMissing, ValueRefused
from effluent.reference.analyte import analytes, by_key, called, cas_is_valid, find
from effluent.reference.table import read

TOTAL, RECOVERABLE, DISSOLVED, TCLP = (
    Fraction.TOTAL,
    Fraction.TOTAL_RECOVERABLE,
    Fraction.DISSOLVED,
    Fraction.TCLP,
)


@pytest.mark.parametrize(
    ("written", "key", "fraction"),
    [
        ("Cd", "cadmium", None),
        ("  cadmium ", "cadmium", None),
        ("CADMIUM", "cadmium", None),
        ("7440-43-9", "cadmium", None),
        ("7440–43–9", "cadmium", None),
        ("CAS No. 7440-43-9", "cadmium", None),
        ("7440439", "cadmium", None),
        ("0007440-43-9", "cadmium", None),
        ("Cadmium, total", "cadmium", TOTAL),
        ("Total Cadmium", "cadmium", TOTAL),
        ("Cd (Tot)", "cadmium", TOTAL),
        ("Cd-T", "cadmium", TOTAL),
        ("Cadmium (dissolved)", "cadmium", DISSOLVED),
        ("Cd-D", "cadmium", DISSOLVED),
        ("Cadmium, field filtered", "cadmium", DISSOLVED),
        ("Total Recoverable Zinc", "zinc", RECOVERABLE),
        ("Zn, total recoverable", "zinc", RECOVERABLE),
        ("TCLP Lead", "lead", TCLP),
        ("Lead - TCLP extract", "lead", TCLP),
        ("Chromium, total", "chromium", TOTAL),
        ("Chromium, total dissolved", "chromium", DISSOLVED),
        ("Chromium, hexavalent", "chromium vi", None),
        ("Hexavalent Chromium (dissolved)", "chromium vi", DISSOLVED),
        ("Cr(VI)", "chromium vi", None),
        ("Cr⁶⁺", "chromium vi", None),
        ("Cyanide, total", "cyanide", TOTAL),
        ("CN(A)", "cyanide amenable", None),
        ("2,4-D", "2,4-d", None),
        ("HEM", "oil and grease", None),
        ("O&G", "oil and grease", None),
        ("Oil & Grease (HEM)", "oil and grease", None),
        ("COD", "chemical oxygen demand", None),
        ("BOD5", "biochemical oxygen demand", None),
        ("TSS", "total suspended solids", None),
        ("Total Dissolved Solids", "total dissolved solids", None),
        ("Phenolics, total recoverable", "phenols", None),
        ("MBAS", "surfactants", None),
        ("NH₃-N", "ammonia as n", None),
        ("Nitrate-N", "nitrate as n", None),
        ("Alkalinity, Total (as CaCO3)", "alkalinity", TOTAL),
        ("Phosphorus, Total as P", "phosphorus", TOTAL),
        ("Cyanide, Total as CN", "cyanide", TOTAL),
        ("Total Metals", "total metals", None),
        ("pH", "ph", None),
    ],
)
def test_written_name_leads_to_analyte_and_fraction(written, key, fraction):
    named = find(written)
    assert (named.analyte.key, named.fraction) == (key, fraction)


@pytest.mark.parametrize("written", ["nitrate", "ammonia", "NO3", "14797-55-8"])
def test_name_of_two_analytes_is_refused_with_both(written):
    with pytest.raises(ValueRefused, match=r"more than one thing; write '.+ as n' or '.+'"):
        find(written)


def test_wrong_check_digit_names_the_number_meant():
    with pytest.raises(ValueRefused, match=r"check digit does not hold; was it 7440-43-9 \(cadmium\)\?"):
        find("7440-34-9")


def test_wrong_check_digit_names_the_few_numbers_it_may_mean():
    with pytest.raises(ValueRefused, match=r"7440-43-9 \(cadmium\) or 7440-42-8 \(boron\)"):
        find("7440-43-8")


def test_wrong_check_digit_far_from_every_number_asks_for_the_report():
    with pytest.raises(ValueRefused, match="compare it with the laboratory's report"):
        find("1234-56-1")


def test_sound_number_of_another_substance_asks_for_a_name():
    with pytest.raises(ValueRefused, match="well formed, but not in the table"):
        find("50-00-0")


def test_misspelt_name_is_refused_with_near_names():
    with pytest.raises(ValueRefused, match="analyte 'kadmium' is not accepted: near names are cadmium"):
        find("kadmium")


@pytest.mark.parametrize("written", ["", "  ", "?", "total", "=1+1", "x" * 10_000])
def test_text_without_a_name_is_refused(written):
    with pytest.raises(ValueRefused, match="write a name, a symbol or a CAS number"):
        find(written)


def test_two_fractions_in_one_name_are_refused():
    with pytest.raises(ValueRefused, match="two fractions, TCLP extract and dissolved"):
        find("Cadmium TCLP dissolved")


@pytest.mark.parametrize("text", ["7440-43-8", "7440439", "", "abc", "7440-43-9 ", "0-00-0", "٧٤٤٠-٤٣-٩"])
def test_text_that_is_no_sound_cas_number_is_not_valid(text):
    assert not cas_is_valid(text)


def test_every_name_of_the_table_leads_home():
    for analyte in analytes():
        for name in {analyte.key, analyte.name}:
            assert find(name).analyte == analyte, name


def test_only_nitrate_and_ammonia_share_a_synonym():
    owners = {}
    for row in read("analytes"):
        for name in row["synonyms"].split(";"):
            owners.setdefault(name, set()).add(row["key"])
    assert {name for name, keys in owners.items() if name and len(keys) > 1} == {"nitrate", "ammonia"}


def test_kinds_are_the_kinds_of_quantity():
    kinds = {analyte.kind for analyte in analytes()}
    assert kinds == {"concentration", "pH", "temperature", "conductivity", "turbidity"}


def test_keys_are_unique_and_found():
    keys = [analyte.key for analyte in analytes()]
    assert [by_key(key).key for key in keys] == keys
    assert len(set(keys)) == len(keys)


def test_unknown_key_is_missing():
    with pytest.raises(RecordMissing, match="near names are cadmium"):
        by_key("Cadmiun")


@pytest.mark.parametrize(
    ("key", "name"),
    [
        ("ph", "pH"),
        ("cadmium", "cadmium"),
        ("2,4-d", "2,4-D"),
        ("nitrate as n", "nitrate (as N)"),
        ("none", "none"),
    ],
)
def test_analyte_is_called_as_it_stands_in_a_sentence(key, name):
    assert called(key) == name
