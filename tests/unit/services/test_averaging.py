"""Averages of what left a point; place, people and figures are invented."""

from __future__ import annotations

from datetime import UTC, date, datetime

import pytest

from effluent.domain import Limit, Outcome, Statistic
from effluent.services.averaging import Averaging, averaging
from effluent.services.check import Wanted, check, verdicts_for
from effluent.services.wanted import wanted_waters
from effluent.store.ledger import Ledger
from tests.world import add_limit, add_result, add_sample, add_wash, world

MARCH = date(2026, 3, 31)


def drawn(book: Ledger, month: int, day: int, text: str, *, hour: int = 12, **given: str) -> str:
    """Record a sample at the sewer point with its cadmium in mg/L."""
    started = datetime(2026, month, day, hour, 30, tzinfo=UTC)
    sample = add_sample(book, point="SEW", started_at=started)
    add_result(book, sample, given.pop("analyte", "cadmium"), text, given.pop("unit", "mg/L"))
    return sample


def monthly(book: Ledger, value: str = "0.07 mg/L", analyte: str = "cadmium", **given: object) -> str:
    return add_limit(book, "SEW", analyte, value, **{"statistic": Statistic.MONTH, **given})


def test_a_month_is_judged_over_its_daily_values(ledger_place: str) -> None:
    """0.05 and 0.07 on one day make 0.06; with 0.1 on another the month has 0.08."""
    with world(ledger_place) as book:
        samples = [drawn(book, 3, 2, "0.05"), drawn(book, 3, 2, "0.07"), drawn(book, 3, 9, "0.10")]
        monthly(book)
        found = check(book)
    (verdict,) = found.verdicts
    assert (verdict.outcome, verdict.day, verdict.samples) == (Outcome.OVER, MARCH, tuple(samples))
    assert "average: (0.06 + 0.1) / 2 = 0.08 mg/L" in verdict.working
    assert {found.strictest[sample] for sample in samples} == {verdict}
    assert (found.without_verdict, found.unaveraged, found.not_computed) == ((), (), ())


def test_one_sample_asked_about_has_the_whole_month_beside_it(ledger_place: str) -> None:
    with world(ledger_place) as book:
        asked = drawn(book, 3, 2, "0.01")
        drawn(book, 3, 9, "0.21")
        drawn(book, 4, 9, "0.01")
        monthly(book)
        found = check(book, Wanted(sample=asked))
        (verdict,) = found.verdicts
        with book.reading() as view:
            assert verdicts_for(view, [view.value("sample", asked)]) == (verdict,)
    assert (verdict.outcome, verdict.day, verdict.results) == (Outcome.OVER, MARCH, (1, 2))
    assert found.strictest == {asked: verdict}


@pytest.mark.parametrize(("statistic", "windows"), [(Statistic.YEAR, 1), (Statistic.FOUR_DAY, 2)])
def test_days_asked_about_have_their_windows_beside_them(
    ledger_place: str, statistic: Statistic, windows: int
) -> None:
    with world(ledger_place) as book:
        for month in (1, 2, 3, 4, 5):
            drawn(book, month, 1, "0.07")
        monthly(book, statistic=statistic)
        found = check(book, Wanted(since=date(2026, 2, 1), until=date(2026, 2, 1)))
    assert [verdict.outcome for verdict in found.verdicts] == [Outcome.WITHIN] * windows


def test_the_month_is_that_of_the_site(ledger_place: str) -> None:
    """In Lisbon 23:30 UTC on 31 March is 00:30 on 1 April: summer time began on 29 March 2026."""
    with world(ledger_place) as book:
        drawn(book, 3, 31, "0.05", hour=23)
        monthly(book)
        assert [verdict.day for verdict in check(book).verdicts] == [date(2026, 4, 30)]


def test_caught_water_has_no_average(ledger_place: str) -> None:
    with world(ledger_place) as book:
        for sample in (add_sample(book), add_sample(book, wash=add_wash(book))):
            add_result(book, sample, "cadmium", "0.5", "mg/L")
        code = monthly(book)
        found = check(book)
    assert (found.verdicts, found.not_computed) == ((), ())
    assert [(one.water, one.limit.code) for one in found.unaveraged] == [("caught water", code)]
    assert "about what leaves a point" in found.unaveraged[0].why


def test_an_average_that_cannot_be_had_is_named_with_the_reason(ledger_place: str) -> None:
    with world(ledger_place) as book:
        drawn(book, 3, 2, "7", analyte="ph", unit="")
        drawn(book, 3, 2, "0.01")
        acid = monthly(book, "9", "ph")
        four = monthly(book, statistic=Statistic.FOUR_DAY)
        lead = monthly(book, "0.4 mg/L", "lead")
        found = check(book)
    reasons = {one.limit.code: one.why for one in found.unaveraged}
    assert set(reasons) == {acid, four}
    assert "report minimum and maximum" in reasons[acid]
    assert reasons[four].endswith("so far: 1")
    assert [(one.water, one.limit.code) for one in found.without_reading] == [("point SEW", lead)]


def test_masses_are_still_not_computed(ledger_place: str) -> None:
    with world(ledger_place) as book:
        drawn(book, 3, 2, "0.01")
        mass = monthly(book, "1 kg/d", statistic=Statistic.MASS_DAY)
        found = check(book)
    assert [limit.code for limit in found.not_computed] == [mass]


def test_without_limits_of_averages_nothing_is_looked_up(ledger_place: str) -> None:
    with world(ledger_place) as book:
        drawn(book, 3, 2, "0.01")
        with book.reading() as view:
            (water,) = wanted_waters(view, Wanted())
            limits: list[Limit] = []
            assert averaging(view, water, limits) == Averaging()
