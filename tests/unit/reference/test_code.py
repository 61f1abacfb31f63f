"""Containers and units find their code of the form."""

import pytest

from effluent.domain.register import ContainerKind
from effluent.errors import UnitUnknown, ValueRefused
from effluent.reference.code import container_code, container_codes, unit_code, unit_codes

DRUM = ContainerKind.DRUM


@pytest.mark.parametrize(
    ("kind", "material", "code"),
    [
        (DRUM, "steel", "DM"),
        (DRUM, "Stainless steel", "DM"),
        (DRUM, "steel, plastic lined", "DM"),
        (DRUM, "plastic", "DF"),
        (DRUM, "HDPE", "DF"),
        (DRUM, "fibre", "DF"),
        (DRUM, "wooden", "DW"),
        (ContainerKind.TOTE, "plastic", "TP"),
        (ContainerKind.TOTE, "", "TP"),
        (ContainerKind.BOWSER, "steel", "TT"),
        (ContainerKind.TANK, "", "TT"),
    ],
)
def test_container_travels_under_its_code(kind, material, code):
    assert container_code(kind, material) == code


@pytest.mark.parametrize("material", ["", "other", "blue"])
def test_drum_of_unknown_material_is_refused(material):
    with pytest.raises(ValueRefused, match=r"material of a drum .* write steel, plastic, fibre or wood"):
        container_code(DRUM, material)


@pytest.mark.parametrize(
    ("unit", "code"),
    [
        ("L", "L"),
        ("gal", "G"),
        ("US_gal", "G"),
        ("kg", "K"),
        ("lb", "P"),
        ("t", "M"),
        ("m3", "N"),
        (" L ", "L"),
    ],
)
def test_unit_finds_its_code(unit, code):
    assert unit_code(unit) == code


@pytest.mark.parametrize("unit", ["imp_gal", "mL", "", "G", "K", "M"])
def test_unit_without_code_is_refused(unit):
    with pytest.raises(UnitUnknown, match="the manifest form takes"):
        unit_code(unit)


def test_every_kind_of_container_has_a_code_of_the_table():
    known = {code.code for code in container_codes()}
    assert {container_code(kind, "steel") for kind in ContainerKind} <= known


def test_unit_codes_are_single_letters():
    assert sorted(code.code for code in unit_codes()) == sorted("GKLMNPTY")
