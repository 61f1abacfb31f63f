"""Factors against published figures and against an independent units library.

HB44: NIST Handbook 44, appendix C, section 4 (exact values are underlined there) and section 3.
SP811: NIST Special Publication 811 (2008), appendix B.8, printed to seven significant digits.
"""

from fractions import Fraction

import astropy.units as other
import pytest
from astropy.units import imperial

from effluent.calc.units import convert
from effluent.domain import Quantity

EXACT = [
    ("gal", "L", "3.785411784"),  # HB44: 231 in3
    ("gal", "in3", "231"),  # HB44
    ("in3", "mL", "16.387064"),  # HB44
    ("qt", "L", "0.946352946"),  # HB44: a quarter of a gallon
    ("US_pt", "mL", "473.176473"),  # HB44
    ("US fl oz", "mL", "29.5735295625"),  # HB44: 1/128 gallon
    ("lb", "kg", "0.45359237"),  # HB44; SP811 note 22
    ("oz_av", "g", "28.349523125"),  # HB44: 1/16 pound
    ("short_ton", "lb", "2000"),  # HB44
    ("t", "kg", "1000"),  # HB44
    ("imp_gal", "L", "4.54609"),  # SP811, exact there
    ("ft3", "L", "28.316846592"),  # the cube of 0.3048 m, which HB44 gives as exact
    ("yd3", "ft3", "27"),  # HB44
    ("umho/cm", "uS/cm", "1"),  # SP811: mho to siemens, exact
]


@pytest.mark.parametrize(("unit", "wanted", "factor"), EXACT)
def test_factor_equals_the_handbook_exactly(unit, wanted, factor):
    assert convert(Fraction(1), unit, wanted) == Fraction(factor)


SEVEN_DIGITS = [
    ("lb/gal", "kg/m3", "119.8264"),  # SP811: pound per gallon (US), 1.198 264 E+02
    ("lb/ft3", "kg/m3", "16.01846"),  # SP811: pound per cubic foot, 1.601 846 E+01
    ("gal/d", "m3/s", "4.381264E-08"),  # SP811, gallon (US) per day; figure from memory
    ("gpm", "m3/s", "6.309020E-05"),  # SP811, gallon (US) per minute; figure from memory
]


@pytest.mark.parametrize(("unit", "wanted", "factor"), SEVEN_DIGITS)
def test_factor_equals_the_printed_figure_to_its_last_digit(unit, wanted, factor):
    assert convert(Fraction(1), unit, wanted) == pytest.approx(Fraction(factor), rel=5e-7)


TEMPERATURES = [
    ("32", "degF", "degC", "0"),  # SP811 B.9: t/degC = (t/degF - 32)/1.8
    ("212", "degF", "degC", "100"),
    ("-40", "degC", "degF", "-40"),
    ("140", "degF", "degC", "60"),  # 40 CFR 261.21(a)(1) writes this flash point both ways
    ("0", "K", "degC", "-273.15"),  # SP811 B.9
]


@pytest.mark.parametrize(("value", "unit", "wanted", "answer"), TEMPERATURES)
def test_temperature_is_exact(value, unit, wanted, answer):
    assert convert(Fraction(value), unit, wanted) == Fraction(answer)


def test_load_factor_is_the_ratio_of_gallon_and_pound():
    # HB44: 3.785411784 / 0.45359237; a million gallons of water at 1 mg/L hold 3.785411784 kg
    factor = convert(Fraction(1), "MGD*mg/L", "lb/day")
    assert factor == Fraction("3.785411784") / Fraction("0.45359237")
    assert f"{float(factor):.9f}" == "8.345404452"
    assert convert(Fraction(1), "MGD*mg/L", "kg/d") == Fraction("3.785411784")


def test_the_trades_8_34_is_0_065_percent_low():
    # 8.34 lb/gal: the rounded factor of operators' handbooks (common practice)
    low = 1 - Fraction("8.34") / convert(Fraction(1), "MGD*mg/L", "lb/day")
    assert f"{float(100 * low):.4f}" == "0.0648"


# Worked examples published with the rounded factor 8.34; read on 2026-12-01.
LOADS = [
    ("1.5", "MGD", "15", "187.65"),  # https://wastewater101.net/2019/06/time-for-math-29, no 1
    ("880000", "gpd", "250", "1834.8"),  # the same, no 2
    # http://www.water-chemistry.in/2009/01/bodcod-loading-on-aeration-process/ , given as 2715
    ("1.55", "MGD", "210", "2714.67"),
]


@pytest.mark.parametrize(("flow", "unit", "mg_l", "published"), LOADS)
def test_load_equals_the_published_one_but_for_its_rounded_factor(flow, unit, mg_l, published):
    load = convert(Fraction(flow) * Fraction(mg_l), f"{unit}*mg/L", "lb/day")
    rounded = load * Fraction("8.34") / (Fraction("3.785411784") / Fraction("0.45359237"))
    assert rounded == Fraction(published)
    assert load == pytest.approx(Fraction(published), rel=6.6e-4)


def test_mass_of_a_drum_equals_the_pounds_of_the_gallons():
    # 55 gal at 8.345404452 lb/gal (1 kg/L) are 458.997 lb: HB44 arithmetic
    density = Quantity("1", "kg/L")
    pounds = convert(Fraction(55), "gal", "lb", density=density)
    assert pounds == 55 * Fraction("3.785411784") / Fraction("0.45359237")


# The other library builds its US gallon from a rounded fluid ounce: good to 1.4e-9 only.
ROUNDED = 2e-9
EXACTLY = 1e-14
INDEPENDENT = [
    ("ug/L", "mg/L", other.ug / other.l, other.mg / other.l, EXACTLY),
    ("g/m3", "mg/L", other.g / other.m**3, other.mg / other.l, EXACTLY),
    ("mS/m", "uS/cm", other.mS / other.m, other.uS / other.cm, EXACTLY),
    ("S/cm", "uS/cm", other.S / other.cm, other.uS / other.cm, EXACTLY),
    ("lb/day", "kg/d", imperial.lb / other.day, other.kg / other.day, EXACTLY),
    ("kg/L", "lb/ft3", other.kg / other.l, imperial.lb / imperial.foot**3, EXACTLY),
    ("gal", "L", imperial.gallon, other.l, ROUNDED),
    ("MGD", "L/d", other.Unit(1e6 * imperial.gallon / other.day), other.l / other.day, ROUNDED),
    ("lb/gal", "kg/L", imperial.lb / imperial.gallon, other.kg / other.l, ROUNDED),
]


@pytest.mark.parametrize(("unit", "wanted", "source", "target", "rel"), INDEPENDENT)
def test_factor_equals_an_independent_library(unit, wanted, source, target, rel):
    assert float(convert(Fraction(1), unit, wanted)) == pytest.approx(source.to(target), rel=rel)


@pytest.mark.parametrize("fahrenheit", [-40, 0, 59, 140, 1000])
def test_temperature_equals_an_independent_library(fahrenheit):
    expected = (fahrenheit * imperial.deg_F).to(other.deg_C, equivalencies=other.temperature()).value
    assert float(convert(Fraction(fahrenheit), "°F", "°C")) == pytest.approx(expected, abs=1e-10)
