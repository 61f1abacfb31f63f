"""Averages held against limits; figures are worked by hand beside each check, readings are invented."""

from datetime import date

import pytest

from effluent.calc.average_verdict import is_average, judge_averages, unaveraged
from effluent.calc.reading import Reading
from effluent.calc.units import canonical_unit, convert, nearest
from effluent.domain import (
    Bound,
    BrokenBy,
    Fraction,
    Limit,
    NonDetectRule,
    Outcome,
    Qualifier,
    Quantity,
    Rounding,
    Statistic,
    exact,
)

WITHIN, NEAR, OVER, UNDETERMINED = Outcome
MONTH, YEAR, FOUR_DAY = Statistic.MONTH, Statistic.YEAR, Statistic.FOUR_DAY


def reading(row, day, written, **changes):
    """Read '<0.5 mg/L' on a day of March 2026, or on a date."""
    sign = written[0] if written[0] in "<>" else "="
    number, _, unit = written.lstrip("<>").partition(" ")
    wanted = canonical_unit(unit or "s.u.")
    known = {"row": row, "sample": f"S{row}", "analyte": "cadmium", "fraction": Fraction.TOTAL}
    known |= {"day": date(2026, 3, day) if isinstance(day, int) else day, "number": number, "unit": unit}
    known |= {"value": nearest(convert(exact(number), unit or "s.u.", wanted)), "canonical_unit": wanted}
    return Reading(**(known | {"qualifier": Qualifier(sign)} | changes))


def limit(written="0.07 mg/L", statistic=MONTH, **changes):
    known = {"code": "L1", "point": "P1", "analyte": "cadmium", "effective_from": date(2020, 1, 1)}
    known |= {"authority": "Invented council", "document": "permit 1", "entered_by": "P01"}
    known |= {"verified_by": "P02", "value": Quantity.parse(written), "statistic": statistic}
    return Limit(**(known | changes))


def month(*written, days=None, **changes):
    """Judge readings of consecutive days against a monthly average of 0.07 mg/L."""
    given = [reading(n, (days or range(1, 32))[n - 1], text) for n, text in enumerate(written, 1)]
    (verdict,) = judge_averages(given, [limit(**changes)])
    return verdict


# 40 CFR 433.17(a): cadmium, monthly average 0.07 mg/L. In doubles ten times 0.07 has a mean above 0.07.
@pytest.mark.parametrize(
    ("written", "expected"),
    [
        (["0.05 mg/L", "0.07 mg/L", "0.09 mg/L"], WITHIN),
        (["0.05 mg/L", "0.07 mg/L", "0.09000000000000000001 mg/L"], OVER),
        (["0.07 mg/L"] * 10, WITHIN),
        (["50 ug/L", "0.00007 g/L", "0.09 mg/L"], WITHIN),
        (["<0.005 mg/L", "0.13 mg/L"], WITHIN),  # 0.065 to below 0.0675
        (["<0.005 mg/L", "0.14 mg/L"], UNDETERMINED),  # 0.07 may be reached, more not: 0.07 to below 0.0725
        (["<0.005 mg/L", "0.15 mg/L"], OVER),  # 0.075 at the least
        (["<0.07 mg/L", "<0.07 mg/L"], WITHIN),
        (["<0.08 mg/L", "<0.08 mg/L"], UNDETERMINED),
        ([">0.05 mg/L", "0.05 mg/L"], UNDETERMINED),
        ([">0.09 mg/L", "0.05 mg/L"], OVER),  # strictly more than 0.07
    ],
)
def test_an_average_is_judged_by_its_bounds(written, expected):
    assert month(*written).outcome == expected


# 0.14 and <0.02: 0.07 with zero, 0.075 with half of it, 0.08 with all of it
@pytest.mark.parametrize(
    ("rule", "expected"), [("zero", WITHIN), ("half", OVER), ("full", OVER), ("bounds only", UNDETERMINED)]
)
def test_bounds_astride_are_decided_by_the_rule_of_the_limit(rule, expected):
    verdict = month("0.14 mg/L", "<0.02 mg/L", nondetects=NonDetectRule(rule))
    assert verdict.outcome == expected
    assert ("another rule could answer otherwise" in verdict.reason) == (rule != "bounds only")
    assert "0.07 to below 0.08 mg/L whatever" in verdict.reason


@pytest.mark.parametrize("rule", NonDetectRule)
def test_bounds_on_one_side_settle_it_whatever_the_rule(rule):
    assert month("0.15 mg/L", "<0.02 mg/L", nondetects=rule).outcome == OVER
    assert month("0.05 mg/L", "<0.02 mg/L", nondetects=rule).outcome == WITHIN


# The mean of 0.05 and 0.09 is 0.07; that of <0.07 and 0.07 is below it.
@pytest.mark.parametrize(
    ("bound", "broken_by", "exactly", "below"),
    [
        (Bound.MAXIMUM, BrokenBy.BEYOND, WITHIN, WITHIN),
        (Bound.MAXIMUM, BrokenBy.REACHING, OVER, WITHIN),
        (Bound.MINIMUM, BrokenBy.BEYOND, WITHIN, OVER),
        (Bound.MINIMUM, BrokenBy.REACHING, OVER, OVER),
    ],
)
def test_an_average_on_the_limit(bound, broken_by, exactly, below):
    assert month("0.05 mg/L", "0.09 mg/L", bound=bound, broken_by=broken_by).outcome == exactly
    assert month("<0.07 mg/L", "0.07 mg/L", bound=bound, broken_by=broken_by).outcome == below


def test_what_lies_above_the_measuring_range_meets_a_minimum():
    assert month(">0.08 mg/L", "0.06 mg/L", bound=Bound.MINIMUM).outcome == WITHIN


# Half to even to the last figure of 0.07: 0.075 becomes 0.08, 0.0749 and 0.065 become 0.07 and 0.06.
@pytest.mark.parametrize(("text", "expected"), [("0.075", OVER), ("0.0749", WITHIN), ("0.065", WITHIN)])
def test_the_average_is_rounded_as_the_limit_says(text, expected):
    verdict = month(f"{text} mg/L", f"{text} mg/L", rounding=Rounding.SIGNIFICANT_FIGURES)
    assert verdict.outcome == expected


# Action level 0.06; the averages are 0.06, 0.05, 0.055 to below 0.0625, and the last under a rule 0.0625.
def test_an_average_at_the_action_level_is_near():
    level = {"action_level": Quantity.parse("0.06 mg/L")}
    assert month("0.05 mg/L", "0.07 mg/L", **level).outcome == NEAR
    assert month("0.05 mg/L", "0.05 mg/L", **level).outcome == WITHIN
    unsure = month("0.11 mg/L", "<0.015 mg/L", **level)
    assert (unsure.outcome, unsure.notes) == (WITHIN, (unsure.notes[0],))
    assert "depends on what the non-detects hide" in unsure.notes[0]
    assert month("0.11 mg/L", "<0.015 mg/L", nondetects=NonDetectRule.FULL, **level).outcome == NEAR


def test_a_day_counts_once_however_many_readings_it_has():
    """0.03 and 0.05 make 0.04; with 0.1 the average is 0.07. All three alike would make 0.06."""
    verdict = month("0.03 mg/L", "0.05 mg/L", "0.10 mg/L", days=[2, 2, 9])
    assert "average: (0.04 + 0.1) / 2 = 0.07 mg/L" in verdict.working
    assert (verdict.samples, verdict.results, verdict.margin) == (("S1", "S2", "S3"), (1, 2, 3), 0)


def test_a_month_and_a_year_end_on_their_last_day():
    days = [date(2026, 3, 1), date(2026, 3, 31), date(2026, 4, 1), date(2027, 1, 1)]
    given = [reading(n, day, "0.01 mg/L") for n, day in enumerate(days, 1)]
    ends = [v.day for v in judge_averages(given, [limit()])]
    assert ends == [date(2026, 3, 31), date(2026, 4, 30), date(2027, 1, 31)]
    years = judge_averages(given, [limit(statistic=YEAR)])
    assert [(v.day, v.results) for v in years] == [
        (date(2026, 12, 31), (1, 2, 3)),
        (date(2027, 12, 31), (4,)),
    ]


def test_four_monitoring_days_need_not_follow_each_other_in_the_calendar():
    """(0.1 + 0 + 0 + 0.1) / 4 = 0.05; (0 + 0 + 0.1 + 0.3) / 4 = 0.1. 40 CFR 413.14: days with a sample."""
    texts = ["0.1 mg/L", "0 mg/L", "0 mg/L", "0.1 mg/L", "0.3 mg/L"]
    given = [reading(n, 1 + 5 * n, text) for n, text in enumerate(texts, 1)]
    first, second = judge_averages(given, [limit(statistic=FOUR_DAY)])
    assert (first.outcome, first.day, first.results) == (WITHIN, date(2026, 3, 21), (1, 2, 3, 4))
    assert (second.outcome, second.day, second.results) == (OVER, date(2026, 3, 26), (2, 3, 4, 5))


def test_fewer_than_four_monitoring_days_give_no_average():
    given = [reading(n, n, "0.1 mg/L") for n in (1, 2, 3)]
    asked = limit(statistic=FOUR_DAY)
    assert judge_averages(given, [asked]) == ()
    assert unaveraged(given, asked, samples={"S1"}).endswith("needs 4 of them; so far: 3")


def test_only_readings_of_the_limits_own_fraction_and_kind_count():
    given = [
        reading(1, 2, "0.05 mg/L"),
        reading(2, 2, "0.5 mg/L", fraction=Fraction.DISSOLVED),
        reading(3, 3, "900 mg/kg"),
        reading(4, 4, "900 mg/L", analyte="zinc"),
    ]
    (verdict,) = judge_averages(given, [limit()])
    assert verdict.results == (1,)
    assert unaveraged(given, limit(), samples={"S1"}) == ""
    assert sum(line.startswith("not in the average: reading: result") for line in verdict.working) == 2
    assert any(note.startswith("readings not in the average: 2; only") for note in verdict.notes)
    assert unaveraged(given, limit(), samples={"S2", "S3"}).startswith(
        "no reading counts: only readings of total"
    )


@pytest.mark.parametrize("text", ["7 ", "30 degC"])
def test_ph_and_temperature_are_not_averaged(text):
    asked = limit(text.strip(), analyte="acidity")
    given = [reading(1, 1, text.strip(), analyte="acidity")]
    assert judge_averages(given, [asked]) == ()
    assert "report minimum and maximum" in unaveraged(given, asked, samples={"S1"})


def test_notes_tell_what_a_reader_must_know():
    given = [reading(1, 2, "0.05 mg/L", late=True, flag="J"), reading(2, date(2026, 2, 1), "9 mg/L")]
    (verdict,) = judge_averages(given, [limit(verified_by=None, effective_from=date(2026, 3, 2))])
    assert verdict.notes == (
        "limit not verified by a second person",
        "analysed outside its holding time",
        "estimated value (J)",
        "one sample in the month is the average",
        "the limit was in force for part of the month only",
    )
    assert [f"note: {note}" for note in verdict.notes] == list(verdict.working[-5:])


@pytest.mark.parametrize("statistic", Statistic)
def test_which_limits_are_averages(statistic):
    assert is_average(limit(statistic=statistic)) == (statistic in (MONTH, YEAR, FOUR_DAY))
