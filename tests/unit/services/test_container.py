"""Containers: levels, contents by origin, transfers and withdrawals."""

from __future__ import annotations

from datetime import timedelta
from typing import Any

import pytest

from effluent.domain import CleanerType, Manifest, ManifestLine, ManifestState, Movement, MovementKind
from effluent.errors import StateRefused, ValueRefused, VolumeRefused
from effluent.services.container import amend, contents, in_time, move, void_movement
from effluent.services.wash import amend as amend_wash
from effluent.services.wash import record as record_wash
from effluent.store.ledger import Ledger
from tests.shipping import add_parties
from tests.washing import add_station, desalination, held, pour, q, recovery, rinse, withdraw
from tests.world import NOON, NOW, record, world


def test_transfer_takes_every_origin_in_proportion(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "40 L", "D-1")
        rinse(book, "60 L", "D-1", hours=1)
        pour(book, "50 L", "D-1", "T-1", hours=2)
        assert held(book, "D-1") == held(book, "T-1") == {"W-0001": "20", "W-0002": "30"}


def test_water_that_was_transferred_can_leave_again_but_no_more(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "150 L", "D-1")
        pour(book, "120 L", "D-1", "T-1", hours=1)
        withdraw(book, "100 L", "T-1", hours=2)
        assert contents(book, "T-1").level_l == 20
        with pytest.raises(VolumeRefused, match=r"T-1: at 2026-03-02 15:00 .* 1\.0 L below empty"):
            withdraw(book, "21 L", "T-1", hours=3)


def test_contents_name_cleaner_types_and_local_times(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "10 L", "D-1", hours=24 * 60)
        record_wash(book, recovery(caught=q("30 L"), caught_by="meter"), {"D-1": None}, by="AM")
        found = contents(book, "D-1")
        assert [origin.cleaner_type for origin in found.origins] == [CleanerType.AQUEOUS, None]
        assert [f"{m.moved_at:%m-%d %H:%M}" for m in found.movements] == ["03-02 12:00", "05-01 13:00"]


def movement(kind: MovementKind, **given: Any) -> Movement:
    standard = {"moved_at": NOON, "moved_by": "AM", "volume": q("5 L"), "source": "D-1"}
    return Movement(kind=kind, **{**standard, **given})


TRANSFER, WITHDRAWAL = MovementKind.TRANSFER, MovementKind.WITHDRAWAL
REFUSED = [
    (movement(MovementKind.FILL, target="D-1"), "a fill is recorded with its wash"),
    (movement(TRANSFER, source=None, target="D-1"), "name the container it left"),
    (movement(TRANSFER), "a transfer goes into a container"),
    (movement(WITHDRAWAL, target="D-2", destination="x"), "a withdrawal does not"),
    (movement(TRANSFER, target="D-1"), "into the container it left"),
    (movement(WITHDRAWAL), "say where the water went"),
    (movement(TRANSFER, target="D-2", volume=q("0 L")), "nothing would move"),
    (movement(TRANSFER, target="D-2", volume=q("-5 L")), "cannot be negative"),
    (movement(TRANSFER, target="X-1"), "it stands at CHI, D-1 at LIS"),
    (movement(TRANSFER, target="D-2", moved_at=NOW + timedelta(days=1)), "in the future"),
]


def test_movement_that_cannot_have_been_leaves_the_ledger_as_it_was(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1", hours=-1)
        before = book.head()
        for wrong, text in REFUSED:
            with pytest.raises(ValueRefused, match=text):
                move(book, wrong, by="AM")
        assert book.head() == before


def test_water_cannot_leave_before_it_came(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        with pytest.raises(VolumeRefused, match=r"11:00 Europe/Lisbon it would be 5\.0 L below empty"):
            withdraw(book, "5 L", "D-1", hours=-1)
        withdraw(book, "5 L", "D-1", hours=0)
        assert contents(book, "D-1").level_l == 43


def test_fills_come_first_at_equal_times() -> None:
    both = [movement(WITHDRAWAL), movement(TRANSFER), movement(MovementKind.FILL)]
    assert [m.kind for m in in_time(both)] == [MovementKind.FILL, TRANSFER, WITHDRAWAL]


def test_voided_transfer_leaves_the_water_where_it_was(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        moved = pour(book, "40 L", "D-1", "D-2", hours=1)
        void_movement(book, moved, by="AM", reason="never done")
        assert (contents(book, "D-1").level_l, contents(book, "D-2").level_l) == (48, 0)


def test_fill_is_voided_by_way_of_its_wash_alone(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        with pytest.raises(StateRefused, match="amend wash W-0001 instead"):
            void_movement(book, "V-0001", by="AM", reason="x")


def test_container_cannot_become_smaller_than_what_it_held(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "150 L", "D-1")
        withdraw(book, "150 L", "D-1", hours=1)
        with pytest.raises(VolumeRefused, match=r"capacity of 95\.0 L"):
            amend(book, "D-1", {"capacity": q("100 L")}, by="AM", reason="misread")
        amend(book, "D-1", {"capacity": q("50 gal")}, by="AM", reason="misread")


def ship(book: Ledger, container: str) -> None:
    add_parties(book)
    line = ManifestLine(container=container, description="wash water", quantity=q("48 L"))
    record(
        book,
        Manifest(site="LIS", state=ManifestState.ISSUED, facility="WORKS", carriers=("HAUL",), lines=(line,)),
    )


def test_shipped_container_takes_and_gives_nothing_but_words_can_be_corrected(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        rinse(book, "48 L", "D-2", hours=1)
        ship(book, "D-1")
        wrong = [
            lambda: rinse(book, "10 L", "D-1", hours=2),
            lambda: withdraw(book, "10 L", "D-1", hours=2),
            lambda: pour(book, "10 L", "D-2", "D-1", hours=2),
            lambda: amend_wash(book, "W-0001", {"caught": q("47 L")}, by="AM", reason="x"),
        ]
        for attempt in wrong:
            with pytest.raises(StateRefused, match="container D-1 is shipped on a manifest"):
                attempt()
        amend_wash(book, "W-0001", {"remarks": "windy"}, by="AM", reason="left out")
        amend(book, "D-1", {"material": "steel"}, by="AM", reason="left out")
        assert contents(book, "D-1").level_l == 48


def test_order_of_recording_does_not_matter(tmp_path: Any) -> None:
    found = []
    for name, hours in (("first", (0, 5)), ("second", (5, 0))):
        with world(str(tmp_path / name)) as book:
            add_station(book)
            for hour in hours:
                wash = desalination(
                    code=f"W-{hour}",
                    performed_at=NOON + timedelta(hours=hour),
                    rinse_water=q("90 L"),
                    caught=q(f"{40 + hour} L"),
                    caught_by="meter",
                )
                record_wash(book, wash, {"D-1": None}, by="AM")
            withdraw(book, "30 L", "D-1", hours=5)
            found.append(held(book, "D-1"))
    assert found[0] == found[1]
