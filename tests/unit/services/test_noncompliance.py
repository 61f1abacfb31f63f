from __future__ import annotations

from collections.abc import Iterable
from datetime import UTC, date, datetime
from fractions import Fraction as Rational
from typing import Any

import pytest

from effluent.calc.noncompliance import Finding, Windows
from effluent.domain import Bound, BrokenBy, Fraction, Qualifier, Statistic
from effluent.errors import RecordMissing, ValueRefused
from effluent.services.noncompliance import Code, Judged, Noncompliance, judge_point
from effluent.store.ledger import Ledger
from tests.world import add_limit, add_result, add_sample, world

HALF = (date(2026, 1, 1), date(2026, 6, 30))
YEAR = (date(2025, 7, 1), date(2026, 6, 30))
HALVES = Code(windows=Windows.FIXED_HALVES)


def add_reading(
    book: Ledger, text: str, analyte: str = "cadmium", day: str = "2026-03-02", **given: Any
) -> str:
    """Record a sample of SEW with one reading in mg/L; ``<5`` is a non-detect."""
    sample = add_sample(
        book, point="SEW", started_at=datetime.fromisoformat(f"{day}T12:00").replace(tzinfo=UTC)
    )
    below = {"qualifier": Qualifier.BELOW} if text.startswith("<") else {}
    add_result(
        book, sample, analyte, text.lstrip("<"), "" if analyte == "ph" else "mg/L", **{**below, **given}
    )
    return sample


def add_readings(book: Ledger, texts: Iterable[str], analyte: str = "cadmium") -> None:
    for text in texts:
        add_reading(book, text, analyte)


def judged(book: Ledger, code: Code = HALVES, **given: Any) -> Noncompliance:
    return judge_point(book, "SEW", HALF, code, **given)


def only(found: Noncompliance) -> Judged:
    (one,) = found.judged
    return one


def counts(one: Judged) -> tuple[int, int, int | None]:
    """Return measurements, sure hits of (A) and sure hits of (B)."""
    review = one.window.technical
    return one.window.chronic.count, one.window.chronic.surely, None if review is None else review.surely


# 40 CFR 403.8(f)(2)(viii)(A) and (B), 2015 annual edition, read on 2026-12-01, with the daily maximum of
# cadmium in 433.17, 0.11 mg/L, whose product with 1.2 is 0.132; the findings follow from the text.
@pytest.mark.parametrize(
    ("texts", "chronic", "review", "finding"),
    [
        (["0.12", "0.12", "0.10"], 2, 0, Finding.MET),
        (["0.12", "0.12", "0.10", "0.10"], 2, 0, Finding.NOT_MET),
        (["0.132", "0.10", "0.10"], 1, 1, Finding.MET),
        (["0.1319999999999999999", "0.10", "0.10"], 1, 0, Finding.NOT_MET),
        (["0.11"] * 6, 0, 0, Finding.NOT_MET),
        (["0.12"], 1, 0, Finding.MET),
    ],
)
def test_findings_at_the_boundaries_of_the_rule(
    ledger_place: str, texts: list[str], chronic: int, review: int, finding: Finding
) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L", statistic=Statistic.DAILY)
        add_readings(book, texts)
        found = judged(book)
    assert counts(only(found)) == (len(texts), chronic, review)
    assert only(found).window.finding == finding
    assert found.is_clear == (finding == Finding.NOT_MET)


# 40 CFR 433.15, zinc 2.61 mg/L: in binary floating point 2.61 x 1.2 lies below 3.132
@pytest.mark.parametrize(("text", "hits"), [("3.132", 1), ("3.1319999999999998", 0)])
def test_line_of_the_review_is_the_decimal_one(ledger_place: str, text: str, hits: int) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "zinc", "2.61 mg/L")
        add_reading(book, text, "zinc")
        assert counts(only(judged(book))) == (1, 1, hits)


# The same text: 1.4 for BOD, TSS, fats, oil and grease
@pytest.mark.parametrize("analyte", ["oil and grease", "total suspended solids", "biochemical oxygen demand"])
def test_oils_have_a_factor_of_their_own(ledger_place: str, analyte: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", analyte, "100 mg/L")
        add_readings(book, ["139", "140"], analyte)
        found = only(judged(book))
    assert (found.factor, counts(found)) == (Rational("1.4"), (2, 2, 1))


# The same text: pH is left out of (B)
def test_ph_has_no_review_and_both_its_sides_count(ledger_place: str) -> None:
    with world(ledger_place) as book:
        low = add_limit(book, "SEW", "ph", "6.0", bound=Bound.MINIMUM)
        high = add_limit(book, "SEW", "ph", "9.0")
        add_readings(book, ["5.9", "9.1", "6.0", "9.0", "7.5"], "ph")
        found = only(judged(book))
    assert (found.factor, counts(found)) == (None, (5, 2, None))
    assert found.limits == (low, high)


def test_non_detect_with_the_limit_between_its_bounds_cannot_be_told(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        add_reading(book, "<0.2")
        found = judged(book)
    assert (only(found).window.finding, found.is_clear) == (Finding.OPEN, False)


def test_reading_is_held_against_the_strictest_limit_of_its_day(ledger_place: str) -> None:
    with world(ledger_place) as book:
        old = add_limit(book, "SEW", "cadmium", "0.05 mg/L", effective_to=date(2026, 2, 28))
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        daily = add_limit(book, "SEW", "cadmium", "0.07 mg/L", statistic=Statistic.DAILY)
        add_reading(book, "0.06", day="2026-02-28")
        add_reading(book, "0.06", day="2026-03-01")
        found = only(judged(book))
    assert (found.limits, counts(found)) == ((old, daily), (2, 1, 1))


def test_every_window_that_ends_in_the_period_is_judged(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        add_reading(book, "0.12", day="2025-10-01")
        add_reading(book, "0.1", day="2026-03-31")
        found = judge_point(book, "SEW", HALF)
    spans = [(one.window.first, one.window.last, counts(one)[:2]) for one in found.judged]
    assert spans == [
        (date(2025, 10, 1), date(2026, 3, 31), (2, 1)),
        (date(2026, 1, 1), date(2026, 6, 30), (1, 0)),
    ]
    assert found.today == date(2026, 6, 1)


def test_day_is_the_local_one(ledger_place: str) -> None:
    """23:30 UTC on 30 June is 1 July in Lisbon, an hour ahead in summer."""
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        sample = add_sample(book, point="SEW", started_at=datetime(2025, 6, 30, 23, 30, tzinfo=UTC))
        add_result(book, sample, "cadmium", "1", "mg/L")
        found = judge_point(book, "SEW", YEAR, HALVES)
    assert [one.window.first for one in found.judged] == [date(2025, 7, 1)]


def test_figures_of_the_place_are_data(ledger_place: str) -> None:
    code = Code(
        windows=Windows.FIXED_HALVES,
        chronic_share=50,
        exceeding=BrokenBy.REACHING,
        review_share=50,
        reviewing=BrokenBy.BEYOND,
        factor=Rational("1.1"),
    )
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.10 mg/L")
        add_readings(book, ["0.10", "0.11", "0.05", "0.05"])
        found = only(judged(book, code))
    assert (counts(found), found.window.finding) == ((4, 2, 0), Finding.MET)


def test_laboratory_duplicates_are_one_measurement_by_their_worst(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        sample = add_reading(book, "0.10")
        add_result(book, sample, "cadmium", "130", "ug/L", replicate=2)
        assert counts(only(judged(book))) == (1, 1, 0)


def test_what_is_not_counted_is_named(ledger_place: str) -> None:
    with world(ledger_place) as book:
        lead = add_limit(book, "SEW", "lead", "0.4 mg/L")
        month = add_limit(book, "SEW", "cadmium", "0.07 mg/L", statistic=Statistic.MONTH)
        add_limit(book, "SEW", "zinc", "2 mg/L", effective_to=date(2025, 12, 31))
        add_reading(book, "0.5", "lead", fraction=Fraction.DISSOLVED)
        add_readings(book, ["1", "1"], "zinc")
        found = judged(book)
    assert (found.judged, found.is_clear) == ((), False)
    assert [(one.analyte, one.limits) for one in found.unread] == [("lead", (lead,))]
    assert found.without_limit == {"lead": 1, "zinc": 2}
    assert [limit.code for limit in found.not_judged] == [month]


def test_caught_water_is_no_discharge(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        add_result(book, add_sample(book, container="T-1"), "cadmium", "9", "mg/L")
        assert judged(book).judged == ()


def test_answer_is_as_of_an_entry(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        add_reading(book, "0.1")
        before = book.head().sequence
        add_reading(book, "0.2")
        assert counts(only(judged(book, as_of=str(before)))) == (1, 0, 0)


@pytest.mark.parametrize(
    ("windows", "ends"),
    [
        (Windows.ROLLING_QUARTERS, "March, June, September and December"),
        (Windows.FIXED_HALVES, "June and December"),
    ],
)
def test_period_in_which_no_window_ends_is_refused(ledger_place: str, windows: Windows, ends: str) -> None:
    with world(ledger_place) as book, pytest.raises(ValueRefused, match=f"{windows} end with {ends}"):
        judge_point(book, "SEW", (date(2026, 1, 1), date(2026, 2, 1)), Code(windows=windows))


def test_unknown_point_is_missing(ledger_place: str) -> None:
    with world(ledger_place) as book, pytest.raises(RecordMissing, match="did you mean SEW"):
        judge_point(book, "SEV", HALF)
