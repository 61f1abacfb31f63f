"""Rules of authorities against their own tables and examples.

Texts of the CFR are those of the 2015 annual edition, read on 2026-12-01, unless another is named. "Derived"
says that the answer follows from the text read and was published nowhere.
"""

from datetime import date
from fractions import Fraction as Rational

import pytest
from scipy.constants import gallon, pound

from effluent.calc.hardness import cadmium_acute, cadmium_chronic, cadmium_class, cadmium_eqs
from effluent.calc.load import conventional_lb, mass_kg
from effluent.calc.noncompliance import (
    Criteria,
    Finding,
    Measurement,
    MonthCounts,
    count_violations,
    rolling_quarters,
    significant_noncompliance,
)
from effluent.calc.observation import Observation
from effluent.calc.units import convert
from effluent.calc.wastestream import Stream, StreamKind, combined_concentration
from effluent.domain import BrokenBy
from effluent.reference.average import average_rows, thirty_day

HALF = (date(2026, 1, 1), date(2026, 6, 30))


def judged(values, limit, **changed):
    measurements = [
        Measurement(day=date(2026, 3, 2), observed=Observation(value=Rational(value)), limit=Rational(limit))
        for value in values
    ]
    (window,) = significant_noncompliance(measurements, [HALF], criteria=Criteria(**changed))
    return window


# 40 CFR 403.8(f)(2)(viii)(A) and (B) with the cadmium limit of 433.17, 0.11 mg/L; derived
@pytest.mark.parametrize(
    ("values", "chronic", "technical", "finding"),
    [
        (["0.12", "0.12", "0.10"], 2, 0, Finding.MET),
        (["0.12", "0.12", "0.10", "0.10"], 2, 0, Finding.NOT_MET),
        (["0.132", "0.10", "0.10"], 1, 1, Finding.MET),
        (["0.1319999999999999999", "0.10", "0.10"], 1, 0, Finding.NOT_MET),
        (["0.11"] * 6, 0, 0, Finding.NOT_MET),
        (["0.12"], 1, 0, Finding.MET),
    ],
)
def test_significant_noncompliance_at_its_boundaries(values, chronic, technical, finding):
    window = judged(values, "0.11")
    assert (window.chronic.surely, window.technical.surely, window.finding) == (chronic, technical, finding)


# The same text: 66 % and 33 % "or more"; two thirds is more than 66 %, and 66 of 100 is enough
@pytest.mark.parametrize(
    ("over", "count", "finding"),
    [(66, 100, Finding.MET), (65, 100, Finding.NOT_MET), (2, 3, Finding.MET), (33, 50, Finding.MET)],
)
def test_chronic_percentage_is_reached_by_being_equalled(over, count, finding):
    assert judged(["0.111"] * over + ["0.1"] * (count - over), "0.11").finding == finding


@pytest.mark.parametrize(
    ("over", "count", "finding"),
    [(33, 100, Finding.MET), (32, 100, Finding.NOT_MET), (1, 3, Finding.MET)],
)
def test_technical_percentage_is_reached_by_being_equalled(over, count, finding):
    assert judged(["0.132"] * over + ["0.1"] * (count - over), "0.11").finding == finding


# Limits of 40 CFR 433.15 whose product with 1.2 in binary floating point lies below the decimal one
@pytest.mark.parametrize(("limit", "line"), [("2.61", "3.132"), ("2.07", "2.484"), ("4.5", "5.4")])
def test_line_of_the_technical_review_is_the_decimal_one(limit, line):
    assert float(limit) * 1.2 < float(line)
    assert judged([line], limit).technical.surely == 1
    just_below = Rational(line) - Rational(1, 10**17)
    assert judged([just_below], limit).technical.surely == 0


# BOD, TSS, fats, oil and grease: 1.4 in the same text
def test_line_for_conventional_pollutants_lies_at_one_point_four():
    assert judged(["140"], "100", technical_factor=Rational("1.4")).technical.surely == 1
    assert judged(["139.9"], "100", technical_factor=Rational("1.4")).technical.surely == 0


# Claremore, Oklahoma, code 52.051: "equal or exceed" in the chronic criterion too
def test_local_code_counts_the_limit_itself():
    assert judged(["0.11"], "0.11", chronic_broken_by=BrokenBy.REACHING).finding == Finding.MET


# EPA memorandum of 9 September 1991, from memory: the windows of a calendar year
def test_windows_of_a_calendar_year():
    assert rolling_quarters(date(2026, 1, 1), date(2026, 12, 31)) == (
        (date(2025, 10, 1), date(2026, 3, 31)),
        (date(2026, 1, 1), date(2026, 6, 30)),
        (date(2026, 4, 1), date(2026, 9, 30)),
        (date(2026, 7, 1), date(2026, 12, 31)),
    )


# Eau Claire, Michigan, sewer code: a monthly average broken in a month of 31 days is 31 violations
def test_monthly_violation_counts_as_each_day():
    assert count_violations([], [date(2026, 7, 31)], month_counts=MonthCounts.EACH_DAY) == (0, 31)


# 40 CFR 413.04, its whole table: daily maximum, 4-day average, 30-day average
TABLE_413 = """
0.6 0.4 0.3    1.2 0.7 0.5    1.9 1 0.55     4.1 2.6 1.8    4.2 2.6 1.8
4.5 2.7 1.8    5.0 2.7 1.5    7.0 4 2.5      10.5 6.8 5     20.0 13.4 10
23 16 12       47 29 20       53 36 27       74 39 21       107 65 45
160 100 70     164 102 70     169 89 49      176 105 70     273 156 98
365 229 160    374 232 160    401 241 160    410 267 195    623 257 223
935 609 445
"""


def test_shipped_averages_are_those_of_the_rule():
    figures = [Rational(figure) for figure in TABLE_413.split()]
    printed = list(zip(figures[::3], figures[1::3], figures[2::3], strict=True))
    assert len(average_rows()) == len(printed) == 26
    assert [Rational(thirty_day(daily, four).thirty_day) for daily, four, _ in printed] == [
        thirty for _, _, thirty in printed
    ]


# 40 CFR 403.6(e) with cadmium of 433.15, 0.69 and 0.26 mg/L, a third of the flow dilution; derived
def test_combined_wastestream_formula():
    rinse = Stream(
        name="rinse",
        kind=StreamKind.REGULATED,
        flow=Rational(10_000),
        daily=Rational("0.69"),
        average=Rational("0.26"),
    )
    other = Stream(name="other", kind=StreamKind.DILUTION, flow=Rational(5_000))
    found = combined_concentration([rinse, other])
    assert (found.daily, f"{float(found.average):.5f}") == (Rational("0.46"), "0.17333")


# Operators' worked examples: wastewater101.net 2019/06, numbers 1 and 2, and water-chemistry.in 2009/01 (the
# last rounded); pounds a day by 8.34
@pytest.mark.parametrize(
    ("million_gal", "mg_l", "by_834", "exact"),
    [
        ("1.5", "15", 187.65, 187.77),
        ("0.88", "250", 1834.8, 1835.99),
        ("1.55", "210", 2714.67, 2716.43),
    ],
)
def test_loads_of_published_examples(million_gal, mg_l, by_834, exact):
    litres = convert(Rational(million_gal) * 10**6, "gal", "L")
    assert float(conventional_lb(Rational(mg_l), litres)) == pytest.approx(by_834, abs=0.005)
    pounds = convert(mass_kg(Rational(mg_l), litres), "kg", "lb")
    assert float(pounds) == pytest.approx(exact, abs=0.005)


# Constants of scipy (CODATA and NIST): a US gallon in m3 and a pound in kg
def test_exact_factor_equals_an_independent_library():
    litres = convert(Rational(10**6), "gal", "L")
    pounds = convert(mass_kg(Rational(1), litres), "kg", "lb")
    assert float(pounds) == pytest.approx(gallon * 1000 / pound, rel=1e-14)
    assert 1 - Rational("8.34") / pounds == pytest.approx(0.000648, abs=5e-7)


# EPA 2016: 1.8 and 0.72 ug/L at a hardness of 100, with conversion factors of 0.944 and 0.909; from memory
def test_cadmium_criteria_at_a_hardness_of_100():
    acute, chronic = cadmium_acute(Rational(100)), cadmium_chronic(Rational(100))
    assert (acute.value, chronic.value) == (Rational("1.8"), Rational("0.72"))
    assert (f"{acute.conversion_factor:.3f}", f"{chronic.conversion_factor:.3f}") == ("0.944", "0.909")


# Directive 2008/105/EC, Annex I, Part A, No 6: classes, year average and maximum in ug/L
@pytest.mark.parametrize(
    ("hardness", "number", "year", "most"),
    [
        ("39.9", 1, "0.08", "0.45"),
        ("40", 2, "0.08", "0.45"),
        ("49.999", 2, "0.08", "0.45"),
        ("50", 3, "0.09", "0.6"),
        ("100", 4, "0.15", "0.9"),
        ("200", 5, "0.25", "1.5"),
    ],
)
def test_cadmium_standards_by_hardness_class(hardness, number, year, most):
    assert cadmium_class(Rational(hardness)) == number
    assert [limit.value.text for limit in cadmium_eqs(Rational(hardness))] == [year, most]
