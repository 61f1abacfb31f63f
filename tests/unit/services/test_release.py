from __future__ import annotations

from collections.abc import Iterator
from datetime import timedelta

import pytest

from effluent.domain import Movement, MovementKind, Quantity
from effluent.services import manifest as manifests
from effluent.services.release import adverse, cargo_of, cargos_of, missing_links
from effluent.services.shipment import shipped_containers
from effluent.store.ledger import Ledger
from effluent.store.writing import Writing
from tests.shipping import add_drums, add_parties, fill, line, manifest, ready
from tests.world import NOON, NOW, add_limit, add_result, add_sample, record, world


@pytest.fixture
def book(ledger_place: str) -> Iterator[Ledger]:
    with world(ledger_place) as book:
        add_parties(book)
        yield book


def missing(book: Ledger, *containers: str) -> tuple[str, ...]:
    with book.reading() as reading:
        wanted = manifest(*(line(each, "150 L") for each in containers))
        return missing_links(reading, wanted, cargos_of(reading, wanted))


def shipped(book: Ledger) -> list[str]:
    with book.reading() as reading:
        return sorted(shipped_containers(reading))


def test_whole_chain_lacks_nothing(book: Ledger) -> None:
    ready(book, "D-1", "D-2")
    assert missing(book, "D-1", "D-2") == ()


def test_each_link_is_named_as_it_is_missing(book: Ledger) -> None:
    add_drums(book, "D-1")
    assert missing(book, "D-1") == (
        "container D-1: it holds nothing on record",
        "container D-1: no sample was taken",
    )
    fill(book, "D-1")
    assert missing(book, "D-1") == ("container D-1: no sample was taken",)
    sample = add_sample(book, container="D-1", started_at=NOON + timedelta(hours=1))
    assert missing(book, "D-1") == (f"container D-1: sample {sample} has no results",)
    add_result(book, sample, "cadmium", "0.02", "mg/L")
    assert missing(book, "D-1") == ("container D-1: no verdict; no limit of site LIS applies",)
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    assert missing(book, "D-1") == ()


def test_water_after_the_sample_makes_it_stale(book: Ledger) -> None:
    ready(book, "D-1")
    fill(book, "D-1", "20", hours=2)
    assert missing(book, "D-1") == (
        "container D-1: water went in after its last sample (S-0001); take another",
    )
    with book.reading() as reading:
        assert cargo_of(reading, "D-1").verdicts == ()


def test_every_container_is_looked_at(book: Ledger) -> None:
    add_drums(book, "D-1", "D-2")
    fill(book, "D-1")
    assert [link.partition(":")[0] for link in missing(book, "D-1", "D-2")] == [
        "container D-1",
        "container D-2",
        "container D-2",
    ]


def test_manifest_itself_can_lack_facts(book: Ledger) -> None:
    with book.reading() as reading:
        found = missing_links(reading, manifest(carriers=(), emergency_phone=""), ())
    assert found == (
        "no container is named",
        "no carrier is named",
        "no emergency telephone is named, neither here nor at site LIS",
    )


def test_water_of_no_wash_is_named(book: Ledger) -> None:
    ready(book, "D-1")
    pour = Movement(
        kind=MovementKind.FILL, moved_at=NOON, moved_by="AM", volume=Quantity("9", "L"), target="D-1"
    )
    record(book, pour)
    assert missing(book, "D-1") == ("container D-1: some of its water came from no recorded wash",)


def test_voided_sample_no_longer_speaks(book: Ledger) -> None:
    ready(book, "D-1")

    def job(writing: Writing) -> None:
        writing.void_result(1)
        writing.void("sample", "S-0001")

    book.write(job, by="AM", action="void")
    assert missing(book, "D-1") == ("container D-1: no sample was taken",)


def test_over_and_undetermined_are_adverse(book: Ledger) -> None:
    ready(book, "D-1", cadmium="0.12")
    ready(book, "D-2")
    with book.reading() as reading:
        found = adverse(cargo_of(reading, container) for container in ("D-1", "D-2"))
    assert found == (
        "container D-1, sample S-0001: cadmium total over (0.12 mg/L is above the limit 0.11 mg/L)",
    )


def test_issued_and_returned_containers_are_shipped(book: Ledger) -> None:
    ready(book, "D-1", "D-2")
    code = manifests.draft(book, manifest(line("D-1"), line("D-2")), by="AM")
    assert shipped(book) == []
    manifests.issue(book, code, by="AM")
    assert shipped(book) == ["D-1", "D-2"]
    assert missing(book, "D-1") == ("container D-1: it was shipped on another manifest",)
    manifests.returned(book, code, by="AM", on=NOW.date(), signed_by="K. Invented")
    assert shipped(book) == ["D-1", "D-2"]
    manifests.void(book, code, by="AM", reason="wrong site", accept="brought back")
    assert shipped(book) == []
