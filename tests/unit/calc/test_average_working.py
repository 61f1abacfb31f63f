"""The working of an average, followed by hand; readings are invented."""

from effluent.calc.average_working import reason, working
from effluent.calc.averaged import averages
from effluent.domain import NonDetectRule, Quantity, Rounding
from tests.unit.calc.test_average_verdict import limit, reading


def averaged(*written, **changes):
    given = [reading(n, n, text) for n, text in enumerate(written, 1)]
    (one,) = averages(given, limit(**changes))
    return one


def line(start, lines):
    (one,) = [text for text in lines if text.startswith(start)]
    return one


def test_working_of_an_average_can_be_followed_with_a_calculator():
    given = [reading(1, 2, "50 ug/L"), reading(2, 2, "0.07 mg/L"), reading(3, 9, "0.10 mg/L")]
    (one,) = averages(given, limit())
    assert working(one) == (
        "calendar month average: 2026-03-01 to 2026-03-31; daily values: 2; readings: 3, "
        "of them not detected: 0",
        "reading: result 1, sample S1, 2026-03-02: cadmium, total: 50 ug/L",
        "conversion: 50 ug/L x 0.001 = 0.05 mg/L",
        "reading: result 2, sample S2, 2026-03-02: cadmium, total: 0.07 mg/L",
        "reading: result 3, sample S3, 2026-03-09: cadmium, total: 0.10 mg/L",
        "daily value of 2026-03-02: (0.05 + 0.07) / 2 = 0.06 mg/L",
        "daily value of 2026-03-09: 0.1 mg/L",
        "average: (0.06 + 0.1) / 2 = 0.08 mg/L",
        "limit L1: maximum 0.07 mg/L, calendar month average, cadmium, total; broken by an average above it; "
        "averages compared as reported",
        "source: Invented council: permit 1; in force from 2020-01-01; entered by P01, verified by P02",
        "comparison: 0.08 > 0.07 mg/L is true",
        "outcome: over: the average of 2026-03, 0.08 mg/L, is above the limit 0.07 mg/L",
        "margin: (0.07 - 0.08) / 0.07 = -0.1429",
    )


def test_a_figure_is_written_in_the_unit_of_the_limit():
    lines = working(averaged("0.05 mg/L", "70 ug/L", written="70 ug/L"))
    assert line("average:", lines) == "average: (50 + 70) / 2 = 60 ug/L"
    assert line("margin:", lines) == "margin: (70 - 60) / 70 = 0.1429"


def test_both_bounds_and_the_rule_that_decides_are_shown():
    lines = working(averaged("0.14 mg/L", "<0.02 mg/L", nondetects=NonDetectRule.HALF))
    assert line("average at the least", lines) == "average at the least: (0.14 + 0) / 2 = 0.07 mg/L"
    assert line("average at the most", lines) == "average at the most: (0.14 + 0.02) / 2 = 0.08 mg/L"
    assert line("average under", lines) == "average under the rule half: (0.14 + 0.01) / 2 = 0.075 mg/L"
    assert line("known:", lines).endswith("some averages left break it, some do not")
    assert line("the rule", lines) == "the rule half decides: 0.075 > 0.07 mg/L is true"


def test_bounds_that_settle_it_say_so():
    lines = working(averaged("0.05 mg/L", "<0.02 mg/L", nondetects=NonDetectRule.HALF))
    assert line("known:", lines).endswith("no average left breaks it")
    assert line("margin:", lines) == "margin: at least (0.07 - 0.035) / 0.07 = 0.5"
    assert not [text for text in lines if text.startswith("the rule")]


def test_an_open_average_says_what_leaves_it_open():
    assert reason(averaged("0.14 mg/L", "<0.02 mg/L")).endswith("and the limit names no rule for them")
    above = averaged(">0.05 mg/L", nondetects=NonDetectRule.HALF)
    assert reason(above).endswith("and nothing bounds the average")
    assert "at the most: not known, a reading lies above its measuring range" in working(above)


def test_rounding_is_shown_beside_the_exact_average():
    one = averaged("0.0749 mg/L", rounding=Rounding.SIGNIFICANT_FIGURES)
    assert "0.0749 (rounded 0.07) mg/L, is not above" in reason(one)
    assert line("comparison", working(one)) == "comparison: 0.07 > 0.07 mg/L is false"


def test_the_action_level_is_answered():
    level = {"action_level": Quantity.parse("0.06 mg/L")}
    assert line("action", working(averaged("0.06 mg/L", **level))).endswith(": reached")
    assert line("action", working(averaged("0.05 mg/L", **level))).endswith(": not reached")
    unsure = averaged("0.11 mg/L", "<0.015 mg/L", nondetects=NonDetectRule.HALF, **level)
    assert line("action", working(unsure)).endswith(
        "depends on what the non-detects hide, under the rule half not reached"
    )
