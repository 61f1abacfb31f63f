from __future__ import annotations

from datetime import timedelta

from effluent.services.unsampled import unsampled
from effluent.store.ledger import Ledger
from tests.shipping import fill
from tests.world import NOON, add_sample, world


def said(book: Ledger) -> str:
    with book.reading() as reading:
        return unsampled(reading, "T-1")


def test_empty_container_needs_no_sample(ledger_place: str) -> None:
    with world(ledger_place) as book:
        assert said(book) == ""


def test_water_without_a_sample_is_told(ledger_place: str) -> None:
    with world(ledger_place) as book:
        fill(book, "T-1")
        assert said(book) == (
            "container T-1: water went in and no sample was taken (2026-03-02 12:00 Europe/Lisbon);"
            " no verdict speaks for what it holds now"
        )


def test_water_after_the_last_sample_is_told(ledger_place: str) -> None:
    with world(ledger_place) as book:
        fill(book, "T-1")
        add_sample(book, started_at=NOON + timedelta(hours=1))
        assert said(book) == ""
        fill(book, "T-1", hours=2)
        assert "after its last sample was taken (2026-03-02 14:00 Europe/Lisbon)" in said(book)
