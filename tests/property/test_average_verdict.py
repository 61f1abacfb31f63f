"""Verdicts on averages against plain sums of fractions, written without the code they are held against."""

from collections import defaultdict
from datetime import date, timedelta
from fractions import Fraction as Rational

from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.average_verdict import judge_averages
from effluent.calc.reading import Reading
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
)

# Factors to mg/L are powers of ten by the definition of the prefixes.
PER_MG_L = {"mg/L": Rational(1), "ug/L": Rational(1, 1000), "g/L": Rational(1000)}
SHARE = {"bounds only": None, "zero": Rational(0), "half": Rational(1, 2), "full": Rational(1)}
FIRST = date(2026, 1, 20)
TINY = Rational(1, 10**40)
STATISTICS = (Statistic.FOUR_DAY, Statistic.MONTH, Statistic.YEAR)


@st.composite
def readings(draw):
    """Draw a reading in hundredths, so that averages often fall on the limit."""
    unit = draw(st.sampled_from(list(PER_MG_L)))
    amount = Rational(draw(st.integers(0, 12)), 100) / PER_MG_L[unit]
    text = f"{float(amount):.10f}"
    return Reading(
        row=draw(st.integers(1, 10**9)),
        sample="S",
        day=FIRST + timedelta(days=draw(st.integers(0, 40))),
        analyte=draw(st.sampled_from(["cadmium", "cadmium", "cadmium", "zinc"])),
        fraction=draw(st.sampled_from([Fraction.TOTAL, Fraction.TOTAL, Fraction.DISSOLVED])),
        qualifier=draw(st.sampled_from([*Qualifier, Qualifier.EQUAL, Qualifier.BELOW, Qualifier.BELOW])),
        number=text,
        unit=unit,
        value=float(text),
        canonical_unit="mg/L",
    )


@st.composite
def limits(draw):
    """Draw a limit of hundredths on an average."""
    level = draw(st.none() | st.integers(1, 12))
    return Limit(
        point="P",
        analyte="cadmium",
        statistic=draw(st.sampled_from(STATISTICS)),
        bound=draw(st.sampled_from(Bound)),
        broken_by=draw(st.sampled_from(BrokenBy)),
        rounding=draw(st.sampled_from(Rounding)),
        nondetects=draw(st.sampled_from(NonDetectRule)),
        value=Quantity(f"0.{draw(st.integers(1, 12)):02d}", "mg/L"),
        action_level=None if level is None else Quantity(f"{level * 10}", "ug/L"),
        effective_from=FIRST + timedelta(days=draw(st.integers(-5, 10))),
        authority="a",
        document="d",
        entered_by="e",
    )


def breaks(average, limit):
    edge = Rational(limit.value.text)
    if limit.rounding == Rounding.SIGNIFICANT_FIGURES:
        average = round(average * 100) / Rational(100)
    if average == edge:
        return limit.broken_by == BrokenBy.REACHING
    return average > edge if limit.bound == Bound.MAXIMUM else average < edge


def reaches(average, limit):
    level = Rational(limit.action_level.text) / 1000
    return average >= level if limit.bound == Bound.MAXIMUM else average <= level


def mean(numbers):
    return sum(numbers, Rational(0)) / len(numbers)


def average(days, count):
    """Average the means of days, each reading counted as `count` says."""
    return mean([mean([count(sign, amount) for sign, amount in day]) for day in days])


def extremes(days):
    """Return the least and the greatest average, just inside the ends that no truth reaches."""
    signs = {sign for day in days for sign, _ in day}
    low = average(days, lambda sign, amount: 0 if sign == "<" else amount)
    high = average(days, lambda sign, amount: amount + (10**9 if sign == ">" else 0))
    nothing_hidden = all(amount == 0 for day in days for sign, amount in day if sign == "<")
    return [
        low + (TINY if ">" in signs else 0),
        high - (TINY if "<" in signs and not nothing_hidden else 0),
    ], ">" in signs


def naive(days, limit):
    ends, is_open = extremes(days)
    share = None if is_open else SHARE[limit.nondetects]
    ruled = None if share is None else average(days, lambda s, x: x * share if s == "<" else x)

    def answer(question):
        said = {question(end, limit) for end in ends}
        return said.pop() if len(said) == 1 else None if ruled is None else question(ruled, limit)

    broken = answer(breaks)
    if broken is None or broken:
        return Outcome.UNDETERMINED if broken is None else Outcome.OVER
    near = limit.action_level is not None and answer(reaches)
    return Outcome.NEAR if near else Outcome.WITHIN


def windows(drawn, limit):
    days = defaultdict(list)
    for one in drawn:
        if one.analyte == "cadmium" and one.fraction == "total" and one.day >= limit.effective_from:
            days[one.day].append((str(one.qualifier), Rational(one.number) * PER_MG_L[one.unit]))
    order = sorted(days)
    if limit.statistic == Statistic.FOUR_DAY:
        groups = [order[n : n + 4] for n in range(len(order) - 3)]
    else:
        size = 7 if limit.statistic == Statistic.MONTH else 4
        names = sorted({day.isoformat()[:size] for day in order})
        groups = [[day for day in order if day.isoformat().startswith(name)] for name in names]
    return [[days[day] for day in group] for group in groups]


@settings(max_examples=400)
@given(st.lists(readings(), max_size=12), limits())
def test_verdicts_on_averages_equal_those_of_plain_fractions(drawn, limit):
    found = [verdict.outcome for verdict in judge_averages(drawn, [limit])]
    assert found == [naive(days, limit) for days in windows(drawn, limit)]
