from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import Any

import pytest

from effluent.domain import Method, Sample
from effluent.errors import ChainBroken, EffluentError, RecordMissing, StateRefused, ValueRefused
from effluent.services import register
from effluent.services.sample import site_of, take, void
from tests.washing import add_station, rinse, withdraw
from tests.world import NOON, NOW, add_result, world


def grab(**given: Any) -> Sample:
    return Sample(**{"method": Method.GRAB, "started_at": NOON, "taken_by": "RS", **given})


def composite(**given: Any) -> Sample:
    standard = {
        "method": Method.COMPOSITE,
        "point": "SEW",
        "ended_at": NOON + timedelta(hours=8),
        "aliquots": 4,
    }
    return grab(**{**standard, **given})


REFUSED: list[tuple[Sample, type[EffluentError], str]] = [
    (grab(), ValueRefused, "exactly one container, wash or discharge point"),
    (grab(container="D-1", point="SEW"), ValueRefused, "'container and point'"),
    (grab(container="D-1", started_at=NOW + timedelta(hours=1)), ValueRefused, "in the future"),
    (composite(ended_at=NOW + timedelta(hours=1)), ValueRefused, "in the future"),
    (grab(container="D-2"), ChainBroken, "container D-2 had received nothing by then"),
    (grab(container="D-1", started_at=NOON - timedelta(hours=1)), ChainBroken, "nothing by then"),
    (grab(container="D-9"), RecordMissing, "did you mean"),
    (grab(point="SEW", taken_by="ZZ"), RecordMissing, "no person 'ZZ'"),
    (grab(point="SEW", laboratory="ZZ"), RecordMissing, "no company 'ZZ'"),
    (grab(point="SEW", aliquots=2), ValueRefused, "was it a composite"),
    (grab(point="SEW", ended_at=NOON), ValueRefused, "was it a composite"),
    (composite(ended_at=None), ValueRefused, "give both times"),
    (composite(ended_at=NOON), ValueRefused, "ends after it starts"),
    (composite(aliquots=1), ValueRefused, "two or more"),
]


def test_sample_that_cannot_have_been_leaves_the_ledger_as_it_was(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        before = book.head()
        for sample, error, text in REFUSED:
            with pytest.raises(error, match=text):
                take(book, sample, by="RS")
        assert book.head() == before


def test_sample_stands_for_container_wash_or_point(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        wash = rinse(book, "48 L", "D-1")
        codes = [take(book, each, by="RS") for each in (grab(container="D-1"), grab(wash=wash), composite())]
        with book.reading() as reading:
            assert {site_of(reading, reading.value("sample", code)).code for code in codes} == {"LIS"}


def test_times_are_local_to_the_site(ledger_place: str) -> None:
    with world(ledger_place) as book:
        typed = datetime.fromisoformat("2026-05-05 10:00")
        code = take(book, grab(point="SEW", started_at=typed), by="RS")
        shown = register.show(book, "sample", code).value.started_at
    assert (shown, shown.hour) == (datetime(2026, 5, 5, 9, tzinfo=UTC), 10)


def test_emptied_container_may_still_be_sampled(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        withdraw(book, "48 L", "D-1", hours=1)
        assert take(book, grab(container="D-1", started_at=NOON + timedelta(hours=2)), by="RS") == "S-0001"


def test_sample_is_voided_only_without_results(ledger_place: str) -> None:
    with world(ledger_place) as book:
        first, second = (take(book, grab(point="SEW"), by="RS") for _ in range(2))
        add_result(book, first, "cadmium", "0.1", "mg/L")
        with pytest.raises(StateRefused, match="referred to by result 1"):
            void(book, first, by="RS", reason="wrong bottle")
        void(book, second, by="RS", reason="wrong bottle")
        assert [sample.code for sample in register.listing(book, "sample")] == [first]
