"""Units, numbers and cells for any input: exact, in order, and never worse than a refusal."""

import math
from decimal import Decimal
from fractions import Fraction

from hypothesis import example, given
from hypothesis import strategies as st

from effluent.calc.cell import read_cell
from effluent.calc.spelling import read_unit
from effluent.calc.units import (
    KINDS,
    canonical,
    conversion,
    convert,
    decimal_text,
    kind_of,
    nearest,
    power_of_ten,
)
from effluent.domain import Quantity
from effluent.errors import EffluentError

LIKE_UNITS = [
    ("mg/L", "ug/L", "g/m3", "ng/mL", "lb/gal", "kg/L"),
    ("L", "gal", "in3", "m3", "imp gal", "US fl oz"),
    ("kg", "lb", "t", "g"),
    ("degC", "degF", "K"),
    ("uS/cm", "mS/m", "S/m"),
    ("lb/day", "kg/d", "MGD*mg/L"),
]
PAIRS = st.sampled_from(LIKE_UNITS).flatmap(lambda units: st.tuples(*[st.sampled_from(units)] * 2))
EXACT = st.fractions(min_value=-(10**9), max_value=10**9, max_denominator=10**9)
DECIMALS = st.decimals(min_value=0, max_value=10**9, places=6).map(lambda d: f"{d:f}")
DENSITIES = st.decimals(min_value="0.5", max_value=2, places=4).map(lambda d: Quantity(f"{d:f}", "kg/L"))
HOSTILE = st.text(max_size=60) | st.text(alphabet="mgLuµ/*^()-. 0123456789eEd%°CFpH", max_size=60)


@given(EXACT, PAIRS)
def test_there_and_back_returns_the_same_number(value, pair):
    there = convert(value, pair[0], pair[1])
    assert convert(there, pair[1], pair[0]) == value


@given(EXACT, PAIRS, st.sampled_from(["mg/L", "gal", "lb", "degF", "S/m", "kg/d"]))
def test_a_detour_changes_nothing(value, pair, between):
    if kind_of(between) != kind_of(pair[0]) or "density" in map(kind_of, pair):
        between = pair[0]
    assert convert(convert(value, pair[0], between), between, pair[1]) == convert(value, *pair)


@given(EXACT, DENSITIES)
def test_mass_ratio_goes_there_and_back_through_any_density(value, density):
    mg_l = convert(value, "ppb", "mg/L", density=density)
    assert mg_l == value * density.magnitude / 1000
    assert convert(mg_l, "mg/L", "ug/kg", density=density) == value


@given(DECIMALS)
@example("0.11")
def test_milligrams_equal_a_thousand_micrograms(text):
    micrograms = f"{Decimal(text).scaleb(3):f}"
    small, large = Quantity(micrograms, "ug/L"), Quantity(text, "mg/L")
    assert canonical(small, "concentration") == canonical(large, "concentration")


FIFTEEN = st.tuples(st.integers(0, 10**15 - 1), st.integers(-12, 3)).map(lambda p: f"{p[0]}e{p[1]}")


@given(FIFTEEN, FIFTEEN, st.sampled_from(["mg/L", "ug/L", "lb/gal"]))
def test_canonical_doubles_keep_the_order_of_decimals(first, second, unit):
    exact = [canonical(Quantity(text, unit), "concentration") for text in (first, second)]
    doubles = [nearest(value) for value in exact]
    if exact[0] <= exact[1]:
        assert doubles[0] <= doubles[1]
    else:
        assert doubles[0] >= doubles[1]


@given(FIFTEEN, FIFTEEN)
def test_different_decimals_of_fifteen_digits_give_different_doubles(first, second):
    exact = [canonical(Quantity(text, "ug/L"), "concentration") for text in (first, second)]
    assert (exact[0] == exact[1]) == (nearest(exact[0]) == nearest(exact[1]))


@given(FIFTEEN)
def test_the_power_of_ten_way_equals_the_exact_way(text):
    number = read_cell(f"{Decimal(text):f}", decimal_comma=False).number
    exponent = power_of_ten("ug/L", "mg/L")
    assert float(f"{number}e{exponent}") == nearest(canonical(Quantity(text, "ug/L"), "concentration"))


@given(EXACT)
def test_no_double_is_nearer_than_the_nearest(value):
    double = nearest(value)
    assert double == float(value)
    for neighbour in (math.nextafter(double, -math.inf), math.nextafter(double, math.inf)):
        assert abs(Fraction(double) - value) <= abs(Fraction(neighbour) - value)


@given(EXACT, st.integers(1, 20))
def test_decimal_text_is_within_half_a_last_digit(value, digits):
    text = decimal_text(value, digits=digits)
    assert "e" not in text.lower()
    assert abs(Fraction(text) - value) <= abs(value) / 2 / Fraction(10) ** (digits - 1)


@given(EXACT, PAIRS)
def test_the_working_holds_its_own_arithmetic(value, pair):
    shown = conversion(value, *pair)
    assert shown.value == value * shown.factor + shown.offset == convert(value, *pair)


@given(HOSTILE)
@example("m**999999999")
@example("__import__('os').system('true')")
@example("((((((((((m))))))))))")
@example("mg/" * 13)
@example("\u00b5g/l")
@example("\ufdfa" * 40)
def test_any_text_is_a_unit_or_a_refusal(text):
    try:
        name, kind = read_unit(text)
    except EffluentError:
        return
    assert kind in KINDS
    assert convert(Fraction(0), text, text) == 0, name


@given(HOSTILE, st.booleans(), st.booleans(), st.sampled_from(["", "0.5", "<1", "x"]))
def test_any_text_is_a_reading_or_a_refusal(text, decimal_comma, negative, reporting_limit):
    try:
        cell = read_cell(
            text, decimal_comma=decimal_comma, negative=negative, reporting_limit=reporting_limit
        )
    except EffluentError:
        return
    assert Quantity(cell.number, "mg/L").magnitude >= 0 or negative
    assert float(cell.number + "e-3") == nearest(Fraction(cell.number) / 1000)


@given(FIFTEEN, st.sampled_from(["", "<", ">"]), st.booleans())
def test_a_cell_keeps_the_number_it_shows(text, sign, comma):
    plain = f"{Decimal(text):.15f}"
    shown = sign + (plain.replace(".", ",") if comma else plain)
    if sign and not Decimal(text):
        return
    cell = read_cell(shown, decimal_comma=comma)
    assert (Fraction(cell.number), cell.qualifier) == (Fraction(plain), sign or "=")
