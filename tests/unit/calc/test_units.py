"""Units as laboratories write them, exact numbers, and the refusals with their advice."""

import subprocess
import sys
from fractions import Fraction
from itertools import permutations

import pint
import pytest

from effluent.calc.number import leading_power
from effluent.calc.units import (
    KINDS,
    READING_KINDS,
    canonical,
    canonical_unit,
    conversion,
    convert,
    decimal_text,
    kind_of,
    nearest,
    power_of_ten,
)
from effluent.domain import Quantity
from effluent.errors import UnitMismatch, UnitUnknown, ValueRefused
from effluent.services import conversion as service

SAME = [
    (
        "ug/L",
        "ug/l",
        "UG/L",
        "\u00b5g/l",
        "\u03bcg/L",
        "ug / L",
        "ug per L",
        "ug L-1",
        "µg·L⁻¹",
        "mcg/L",
        "ppb",
    ),
    ("mg/L", "mg/l", "MG/L", "Mg/L", "g/m3", "g/m³", "g/m^3", "g/m**3", "ug/mL", "mg l-1"),
    ("mg/kg", "MG/KG", "ppm", "PPM", "ug/g"),
    ("L", "l", "litre", "Liters", "dm3"),
    ("mL", "ml", "cc", "cm³", "cm3", "CM3"),
    ("m3", "m³", "M3", "kL"),
    ("gal", "gal.", "gallons", "US_gal", "US gal", "GAL"),
    ("imp_gal", "imp gal", "imperial gallon"),
    ("lb", "lbs", "LB", "lb.", "pounds"),
    ("t", "tonnes", "metric ton"),
    ("lb/day", "lbs/d", "LB/DAY", "MGD*lb/Mgal"),
    ("MGD", "mgd", "Mgal/d"),
    ("gpd", "gal/day"),
    ("uS/cm", "µS/cm", "US/CM", "umho/cm", "µmhos/cm"),
    ("mS/m", "MS/m"),
    ("degC", "°C", "C", "c", "℃", "deg C", "DEGC"),
    ("degF", "°F", "F", "deg F"),
    ("s.u.", "SU", "su", "pH", "PH", "pH units", "std units", "Standard Units", "S.U."),
    ("%", "percent"),
    ("NTU", "ntu"),
]


@pytest.mark.parametrize("spellings", SAME, ids=lambda spellings: spellings[0])
def test_every_spelling_means_the_same_amount(spellings):
    water = Quantity("1", "kg/L")
    for other in spellings[1:]:
        assert convert(Fraction(7), other, spellings[0], density=water) == 7, other


KIND_OF = [
    ("gal", "volume"), ("lb", "mass"), ("g/mL", "density"), ("kg/m3", "density"), ("lb/gal", "density"),
    ("g/L", "concentration"), ("ug/L", "concentration"), ("ppb", "mass ratio"), ("mL/L", "volume ratio"),
    ("mS/m", "conductivity"), ("pH", "pH"), ("%", "share"), ("°F", "temperature"), ("lb/day", "load"),
    ("MGD*mg/L", "load"), ("MGD", "flow"), ("NTU", "turbidity"),
]  # fmt: skip


@pytest.mark.parametrize(("unit", "kind"), KIND_OF)
def test_kind_decides_the_canonical_unit(unit, kind):
    assert kind_of(unit) == kind
    assert canonical_unit(unit) == KINDS[kind]


def test_every_canonical_unit_is_of_its_kind():
    assert {kind: kind_of(unit) for kind, unit in KINDS.items()} == {kind: kind for kind in KINDS}
    assert all(kinds <= set(KINDS) for kinds in READING_KINDS.values())


UNKNOWN = [
    ("", "a number without its unit is not a reading"),
    ("   ", "a number without its unit is not a reading"),
    ("oz", "write oz_av or US_fl_oz"),
    ("fl oz", "write US_fl_oz"),
    ("ton", "write t for 1000 kg or short_ton for 2000 lb"),
    ("G", "write g for gram or gal for the US gallon"),
    ("ML", "write mL for millilitre"),
    ("MG", "write mg for milligram"),
    ("ppt", "write g/kg or ng/kg"),
    ("PPT", "write g/kg or ng/kg"),
    ("lb/month", "write the amount per day"),
    ("mg/L as N", "write it as in mg/L"),
    ("mg/", "write it as in mg/L"),
    ("/L", "write it as in mg/L"),
    ("m", "write it as in mg/L"),
    ("m2", "write it as in mg/L"),
    ("L2", "write it as in mg/L"),
    ("mg L", "write it as in mg/L"),
    ("1/L", "write it as in mg/L"),
    ("S", "write it as in mg/L"),
    ("furlong", "write it as in mg/L"),
    ("m**999999999", "write it as in mg/L"),
    ("mg/L/L/L/L/L/L", "write it as in mg/L"),
    ("x" * 41, "write it as in mg/L"),
]


@pytest.mark.parametrize(("unit", "advice"), UNKNOWN)
def test_unreadable_unit_is_refused_with_advice(unit, advice):
    with pytest.raises(UnitUnknown) as refused:
        kind_of(unit)
    assert advice in str(refused.value)


def test_a_long_unit_is_not_repeated_in_full():
    with pytest.raises(UnitUnknown) as refused:
        kind_of("x" * 10_000)
    assert len(str(refused.value)) < 200


def test_units_of_different_kinds_are_refused():
    with pytest.raises(UnitMismatch) as refused:
        convert(Fraction(1), "uS/cm", "mg/L")
    assert str(refused.value) == (
        "'uS/cm' cannot be converted to 'mg/L': the first is a conductivity, the second a concentration; "
        "choose a unit like uS/cm for a conductivity"
    )


@pytest.mark.parametrize(("unit", "wanted"), [("ppm", "mg/L"), ("ug/L", "ug/kg"), ("L", "lb"), ("kg", "gal")])
def test_mass_and_volume_need_a_density(unit, wanted):
    with pytest.raises(UnitMismatch, match=r"give the density of the liquid, as in '0.998 kg/L'"):
        convert(Fraction(1), unit, wanted)


DENSE = [
    ("ppm", "mg/L", "0.998 kg/L", "0.998"),
    ("mg/L", "ppm", "0.998 kg/L", "500/499"),
    ("ug/kg", "mg/L", "998 g/L", "0.000998"),
    ("L", "kg", "0.8 g/mL", "0.8"),
    ("kg", "L", "0.8 g/mL", "1.25"),
    ("t", "m3", "1250 kg/m3", "0.8"),
]


@pytest.mark.parametrize(("unit", "wanted", "density", "factor"), DENSE)
def test_density_enters_the_factor_and_is_reported(unit, wanted, density, factor):
    given = Quantity.parse(density)
    found = conversion(Fraction(2), unit, wanted, density=given)
    assert (found.factor, found.value) == (Fraction(factor), 2 * Fraction(factor))
    assert found.density == given
    assert density in found.working


def test_a_density_that_is_not_needed_is_not_reported():
    assert conversion(Fraction(1), "mg/L", "ug/L", density=Quantity("1", "kg/L")).density is None


@pytest.mark.parametrize("text", ["0", "-1"])
def test_a_density_not_above_zero_is_refused(text):
    with pytest.raises(ValueRefused, match="a density is above zero"):
        convert(Fraction(1), "ppm", "mg/L", density=Quantity(text, "kg/L"))


def test_a_density_that_is_none_is_refused():
    with pytest.raises(UnitMismatch, match="a density is a mass per volume"):
        convert(Fraction(1), "ppm", "mg/L", density=Quantity("1", "mg/kg"))


WORKINGS = [
    ("0.11", "mg/L", "ug/L", "0.11 mg/L × 1000 = 110 ug/L"),
    ("100", "gal", "L", "100 gal × 3.785411784 = 378.5411784 L"),
    ("140", "degF", "degC", "140 degF × 5/9 - 160/9 = 60 degC"),
    ("60", "degC", "degF", "60 degC × 1.8 + 32 = 140 degF"),
    ("1", "L", "gal", "1 L × 0.2641720524… ≈ 0.2641720524 gal"),
]


@pytest.mark.parametrize(("value", "unit", "wanted", "working"), WORKINGS)
def test_working_can_be_followed_with_a_calculator(value, unit, wanted, working):
    assert conversion(Fraction(value), unit, wanted).working == working
    assert service.convert(f" {value} ", f" {unit}", f"{wanted} ").working == working


def test_the_service_reads_a_density_and_names_it():
    working = service.convert("250", "ppm", "mg/L", "0.998 kg/L").working
    assert working == "250 ppm × 0.998 (density 0.998 kg/L) = 249.5 mg/L"


@pytest.mark.parametrize("value", ["", "abc", "1,5", "nan", "1" * 5000])
def test_the_service_refuses_what_is_no_number(value):
    with pytest.raises(ValueRefused):
        service.convert(value, "mg/L", "ug/L")


def test_canonical_keeps_the_kind_of_a_water_reading():
    assert canonical(Quantity("20", "mS/m"), "water reading") == 200
    assert canonical(Quantity("50", "ppm"), "water reading") == 50
    assert canonical(Quantity("0.05", "g/L"), "water reading") == 50


def test_canonical_refuses_a_water_reading_of_another_kind():
    with pytest.raises(UnitMismatch, match="a volume has no place here; use one of mg/L, mg/kg, uS/cm"):
        canonical(Quantity("5", "L"), "water reading")


@pytest.mark.parametrize(
    ("limit", "value"), [("110 ug/L", "0.11"), ("140 °F", "60"), ("9 s.u.", "9"), ("1 lb/day", "0.45359237")]
)
def test_canonical_takes_any_reading_as_a_limit(limit, value):
    assert canonical(Quantity.parse(limit), "limit") == Fraction(value)


def test_only_a_ph_may_stand_without_a_unit():
    assert canonical(Quantity("7.2", ""), "pH") == Fraction("7.2")
    with pytest.raises(UnitUnknown, match="a number without its unit"):
        canonical(Quantity("7.2", ""), "volume")


def test_canonical_turns_a_mass_ratio_into_a_concentration_with_a_density():
    assert canonical(Quantity("2", "ppm"), "concentration", density=Quantity("1.5", "kg/L")) == 3


@pytest.mark.parametrize("value", [Fraction(10) ** 400, -(Fraction(10) ** 400), Fraction(1, 10**400)])
def test_a_number_no_double_can_hold_is_refused(value):
    with pytest.raises(ValueRefused, match=r"number 'about 1e-?\d+' is not accepted: it is (larg|small)er"):
        nearest(value)


def test_nearest_keeps_zero_and_rounds_ties_to_even():
    assert nearest(Fraction(0)) == 0.0
    assert nearest(Fraction(2**53 + 1)) == float(2**53)
    assert nearest(Fraction(2**53 + 3)) == float(2**53 + 4)


TEXTS = [
    ("0", 10, "0"),
    ("-0.5", 10, "-0.5"),
    ("1200", 10, "1200"),
    ("1/8", 1, "0.125"),
    ("2/3", 3, "0.667"),
    ("-2/3", 3, "-0.667"),
    ("20000/3", 2, "6700"),
    ("1/3000", 2, "0.00033"),
    ("2999/3", 2, "1000"),
    ("123456789012345678901", 5, "123456789012345678901"),
]


@pytest.mark.parametrize(("value", "digits", "text"), TEXTS)
def test_decimal_text_is_exact_where_it_can_be(value, digits, text):
    assert decimal_text(Fraction(value), digits=digits) == text


def test_decimal_text_rounds_ties_to_even():
    # 31 places do not end within 30: the tie goes to the even digit
    tie = Fraction(25, 10**32)
    assert decimal_text(tie, digits=1) == "0." + "0" * 30 + "2"


@pytest.mark.parametrize("value", [Fraction(10) ** 40, -(Fraction(10) ** 40), Fraction(1, 10**41)])
def test_decimal_text_refuses_endless_zeros(value):
    with pytest.raises(ValueRefused):
        decimal_text(value)


@pytest.mark.parametrize(
    ("value", "power"),
    [("1", 0), ("9.99", 0), ("10", 1), ("0.1", -1), ("-0.099", -2), ("8", 0), ("1e30", 30)],
)
def test_leading_power_is_that_of_the_first_digit(value, power):
    assert leading_power(Fraction(value)) == power


def test_zero_has_no_leading_power():
    with pytest.raises(ValueError, match="zero"):
        leading_power(Fraction(0))


POWERS = [
    ("mg/L", "mg/L", 0), ("ug/L", "mg/L", -3), ("kg/L", "mg/L", 6), ("mS/m", "uS/cm", 1),
    ("gal", "L", None), ("degF", "degC", None), ("K", "degC", None),
]  # fmt: skip


@pytest.mark.parametrize(("unit", "wanted", "power"), POWERS)
def test_power_of_ten_is_only_for_pure_powers(unit, wanted, power):
    assert power_of_ten(unit, wanted) == power


def test_power_of_ten_refuses_different_kinds():
    with pytest.raises(UnitMismatch):
        power_of_ten("ppb", "mg/L")


def test_the_registry_is_loaded_only_when_a_factor_is_needed():
    code = (
        "import sys; from effluent.calc import units; units.power_of_ten('ug/L', 'mg/L');"
        "assert 'pint' not in sys.modules;"
        "units.power_of_ten('gal', 'L'); assert 'pint' in sys.modules"
    )
    subprocess.run([sys.executable, "-c", code], check=True, timeout=60)


def test_metric_prefixes_are_those_of_the_registry() -> None:
    registry = pint.UnitRegistry(non_int_type=Fraction)
    for names in (("ng/L", "ug/mL", "mg/dL", "kg/hL", "g/kL"), ("mL", "cL", "kL"), ("mg/kg", "ng/g")):
        for unit, wanted in permutations(names, 2):
            expected = registry.Quantity(Fraction(1), unit).to(wanted).magnitude
            assert convert(Fraction(1), unit, wanted) == expected
