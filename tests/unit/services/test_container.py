"""Containers: water moved on from one that was filled by a transfer."""

from __future__ import annotations

from datetime import timedelta

import pytest

from effluent.domain import Movement, MovementKind, Quantity
from effluent.errors import VolumeRefused
from effluent.services.container import contents, move
from effluent.store.ledger import Ledger
from tests.shipping import add_drums, fill
from tests.world import NOON, world


def withdraw(book: Ledger, source: str, litres: str) -> str:
    away = Movement(
        kind=MovementKind.WITHDRAWAL,
        moved_at=NOON + timedelta(hours=2),
        moved_by="AM",
        volume=Quantity(litres, "L"),
        source=source,
        destination="treatment works (invented)",
    )
    return move(book, away, by="AM")


def pour_over(book: Ledger) -> None:
    """Fill drum D-1 with 150 L and transfer 120 L of it into tote T-1."""
    add_drums(book, "D-1")
    fill(book, "D-1")
    over = Movement(
        kind=MovementKind.TRANSFER,
        moved_at=NOON + timedelta(hours=1),
        moved_by="AM",
        volume=Quantity("120", "L"),
        source="D-1",
        target="T-1",
    )
    move(book, over, by="AM")


def test_water_that_was_transferred_can_be_withdrawn(ledger_place: str) -> None:
    with world(ledger_place) as book:
        pour_over(book)
        withdraw(book, "T-1", "100")
        assert contents(book, "T-1").level_l == 20


def test_more_than_was_transferred_is_refused(ledger_place: str) -> None:
    with world(ledger_place) as book:
        pour_over(book)
        with pytest.raises(VolumeRefused, match=r"T-1: at .* 1\.0 L below empty"):
            withdraw(book, "T-1", "121")
