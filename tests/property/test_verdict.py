from datetime import date
from fractions import Fraction as Rational

from hypothesis import given, settings
from hypothesis import strategies as st

from effluent.calc.verdict import Reading, judge
from effluent.domain import Bound, BrokenBy, Fraction, Limit, Outcome, Qualifier, Quantity, Rounding

# Factors to mg/L are powers of ten by the definition of the prefixes.
PER_MG_L = {"mg/L": Rational(1), "ug/L": Rational(1, 1000), "g/L": Rational(1000), "ng/L": Rational(1, 10**6)}
RANK = {"dissolved": 0, "total recoverable": 1, "total": 2}
DAY = date(2026, 1, 1)


def plain(number):
    """Write a rational whose decimal ends, in full."""
    places = 60
    scaled = number * 10**places
    assert scaled.denominator == 1
    whole, part = divmod(scaled.numerator, 10**places)
    return f"{whole}.{part:0{places}d}".rstrip("0").rstrip(".")


@st.composite
def decimals(draw, near=()):
    """Draw a decimal, often one that differs from another only far behind the point."""
    digits = draw(st.integers(1, 10 ** draw(st.sampled_from([2, 4, 17, 25]))))
    free = Rational(digits, 10 ** draw(st.integers(0, 20)))
    if not near or draw(st.integers(0, 3)) == 0:
        return free
    nudge = Rational(draw(st.integers(-2, 2)), 10 ** draw(st.integers(1, 30)))
    return abs(draw(st.sampled_from(near)) + nudge)


@st.composite
def pairs(draw):
    """Draw a limit and a reading close to it, in units of their own."""
    unit, other = draw(st.sampled_from(list(PER_MG_L))), draw(st.sampled_from(list(PER_MG_L)))
    edge = draw(decimals())
    step = Rational(10) ** -len(plain(edge).partition(".")[2])
    near = [edge, edge + step / 2, edge - step / 2]
    amount = draw(decimals(near=near)) * PER_MG_L[unit] / PER_MG_L[other]
    level = draw(st.none() | decimals(near=[edge]))
    limit = Limit(
        point="P",
        analyte="cadmium",
        fraction=draw(st.sampled_from(Fraction)),
        bound=draw(st.sampled_from(Bound)),
        broken_by=draw(st.sampled_from(BrokenBy)),
        rounding=draw(st.sampled_from(Rounding)),
        value=Quantity(plain(edge), unit),
        action_level=level and Quantity(plain(level), unit),
        effective_from=DAY,
        authority="a",
        document="d",
        entered_by="e",
    )
    exact = amount * PER_MG_L[other]
    reading = Reading(
        row=1,
        sample="S",
        day=DAY,
        analyte="cadmium",
        fraction=draw(st.sampled_from(Fraction)),
        qualifier=draw(st.sampled_from(Qualifier)),
        number=plain(amount),
        unit=other,
        value=exact.numerator / exact.denominator,
        canonical_unit="mg/L",
    )
    return reading, limit


def breaks(truth, limit):
    """Compare one true amount in the limit's unit with rational numbers only."""
    edge = Rational(limit.value.text)
    if limit.rounding == Rounding.SIGNIFICANT_FIGURES:
        step = Rational(10) ** -len(limit.value.text.partition(".")[2])
        truth = round(truth / step) * step
    if truth == edge:
        return limit.broken_by == BrokenBy.REACHING
    return truth > edge if limit.bound == Bound.MAXIMUM else truth < edge


def possible_truths(reading, limit, amount):
    """List amounts that represent everything the reading leaves possible for the limit's fraction."""
    tiny, large = Rational(1, 10**70), amount * 10**9 + 10**40
    low, high = reading.qualifier == "<", reading.qualifier == ">"
    if reading.fraction != limit.fraction:
        if Fraction.TCLP in (reading.fraction, limit.fraction):
            return [-large, large]
        part = RANK[reading.fraction] < RANK[limit.fraction]
        if (part and low) or (not part and high):
            return [-large, large]
        low, high, amounts = low or not part, high or part, [] if low or high else [amount]
    else:
        amounts = [] if low or high else [amount]
    return amounts + ([-large, amount - tiny] if low else []) + ([large, amount + tiny] if high else [])


def naive(reading, limit):
    amount = Rational(reading.number) * PER_MG_L[reading.unit] / PER_MG_L[limit.value.unit]
    broken = {breaks(truth, limit) for truth in possible_truths(reading, limit, amount)}
    if broken != {False}:
        return Outcome.OVER if broken == {True} else Outcome.UNDETERMINED
    exact = reading.qualifier == "=" and reading.fraction == limit.fraction
    if not exact or limit.action_level is None:
        return Outcome.WITHIN
    level = Rational(limit.action_level.text)
    reached = amount >= level if limit.bound == Bound.MAXIMUM else amount <= level
    return Outcome.NEAR if reached else Outcome.WITHIN


@settings(max_examples=400)
@given(pairs())
def test_verdict_equals_the_one_of_rational_arithmetic(pair):
    reading, limit = pair
    (verdict,) = judge([reading], [limit])
    assert verdict.outcome == naive(reading, limit)


@settings(max_examples=30)
@given(st.lists(pairs(), max_size=6))
def test_many_readings_get_the_verdicts_they_get_alone(drawn):
    readings = [reading for reading, _ in drawn]
    for _, limit in drawn[:2]:
        alone = [judge([reading], [limit])[0].outcome for reading in readings]
        own = [r.fraction == limit.fraction for r in readings]
        kept = [o for o, mine in zip(alone, own, strict=True) if mine or o != "undetermined" or not any(own)]
        assert [verdict.outcome for verdict in judge(readings, [limit])] == kept
