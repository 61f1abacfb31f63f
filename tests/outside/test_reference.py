"""The shipped tables against the published rules, re-typed here, and against independent libraries.

Each figure below was typed from the cited text, not from the shipped file. Unless another edition is
named the text is that of the 2015 annual edition of the CFR, read on 2026-12-01.
"""

import itertools
from datetime import UTC, datetime

import molmass
import pytest
from chemicals.identifiers import search_chemical

from effluent.calc.spelling import read_unit
from effluent.domain.limit import Bound, BrokenBy, Statistic
from effluent.domain.sample import Fraction
from effluent.reference import analyte, code, holding, limit, waste_code

# 40 CFR 433.15(a), (b) and 433.17(a), (b): mg/L, maximum for any one day and monthly average.
# Only cadmium differs between the two.
BOTH_433 = {
    "chromium": ("2.77", "1.71"),
    "copper": ("3.38", "2.07"),
    "lead": ("0.69", "0.43"),
    "nickel": ("3.98", "2.38"),
    "silver": ("0.43", "0.24"),
    "zinc": ("2.61", "1.48"),
    "cyanide": ("1.20", "0.65"),
    "cyanide amenable": ("0.86", "0.32"),
}
METAL_FINISHING = {
    "40CFR433.15": {"cadmium": ("0.69", "0.26"), **BOTH_433},
    "40CFR433.17": {"cadmium": ("0.11", "0.07"), **BOTH_433},
}

# 40 CFR 413.14: mg/L, maximum for any one day and average over 4 consecutive monitoring days.
ELECTROPLATING = {
    # (b) less than 38,000 L a day
    "40CFR413.14b": {"cyanide-amenable": ("5.0", "2.7"), "lead": ("0.6", "0.4"), "cadmium": ("1.2", "0.7")},
    # (c) 38,000 L a day or more
    "40CFR413.14c": {
        "cyanide": ("1.9", "1.0"),
        "copper": ("4.5", "2.7"),
        "nickel": ("4.1", "2.6"),
        "chromium": ("7.0", "4.0"),
        "zinc": ("4.2", "2.6"),
        "lead": ("0.6", "0.4"),
        "cadmium": ("1.2", "0.7"),
        "total-metals": ("10.5", "6.8"),
    },
}

# 40 CFR 261.24 Table 1: waste number, contaminant, CAS number, regulatory level in mg/L.
TOXICITY = [
    ("D004", "arsenic", "7440-38-2", "5.0"),
    ("D005", "barium", "7440-39-3", "100.0"),
    ("D006", "cadmium", "7440-43-9", "1.0"),
    ("D007", "chromium", "7440-47-3", "5.0"),
    ("D008", "lead", "7439-92-1", "5.0"),
    ("D009", "mercury", "7439-97-6", "0.2"),
    ("D010", "selenium", "7782-49-2", "1.0"),
    ("D011", "silver", "7440-22-4", "5.0"),
    ("D018", "benzene", "71-43-2", "0.5"),
    ("D030", "2,4-dinitrotoluene", "121-14-2", "0.13"),
    ("D031", "heptachlor", "76-44-8", "0.008"),
    ("D035", "methyl ethyl ketone", "78-93-3", "200.0"),
    ("D039", "tetrachloroethylene", "127-18-4", "0.7"),
    ("D040", "trichloroethylene", "79-01-6", "0.5"),
    ("D043", "vinyl chloride", "75-01-4", "0.2"),
]

# 40 CFR 268.48 Table UTS: wastewater mg/L, nonwastewater mg/L TCLP.
TREATMENT = [
    ("antimony", "1.9", "1.15"),
    ("arsenic", "1.4", "5.0"),
    ("barium", "1.2", "21"),
    ("beryllium", "0.82", "1.22"),
    ("cadmium", "0.69", "0.11"),
    ("chromium", "2.77", "0.60"),
    ("lead", "0.69", "0.75"),
    ("mercury", "0.15", "0.025"),
    ("nickel", "3.98", "11"),
    ("selenium", "0.82", "5.7"),
    ("silver", "0.43", "0.14"),
    ("thallium", "1.4", "0.20"),
    ("vanadium", "4.3", "1.6"),
    ("zinc", "2.61", "4.3"),
]

# 40 CFR 136.3 Table II: parameter, maximum holding time, and when a grab of 31 January 2026,
# 12:00 UTC, runs out (reckoned on a wall calendar).
HOLDING = [
    ("cadmium", "6 months", datetime(2026, 7, 31, 12, tzinfo=UTC)),
    ("hardness", "6 months", datetime(2026, 7, 31, 12, tzinfo=UTC)),
    ("mercury", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("chromium vi", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("oil and grease", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("chemical oxygen demand", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("total organic carbon", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("conductivity", "28 days", datetime(2026, 2, 28, 12, tzinfo=UTC)),
    ("cyanide", "14 days", datetime(2026, 2, 14, 12, tzinfo=UTC)),
    ("alkalinity", "14 days", datetime(2026, 2, 14, 12, tzinfo=UTC)),
    ("toluene", "14 days", datetime(2026, 2, 14, 12, tzinfo=UTC)),
    ("total suspended solids", "7 days", datetime(2026, 2, 7, 12, tzinfo=UTC)),
    ("sulfide", "7 days", datetime(2026, 2, 7, 12, tzinfo=UTC)),
    ("biochemical oxygen demand", "48 hours", datetime(2026, 2, 2, 12, tzinfo=UTC)),
    ("surfactants", "48 hours", datetime(2026, 2, 2, 12, tzinfo=UTC)),
    ("nitrate as n", "48 hours", datetime(2026, 2, 2, 12, tzinfo=UTC)),
    ("turbidity", "48 hours", datetime(2026, 2, 2, 12, tzinfo=UTC)),
    ("ph", "15 minutes", datetime(2026, 1, 31, 12, 15, tzinfo=UTC)),
    ("residual chlorine", "15 minutes", datetime(2026, 1, 31, 12, 15, tzinfo=UTC)),
]

# The independent library holds no record of the first three (mixtures), and under chlordane it holds
# the technical product, where 261.24 gives the number of the substance.
UNLISTED = {"toxaphene", "xylenes", "kerosene", "chlordane"}

ELEMENTS = [
    item
    for item in analyte.analytes()
    if (item.group == "metal" and item.symbol.isalpha()) or item.key in {"boron", "phosphorus"}
]


def written(key):
    found = limit.row(key)
    return found.value.text, found.value.unit


@pytest.mark.parametrize("table", METAL_FINISHING)
def test_metal_finishing_limits_equal_the_rule(table):
    for key, (day, month) in METAL_FINISHING[table].items():
        name = key.replace(" ", "-")
        assert written(f"{table}/{name}/daily") == (day, "mg/L")
        assert written(f"{table}/{name}/month") == (month, "mg/L")


@pytest.mark.parametrize("table", METAL_FINISHING)
def test_metal_finishing_table_holds_the_rule_and_nothing_else(table):
    statistics = {(row.analyte, row.statistic) for row in limit.rows(table)}
    averaged = set(itertools.product(METAL_FINISHING[table], (Statistic.DAILY, Statistic.MONTH)))
    assert statistics == averaged | {("total toxic organics", Statistic.DAILY)}
    assert written(f"{table}/total-toxic-organics/daily") == ("2.13", "mg/L")


def test_cadmium_of_new_metal_finishers_is_011_a_day_and_007_a_month():
    assert written("40CFR433.17/cadmium/daily") == ("0.11", "mg/L")
    assert written("40CFR433.17/cadmium/month") == ("0.07", "mg/L")


@pytest.mark.parametrize("prefix", ELECTROPLATING)
def test_electroplating_limits_equal_the_rule(prefix):
    for name, (day, four_days) in ELECTROPLATING[prefix].items():
        assert written(f"{prefix}/{name}/daily") == (day, "mg/L")
        assert written(f"{prefix}/{name}/four-day") == (four_days, "mg/L")
        assert limit.row(f"{prefix}/{name}/four-day").statistic is Statistic.FOUR_DAY


@pytest.mark.parametrize(("number", "key", "cas", "level"), TOXICITY)
def test_toxicity_level_equals_the_rule(number, key, cas, level):
    found = limit.row(f"40CFR261.24/{key.replace(' ', '-')}/instantaneous")
    assert (str(found.value), found.waste_code) == (f"{level} mg/L", number)
    assert analyte.by_key(key).cas == cas
    assert waste_code.waste_code(number).cas == cas


def test_toxicity_levels_are_broken_when_reached_in_the_extract():
    # 261.24(a): "equal to or greater than" the level, in the extract of Method 1311
    for found in limit.rows("40CFR261.24"):
        assert found.broken_by is BrokenBy.REACHING
        assert found.fraction is Fraction.TCLP


def test_toxicity_table_has_forty_contaminants():
    # Table 1 runs from D004 to D043
    assert len(limit.rows("40CFR261.24")) == 40


def test_treatment_works_refuse_below_60_degrees_and_below_ph_5_but_take_the_values_themselves():
    # 40 CFR 403.5(b)(1): flash point less than 60 °C; (b)(2): pH lower than 5.0
    flash, ph = limit.rows("40CFR403.5")
    assert (str(flash.value), flash.bound, flash.broken_by) == ("60 °C", Bound.MINIMUM, BrokenBy.BEYOND)
    assert (str(ph.value), ph.bound, ph.broken_by) == ("5.0 s.u.", Bound.MINIMUM, BrokenBy.BEYOND)


def test_corrosive_waste_begins_at_ph_2_and_at_ph_12_5():
    # 40 CFR 261.22(a)(1): less than or equal to 2, or greater than or equal to 12.5
    low, high = limit.rows("40CFR261.22")
    assert (low.value.text, low.bound, low.broken_by) == ("2", Bound.MINIMUM, BrokenBy.REACHING)
    assert (high.value.text, high.bound, high.broken_by) == ("12.5", Bound.MAXIMUM, BrokenBy.REACHING)


def test_cadmium_of_pigment_makers_and_tank_barges_equals_the_rules():
    # 40 CFR 415.644 (eCFR of 4 June 2026) and 442.35
    assert written("40CFR415.644/cadmium/daily") == ("0.84", "mg/L")
    assert written("40CFR442.35/cadmium/daily") == ("0.020", "mg/L")


@pytest.mark.parametrize(("key", "wastewater", "extract"), TREATMENT)
def test_treatment_standards_equal_the_rule(key, wastewater, extract):
    assert written(f"40CFR268.48/{key}/daily") == (wastewater, "mg/L")
    assert written(f"40CFR268.48/{key}/tclp/instantaneous") == (extract, "mg/L")


def test_european_cadmium_classes_equal_the_directive():
    # Directive 2008/105/EC Annex I Part A No 6, µg/L: annual average, maximum
    # allowable concentration; legislation.gov.uk/eudr/2008/105/annexes
    classes = [("0.08", "0.45"), ("0.08", "0.45"), ("0.09", "0.6"), ("0.15", "0.9"), ("0.25", "1.5")]
    for number, (average, maximum) in enumerate(classes, start=1):
        assert written(f"EU2008-105/cadmium/class-{number}/year") == (average, "µg/L")
        assert written(f"EU2008-105/cadmium/class-{number}/instantaneous") == (maximum, "µg/L")


@pytest.mark.parametrize(("key", "words", "last"), HOLDING)
def test_holding_time_equals_the_rule(key, words, last):
    found = holding.holding(key)
    assert str(found) == words
    assert holding.deadline(datetime(2026, 1, 31, 12, tzinfo=UTC), found) == last


def test_oil_and_grease_goes_into_glass_only():
    # 40 CFR 136.3 Table II, parameter 41: container G
    assert holding.holding("oil and grease").container == "glass"


def test_container_and_unit_codes_equal_the_form():
    # EPA Form 8700-22 instructions, Item 10 Table I and Item 12 Table II
    types = "BA CF CM CW CY DF DM DT DW HG TC TP TT"
    assert [item.code for item in code.container_codes()] == types.split()
    assert [item.code for item in code.unit_codes()] == list("GKLMNPTY")


@pytest.mark.parametrize("item", ELEMENTS, ids=lambda item: item.key)
def test_symbol_and_name_equal_the_periodic_table(item):
    # molmass carries the elements with their symbols; it spells aluminium the same way
    assert molmass.ELEMENTS[item.symbol].name.casefold() == item.key


@pytest.mark.parametrize(
    "item",
    [item for item in analyte.analytes() if item.cas and item.key not in UNLISTED],
    ids=lambda item: item.key,
)
def test_cas_number_belongs_to_the_substance(item):
    # the chemicals package indexes the same number under this name, or, for ions and for
    # nitrogen forms that the trade names by their basis, under the name before the basis
    name = {"chromium iii": "Cr+3", "chromium vi": "chromium(VI)", "2,4,5-tp": "fenoprop"}.get(
        item.key, item.key.split(" as ")[0]
    )
    assert search_chemical(name).CASs == item.cas


def test_every_cas_number_passes_its_check_digit():
    numbers = [item.cas for item in analyte.analytes() if item.cas]
    assert len(numbers) > 80
    assert all(analyte.cas_is_valid(number) for number in numbers)


def test_chlordane_of_the_rule_is_the_substance():
    # 40 CFR 261.24 Table 1: 57-74-9; the chemicals package gives that number the formula of chlordane
    assert analyte.by_key("chlordane").cas == "57-74-9"
    assert search_chemical("57-74-9").formula == "C10H6Cl8"


@pytest.mark.parametrize("digit", "012345678")
def test_wrong_last_digit_never_passes(digit):
    assert not analyte.cas_is_valid(f"7440-43-{digit}")


def test_published_example_of_the_check_digit_holds():
    # CAS's own worked example: 107-07-3, (1x7 + 2x0 + 3x7 + 4x0 + 5x1) = 33; from memory
    assert analyte.cas_is_valid("107-07-3")


def test_every_unit_measures_what_its_analyte_is():
    for row in limit.rows():
        assert read_unit(row.value.unit).kind == analyte.by_key(row.analyte).kind, row.key
