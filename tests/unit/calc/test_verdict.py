from datetime import date

import pytest

from effluent.calc.reading import frame
from effluent.calc.units import canonical, canonical_unit, nearest
from effluent.calc.verdict import Reading, judge, outcomes, strictest, without_reading
from effluent.domain import (
    Bound,
    BrokenBy,
    Fraction,
    Limit,
    Outcome,
    Qualifier,
    Quantity,
    Result,
    Rounding,
    Statistic,
)
from effluent.errors import NotComputed, ValueRefused

DAY = date(2026, 3, 1)
WITHIN, NEAR, OVER, UNDETERMINED = Outcome


def reading(written, *, density="", **changes):
    """Read '<0.5 mg/L' as a laboratory's result."""
    sign = written[0] if written[0] in "<>" else "="
    quantity = Quantity.parse(written.lstrip("<>"))
    wanted = canonical_unit(quantity.unit or "s.u.")
    through = Quantity.parse(density) if density else None
    kind = "concentration" if density else "limit" if quantity.unit else "pH"
    value = canonical(quantity, kind, density=through)
    known = {"row": 1, "sample": "S1", "day": DAY, "analyte": "cadmium", "fraction": Fraction.TOTAL}
    known |= {"number": quantity.text, "unit": quantity.unit, "density": density}
    known |= {"value": nearest(value), "canonical_unit": "mg/L" if density else wanted}
    return Reading(**(known | {"qualifier": Qualifier(sign)} | changes))


def limit(written, **changes):
    known = {"code": "L1", "point": "P1", "analyte": "cadmium", "effective_from": date(2020, 1, 1)}
    known |= {"authority": "Invented council", "document": "permit 1", "entered_by": "P01"}
    known |= {"verified_by": "P02", "value": Quantity.parse(written)}
    return Limit(**(known | changes))


def outcome(written, limit_written, **changes):
    (verdict,) = judge([reading(written)], [limit(limit_written, **changes)])
    return verdict.outcome


# 40 CFR 433.17: cadmium 0.11 mg/L, a daily maximum that may be reached
@pytest.mark.parametrize(
    ("written", "expected"),
    [
        ("0.11 mg/L", WITHIN),
        ("0.111 mg/L", OVER),
        ("110 ug/L", WITHIN),
        ("110.0000000000000001 ug/L", OVER),
        ("<0.11 mg/L", WITHIN),
        ("<0.12 mg/L", UNDETERMINED),
        (">0.11 mg/L", OVER),
        (">0.10 mg/L", UNDETERMINED),
    ],
)
def test_maximum_is_broken_beyond_its_value(written, expected):
    assert outcome(written, "0.11 mg/L") == expected


# 40 CFR 261.24, table 1: D006 cadmium, an extract at or above 1.0 mg/L is toxic
@pytest.mark.parametrize(
    ("written", "expected"),
    [
        ("1.0 mg/L", OVER),
        ("0.999 mg/L", WITHIN),
        ("1000 ug/L", OVER),
        ("<1.0 mg/L", WITHIN),
        ("<1.1 mg/L", UNDETERMINED),
        (">1.0 mg/L", OVER),
        (">0.9 mg/L", UNDETERMINED),
    ],
)
def test_maximum_that_may_not_be_reached_is_broken_at_its_value(written, expected):
    assert outcome(written, "1.0 mg/L", broken_by=BrokenBy.REACHING) == expected


# 40 CFR 403.5(b)(2): pH lower than 5.0 is prohibited; 403.5(b)(1): flash point of less than 60 degC
@pytest.mark.parametrize(
    ("written", "minimum", "expected"),
    [
        ("5.0", "5.0", WITHIN),
        ("4.9", "5.0 s.u.", OVER),
        ("<5.0", "5.0", OVER),
        ("<5.1", "5.0", UNDETERMINED),
        (">5.0", "5.0", WITHIN),
        (">4.9", "5.0", UNDETERMINED),
        ("60 degC", "60 degC", WITHIN),
        ("140 degF", "60 degC", WITHIN),
        ("139.9 degF", "60 degC", OVER),
        ("59.9 degC", "60 degC", OVER),
    ],
)
def test_minimum_is_the_mirror_image(written, minimum, expected):
    assert outcome(written, minimum, bound=Bound.MINIMUM) == expected


# 40 CFR 261.22(a)(1): pH at or below 2, or at or above 12.5, is corrosive
@pytest.mark.parametrize(
    ("written", "bound", "edge", "expected"),
    [
        ("2.0", Bound.MINIMUM, "2", OVER),
        ("2.01", Bound.MINIMUM, "2", WITHIN),
        ("<2.0", Bound.MINIMUM, "2", OVER),
        (">2.0", Bound.MINIMUM, "2", WITHIN),
        ("12.5", Bound.MAXIMUM, "12.5", OVER),
        ("12.49", Bound.MAXIMUM, "12.5", WITHIN),
    ],
)
def test_corrosive_ends_are_inclusive(written, bound, edge, expected):
    assert outcome(written, edge, bound=bound, broken_by=BrokenBy.REACHING) == expected


@pytest.mark.parametrize(
    ("written", "bound", "expected"),
    [
        ("0.08 mg/L", Bound.MAXIMUM, NEAR),
        ("0.079 mg/L", Bound.MAXIMUM, WITHIN),
        ("<0.08 mg/L", Bound.MAXIMUM, WITHIN),
        ("0.12 mg/L", Bound.MINIMUM, NEAR),
        ("0.15 mg/L", Bound.MINIMUM, NEAR),
        ("0.16 mg/L", Bound.MINIMUM, WITHIN),
        ("0.12 mg/L", Bound.MAXIMUM, OVER),
    ],
)
def test_reading_that_reaches_the_action_level_is_near(written, bound, expected):
    level = "80 ug/L" if bound == Bound.MAXIMUM else "150 ug/L"
    assert outcome(written, "0.11 mg/L", bound=bound, action_level=Quantity.parse(level)) == expected


def test_non_detect_above_the_action_level_says_that_near_is_open():
    (verdict,) = judge([reading("<0.1 mg/L")], [limit("0.11 mg/L", action_level=Quantity.parse("0.08 mg/L"))])
    assert verdict.outcome == WITHIN
    assert verdict.notes == (
        "the action level lies below what the reading can show: near or not is not known",
    )


# ASTM E29, rounding method: its table of examples, as recalled from memory
@pytest.mark.parametrize(
    ("written", "edge", "bound", "expected"),
    [
        ("35940 mg/L", "3.60e4 mg/L", Bound.MINIMUM, OVER),
        ("35950 mg/L", "3.60e4 mg/L", Bound.MINIMUM, WITHIN),
        ("35960 mg/L", "3.60e4 mg/L", Bound.MINIMUM, WITHIN),
        ("56.4 %", "57 %", Bound.MINIMUM, OVER),
        ("56.5 %", "57 %", Bound.MINIMUM, OVER),
        ("56.6 %", "57 %", Bound.MINIMUM, WITHIN),
        ("40.4 %", "40 %", Bound.MAXIMUM, WITHIN),
        ("40.5 %", "40 %", Bound.MAXIMUM, WITHIN),
        ("40.6 %", "40 %", Bound.MAXIMUM, OVER),
        ("0.54 %", "0.5 %", Bound.MAXIMUM, WITHIN),
        ("0.55 %", "0.5 %", Bound.MAXIMUM, OVER),
        ("0.56 %", "0.5 %", Bound.MAXIMUM, OVER),
    ],
)
def test_rounding_method_compares_the_rounded_reading(written, edge, bound, expected):
    assert outcome(written, edge, bound=bound, rounding=Rounding.SIGNIFICANT_FIGURES) == expected


def fraction_outcome(written, fraction, limit_fraction, **changes):
    (verdict,) = judge(
        [reading(written, fraction=fraction)], [limit("0.11 mg/L", fraction=limit_fraction, **changes)]
    )
    return verdict.outcome


@pytest.mark.parametrize(
    ("written", "expected"),
    [
        ("0.05 mg/L", UNDETERMINED),
        ("0.11 mg/L", UNDETERMINED),
        ("0.12 mg/L", OVER),
        ("<0.01 mg/L", UNDETERMINED),
        (">0.11 mg/L", OVER),
        (">0.10 mg/L", UNDETERMINED),
    ],
)
@pytest.mark.parametrize("part", [Fraction.DISSOLVED, Fraction.TOTAL_RECOVERABLE])
def test_part_can_only_prove_a_total_limit_broken(written, expected, part):
    assert fraction_outcome(written, part, Fraction.TOTAL) == expected


@pytest.mark.parametrize(
    ("written", "expected"),
    [
        ("0.05 mg/L", WITHIN),
        ("0.11 mg/L", WITHIN),
        ("0.12 mg/L", UNDETERMINED),
        ("<0.11 mg/L", WITHIN),
        ("<0.12 mg/L", UNDETERMINED),
        (">0.12 mg/L", UNDETERMINED),
    ],
)
def test_whole_can_only_prove_a_dissolved_limit_met(written, expected):
    assert fraction_outcome(written, Fraction.TOTAL, Fraction.DISSOLVED) == expected


def test_part_that_reaches_a_minimum_proves_it_met():
    found = fraction_outcome("0.11 mg/L", Fraction.DISSOLVED, Fraction.TOTAL, bound=Bound.MINIMUM)
    assert found == WITHIN


@pytest.mark.parametrize("pair", [(Fraction.TCLP, Fraction.TOTAL), (Fraction.TOTAL, Fraction.TCLP)])
@pytest.mark.parametrize("written", ["0.01 mg/L", "9 mg/L", "<0.01 mg/L", ">9 mg/L"])
def test_extract_and_water_prove_nothing_about_each_other(pair, written):
    assert fraction_outcome(written, *pair) == UNDETERMINED


def test_other_fraction_is_left_aside_where_the_sample_has_the_limits_own():
    readings = [reading("0.05 mg/L", fraction=Fraction.DISSOLVED), reading("0.06 mg/L", row=2)]
    (verdict,) = judge(readings, [limit("0.11 mg/L")])
    assert (verdict.outcome, verdict.results) == (WITHIN, (2,))


def test_other_fraction_that_proves_over_is_never_left_aside():
    readings = [reading("0.12 mg/L", fraction=Fraction.DISSOLVED), reading("0.06 mg/L", row=2)]
    assert strictest(judge(readings, [limit("0.11 mg/L")]))["S1"].outcome == OVER


def test_other_kind_of_unit_is_undetermined():
    (verdict,) = judge([reading("0.11 mg/kg")], [limit("0.11 mg/L")])
    assert (verdict.outcome, verdict.margin) == (UNDETERMINED, None)
    assert verdict.reason == (
        "the reading 0.11 mg/kg is a mass ratio, the limit 0.11 mg/L a concentration: "
        "nothing is proved; the density of the liquid would join them"
    )


def test_density_joins_mass_ratio_and_concentration():
    readings = [reading("0.1 ppm", density="1.1 kg/L"), reading("0.1 ppm", density="1.11 kg/L", row=2)]
    assert [v.outcome for v in judge(readings, [limit("0.11 mg/L")])] == [WITHIN, OVER]


@pytest.mark.parametrize(
    ("first", "last", "count"),
    [
        (DAY, DAY, 1),
        (date(2026, 3, 2), None, 0),
        (date(2020, 1, 1), date(2026, 2, 28), 0),
        (date(2020, 1, 1), None, 1),
    ],
)
def test_limit_applies_only_while_in_force(first, last, count):
    applied = limit("0.11 mg/L", effective_from=first, effective_to=last)
    assert len(judge([reading("1 mg/L")], [applied])) == count
    assert len(without_reading([reading("1 mg/L")], [applied])) == 1 - count


def test_days_out_of_force_are_left_out_one_by_one():
    readings = [reading("1 mg/L", day=date(2026, 3, day), row=day) for day in (1, 2, 3, 4)]
    applied = limit("0.11 mg/L", effective_from=date(2026, 3, 2), effective_to=date(2026, 3, 3))
    assert [v.results for v in judge(readings, [applied])] == [(2,), (3,)]


def test_limit_of_another_analyte_gives_no_verdict_and_is_named():
    lead = limit("0.69 mg/L", analyte="lead")
    assert judge([reading("1 mg/L")], [lead]) == ()
    assert without_reading([reading("1 mg/L")], [lead, limit("0.11 mg/L")]) == (lead,)


def test_nothing_gives_nothing():
    assert judge([], []) == judge([], [limit("0.11 mg/L")]) == judge([reading("1 mg/L")], []) == ()


DAILY = [
    (["0.05 mg/L", "0.09 mg/L"], WITHIN, "2"),
    (["0.10 mg/L", "0.09 mg/L"], NEAR, "1"),
    (["0.05 mg/L", "<0.5 mg/L"], UNDETERMINED, "2"),
    (["<0.5 mg/L", "0.12 mg/L", "0.13 mg/L"], OVER, "3"),
]


@pytest.mark.parametrize(("written", "expected", "decides"), DAILY)
def test_daily_verdict_is_that_of_the_worst_reading(written, expected, decides):
    readings = [reading(text, row=row) for row, text in enumerate(written, 1)]
    daily = limit("0.11 mg/L", statistic=Statistic.DAILY, action_level=Quantity.parse("0.095 mg/L"))
    (verdict,) = judge(readings, [daily])
    assert verdict.outcome == expected
    assert verdict.results == tuple(range(1, len(written) + 1))
    assert verdict.reason.endswith(f" (result {decides} decides, of {len(written)} readings of the day)")


def test_daily_verdicts_stand_for_one_day_each():
    readings = [
        reading("0.05 mg/L", row=1, sample="S2"),
        reading("0.05 mg/L", row=2),
        reading("0.2 mg/L", row=3, sample="S3", day=date(2026, 3, 2)),
    ]
    verdicts = judge(readings, [limit("0.11 mg/L", statistic=Statistic.DAILY)])
    assert [v.samples for v in verdicts] == [("S1", "S2"), ("S3",)]
    assert [v.outcome for v in verdicts] == [WITHIN, OVER]


def test_verdicts_come_by_day_sample_and_limit():
    readings = [reading("1 mg/L", sample="S2"), reading("1 mg/L", sample="S1")]
    verdicts = judge(readings, [limit("2 mg/L"), limit("3 mg/L", code="L2")])
    assert [(v.samples[0], v.limit.code) for v in verdicts] == [
        ("S1", "L1"),
        ("S1", "L2"),
        ("S2", "L1"),
        ("S2", "L2"),
    ]


@pytest.mark.parametrize(
    ("changes", "limit_changes", "note"),
    [
        ({}, {"verified_by": None}, "limit not verified by a second person"),
        ({"late": True}, {}, "analysed outside its holding time"),
        ({"flag": "J"}, {}, "estimated value (J)"),
        ({"flag": "b, j+"}, {}, "estimated value (J)"),
    ],
)
def test_verdict_carries_what_a_reader_must_know(changes, limit_changes, note):
    (verdict,) = judge([reading("0.1 mg/L", **changes)], [limit("0.11 mg/L", **limit_changes)])
    assert verdict.notes == (note,)
    assert verdict.working[-1] == f"note: {note}"


def test_flag_that_only_contains_the_letter_is_no_estimate():
    (verdict,) = judge([reading("0.1 mg/L", flag="REJ")], [limit("0.11 mg/L")])
    assert verdict.notes == ()


@pytest.mark.parametrize(
    ("written", "bound", "margin"),
    [
        ("0.055 mg/L", Bound.MAXIMUM, 0.5),
        ("0.22 mg/L", Bound.MAXIMUM, -1.0),
        ("<0.055 mg/L", Bound.MAXIMUM, 0.5),
        ("<0.5 mg/L", Bound.MAXIMUM, None),
        ("0.055 mg/L", Bound.MINIMUM, -0.5),
        ("220 ug/L", Bound.MINIMUM, 1.0),
    ],
)
def test_margin_is_the_share_of_the_limit_still_free(written, bound, margin):
    (verdict,) = judge([reading(written)], [limit("0.11 mg/L", bound=bound)])
    assert verdict.margin == (None if margin is None else pytest.approx(margin))


def test_margin_below_zero_degrees_keeps_its_sign():
    (verdict,) = judge([reading("-8 degC")], [limit("-10 degC", bound=Bound.MINIMUM)])
    assert (verdict.outcome, verdict.margin) == (WITHIN, pytest.approx(0.2))


def test_margin_of_a_limit_of_zero_is_none():
    (verdict,) = judge([reading("0.1 mg/L")], [limit("0 mg/L")])
    assert (verdict.outcome, verdict.margin) == (OVER, None)


@pytest.mark.parametrize("statistic", [s for s in Statistic if s not in ("instantaneous", "daily")])
def test_other_statistics_are_refused_by_name(statistic):
    with pytest.raises(NotComputed, match=rf"limit L1 \({statistic}, cadmium\) is not computed"):
        judge([reading("0.1 mg/L")], [limit("0.11 mg/L", statistic=statistic)])


def test_strictest_puts_undetermined_before_near_and_within():
    readings = [reading(w) for w in ("0.01 mg/L", "0.1 mg/L", "<0.5 mg/L")]
    applied = limit("0.11 mg/L", action_level=Quantity.parse("0.09 mg/L"))
    verdicts = judge(readings, [applied])
    assert strictest(verdicts)["S1"].outcome == UNDETERMINED
    assert strictest(v for v in verdicts if v.outcome != UNDETERMINED)["S1"].outcome == NEAR


def test_strictest_of_equal_outcomes_has_the_smallest_margin():
    verdicts = judge([reading("0.2 mg/L", row=1), reading("0.3 mg/L", row=2)], [limit("0.11 mg/L")])
    assert strictest(verdicts)["S1"].results == (2,)


def test_outcomes_name_reading_and_limit_by_position():
    readings = frame([reading("0.2 mg/L", analyte="lead"), reading("0.2 mg/L"), reading("0.1 mg/L")])
    table = outcomes(readings, [limit("0.11 mg/L", analyte="zinc"), limit("0.11 mg/L")])
    assert list(zip(table["reading"], table["limit"], table["outcome"], strict=True)) == [
        (1, 1, "over"),
        (2, 1, "within"),
    ]


@pytest.mark.parametrize("name", ["fraction", "qualifier"])
@pytest.mark.parametrize("wrong", ["other", None])
def test_text_that_is_no_fraction_or_qualifier_is_refused(name, wrong):
    readings = frame([reading("0.2 mg/L")]).astype({name: object})
    readings[name] = [wrong]
    with pytest.raises(ValueRefused, match=f"{name} '{wrong or ''}' is not accepted"):
        outcomes(readings, [])


def test_value_that_is_no_number_is_refused():
    with pytest.raises(ValueRefused, match="every reading needs a number"):
        judge([reading("0.2 mg/L", value=float("nan"))], [])


def test_reading_takes_over_a_result():
    result = Result(sample="S1", analyte="cadmium", fraction=Fraction.TOTAL, text="0.2", unit="mg/L")
    taken = Reading.of(result, day=DAY, late=True)
    assert (taken.sample, taken.text, taken.day, taken.late) == ("S1", "0.2", DAY, True)
