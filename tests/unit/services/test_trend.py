from __future__ import annotations

from collections.abc import Sequence
from datetime import date, timedelta
from typing import Any

import pytest

from effluent.calc.trend import Direction
from effluent.domain import Fraction, Qualifier
from effluent.errors import RecordMissing, ValueRefused
from effluent.services.trend import Series, Trended, trend
from effluent.store.ledger import Ledger
from tests.washing import add_station, pour, rinse, withdraw
from tests.world import NOON, add_result, add_sample, world


def add_readings(
    book: Ledger, *texts: str, analyte: str = "cadmium", unit: str = "mg/L", **given: Any
) -> None:
    """Record a sample of SEW with one reading for each text, a day apart; ``<5`` is a non-detect."""
    for days, text in enumerate(texts):
        sample = add_sample(book, point="SEW", started_at=NOON + timedelta(days=days))
        below = {"qualifier": Qualifier.BELOW} if text.startswith("<") else {}
        add_result(book, sample, analyte, text.lstrip("<"), unit, **{**below, **given})


def at_point(book: Ledger, analyte: str = "cadmium", **given: Any) -> Trended:
    return trend(book, Series(analyte=analyte, noun="point", code="SEW", **given))


def of_engine(book: Ledger, engine: str = "E-100", analyte: str = "Cd") -> Trended:
    return trend(book, Series(analyte=analyte, noun="engine", code=engine))


def add_wash_samples(book: Ledger, texts: Sequence[str], engine: str = "E-100", start: float = 0) -> None:
    """Record washes a day apart, each with a sample of its stream and a cadmium reading."""
    for days, text in enumerate(texts):
        hours = start + 24 * days
        wash = rinse(book, "10 L", "T-1", hours=hours, engine=engine)
        sample = add_sample(book, wash=wash, started_at=NOON + timedelta(hours=hours))
        add_result(book, sample, "cadmium", text, "mg/L")


# EPA 530/R-09-007 (2009), example 17-7, sodium in ppm; figures as quoted in the help pages of an R package.
# A thousandth of its years is taken as a day here.
def test_sodium_example_of_epa_is_told_from_the_ledger(ledger_place: str) -> None:
    times = [89.6, 90.1, 90.8, 91.1, 92.1, 93.1, 94.1, 95.6, 96.1, 96.3]
    values = [56, 53, 51, 55, 52, 60, 62, 59, 61, 63]
    with world(ledger_place) as book:
        for time, value in zip(times, values, strict=True):
            at = NOON - timedelta(days=7000 - round((time - 89.6) * 1000))
            add_result(book, add_sample(book, point="SEW", started_at=at), "sodium", str(value), "mg/L")
        found = at_point(book, "Na")
    assert (found.test.count, found.test.s, found.test.variance) == (10, 25, 125.0)
    assert found.test.z == pytest.approx(2.146625, rel=1e-6)
    assert found.slope.low * 1000 == pytest.approx(1.333333, rel=1e-6)
    assert (found.slope.lower * 1000, found.slope.upper * 1000) == pytest.approx(
        (0.3992083, 2.333333), rel=1e-6
    )
    assert found.direction == Direction.RISING


def test_engine_is_spoken_for_by_samples_of_its_washes(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        add_wash_samples(book, ["0.01", "0.02", "0.03", "0.04", "0.05"])
        add_wash_samples(book, ["9"], engine="E-200", start=200)
        found = of_engine(book)
    assert [each.origin for each in found.used] == [f"wash W-000{n}" for n in range(1, 6)]
    assert found.direction == Direction.RISING
    assert found.left_out == ()


def test_container_speaks_for_an_engine_while_it_holds_its_water_alone(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        add_wash_samples(book, ["0.01", "0.02", "0.03", "0.04"])
        own = add_sample(book, started_at=NOON + timedelta(hours=80))
        rinse(book, "10 L", "T-1", hours=90, engine="E-200")
        mixed = add_sample(book, started_at=NOON + timedelta(hours=91))
        for sample in (own, mixed):
            add_result(book, sample, "cadmium", "0.05", "mg/L")
        found = of_engine(book)
    assert [each.result.sample for each in found.used][-1] == own
    assert [(each.result.sample, each.left_out) for each in found.left_out] == [
        (mixed, "its water was mixed with that of E-200")
    ]


def test_water_poured_on_still_speaks_and_an_emptied_container_forgets(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        add_wash_samples(book, ["0.01", "0.02", "0.03", "0.04"])
        rinse(book, "20 L", "D-1", hours=80, engine="E-200")
        withdraw(book, "20 L", "D-1", hours=81)
        pour(book, "30 L", "T-1", "D-1", hours=82)
        poured = add_sample(book, container="D-1", started_at=NOON + timedelta(hours=83))
        add_result(book, poured, "cadmium", "0.05", "mg/L")
        found = of_engine(book)
    assert [each.origin for each in found.used][-1] == "container D-1"
    assert found.left_out == ()


def test_sample_before_the_water_came_is_no_sample_of_the_engine(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        early = add_sample(book, started_at=NOON - timedelta(hours=1))
        add_result(book, early, "cadmium", "7", "mg/L")
        add_wash_samples(book, ["0.01", "0.02", "0.03", "0.04"])
        found = of_engine(book)
    assert early not in [each.result.sample for each in (*found.used, *found.left_out)]


def test_rising_cadmium_of_an_engine_is_a_question(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        add_wash_samples(book, ["0.01", "0.02", "0.03", "0.04", "0.05"])
        found = of_engine(book)
    assert "not a finding" in found.question
    assert "Engine E-100's maintenance manual and licensed staff decide" in found.question


@pytest.mark.parametrize("texts", [["5", "4", "3", "2", "1"], ["1", "2", "1", "2", "1"]])
def test_cadmium_that_does_not_rise_asks_nothing(ledger_place: str, texts: list[str]) -> None:
    with world(ledger_place) as book:
        add_wash_samples(book, texts)
        assert of_engine(book).question == ""


def test_rising_cadmium_of_a_point_asks_nothing_of_an_engine(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3", "4", "5")
        found = at_point(book)
    assert (found.direction, found.question) == (Direction.RISING, "")


def test_readings_of_a_day_count_as_their_mean_between_bounds(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3", "4")
        add_readings(book, "<3")
        found = at_point(book)
    assert (found.test.count, found.test.nondetects, len(found.used)) == (4, 1, 5)
    assert found.slope.low < 1 < found.slope.high


def test_units_are_made_one(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3")
        sample = add_sample(book, point="SEW", started_at=NOON + timedelta(days=3))
        add_result(book, sample, "cadmium", "4000", "ug/L")
        found = at_point(book)
    assert (found.unit, found.slope.low) == ("mg/L", 1.0)


def test_what_does_not_fit_is_left_out_with_its_reason(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3", "4")
        add_readings(book, "9", fraction=Fraction.DISSOLVED)
        add_readings(book, "9", unit="mg/kg")
        found = at_point(book)
        filtered = [each.left_out for each in at_point(book, fraction=Fraction.TOTAL).left_out]
    assert len(found.used) == 4
    assert filtered == ["it is of another fraction: dissolved", "it cannot be turned into mg/L"]


def test_a_ph_is_never_averaged(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "7.0", "7.1", "7.2", "7.3", analyte="ph", unit="")
        add_readings(book, "9.0", analyte="ph", unit="")
        found = at_point(book, "pH")
    assert [each.result.text for each in found.left_out] == ["9.0"]
    assert found.left_out[0].left_out.startswith("a pH or a temperature is never averaged")


def test_days_are_those_asked_for(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "9", "1", "2", "3", "4", "9")
        found = at_point(book, since=date(2026, 3, 3), until=date(2026, 3, 6))
    assert [each.result.text for each in found.used] == ["1", "2", "3", "4"]


def test_too_few_days_are_refused_with_what_was_left_out(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3")
        add_readings(book, "9", fraction=Fraction.DISSOLVED)
        with pytest.raises(ValueRefused) as refused:
            at_point(book)
    assert str(refused.value) == (
        "number of values '3' is not accepted: a trend needs 4 to 2000 days; fewer show nothing, of more "
        "take monthly values; left out, 1: it is of another fraction: dissolved"
    )


def test_refusal_for_an_engine_says_what_speaks_for_it(ledger_place: str) -> None:
    with (
        world(ledger_place) as book,
        pytest.raises(ValueRefused, match="stream of a wash speaks for its engine"),
    ):
        of_engine(book)


def test_reading_above_the_range_is_refused(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_readings(book, "1", "2", "3", "4")
        add_readings(book, "9", qualifier=Qualifier.ABOVE)
        with pytest.raises(ValueRefused, match="S-0005 '9' is not accepted: nobody knows"):
            at_point(book)


@pytest.mark.parametrize(("noun", "code"), [("engine", "E-1"), ("point", "SEV"), ("container", "T-9")])
def test_unknown_code_is_missing(ledger_place: str, noun: str, code: str) -> None:
    with world(ledger_place) as book, pytest.raises(RecordMissing, match=code):
        trend(book, Series(analyte="cadmium", noun=noun, code=code))


def test_container_speaks_for_itself_whatever_it_holds_as_of_an_entry(ledger_place: str) -> None:
    with world(ledger_place) as book:
        for days, text in enumerate(["4", "3", "2", "1", "8"]):
            add_result(book, add_sample(book, started_at=NOON + timedelta(days=days)), "zinc", text, "mg/L")
        series = Series(analyte="zinc", noun="container", code="T-1")
        earlier = trend(book, series, as_of=str(book.head().sequence - 2))
        assert (earlier.test.s, trend(book, series).test.s) == (-6, -2)
