from __future__ import annotations

from collections.abc import Iterator
from datetime import timedelta

import pytest

from effluent.domain import ManifestState
from effluent.errors import RecordMissing, ValueRefused
from effluent.services.trace import Link, trace
from effluent.store.ledger import Ledger
from tests.shipping import add_parties, line, manifest
from tests.washing import add_station, pour, rinse, withdraw
from tests.world import NOON, add_limit, add_result, add_sample, record, world


def told(links: tuple[Link, ...], depth: int = 0) -> Iterator[str]:
    """Yield a line for each link, as the command does, without what is said of it."""
    for link in links:
        yield f"{'  ' * depth}{link.noun} {link.code}{' ^' if link.above else ''}"
        yield from told(link.further, depth + 1)


def forth(book: Ledger, noun: str, code: str) -> list[str]:
    return list(told(trace(book, noun, code).forth))


def back(book: Ledger, noun: str, code: str) -> list[str]:
    return list(told(trace(book, noun, code).back))


def add_chain(book: Ledger) -> None:
    """Wash E-100 into D-1, pour it into T-1, sample T-1 and put it on an issued manifest."""
    add_station(book)
    add_parties(book)
    rinse(book, "48 L", "D-1")
    pour(book, "48 L", "D-1", "T-1", hours=1)
    add_result(book, add_sample(book, started_at=NOON + timedelta(hours=2)), "cadmium", "0.12", "mg/L")
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    record(book, manifest(line("T-1", "48 L"), state=ManifestState.ISSUED))


CHAIN = [
    "wash W-0001",
    "  container D-1",
    "    container T-1",
    "      sample S-0001",
    "        verdict S-0001",
    "          manifest M-0001",
    "      manifest M-0001",
]


def test_chain_leads_from_the_engine_to_the_manifest(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_chain(book)
        assert forth(book, "engine", "E-100") == CHAIN
        assert back(book, "engine", "E-100") == []


def test_chain_leads_back_from_the_manifest_to_the_engine(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_chain(book)
        assert back(book, "manifest", "M-0001") == [
            "verdict S-0001",
            "  sample S-0001",
            "    container T-1",
            "      container D-1",
            "        wash W-0001",
            "          engine E-100",
        ]
        assert forth(book, "manifest", "M-0001") == []


def test_each_start_sees_its_part_of_the_chain(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_chain(book)
        assert forth(book, "movement", "V-0002") == [each.removeprefix("    ") for each in CHAIN[2:]]
        assert back(book, "movement", "V-0002") == ["container D-1", "  wash W-0001", "    engine E-100"]
        assert forth(book, "sample", "S-0001") == ["verdict S-0001", "  manifest M-0001"]
        assert forth(book, "container", "T-1")[-1] == "manifest M-0001"


def test_verdict_is_said(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_chain(book)
        assert trace(book, "sample", "S-0001").forth[0].said == "1 over"
        other = add_sample(book, point="HAUL")
        assert trace(book, "sample", other).forth[0].said.startswith("no verdict")


def test_point_leads_to_its_samples_and_cleaner_to_its_washes(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        sample = add_sample(book, point="SEW")
        assert forth(book, "point", "SEW") == [f"sample {sample}", f"  verdict {sample}"]
        assert back(book, "sample", sample) == ["point SEW"]
        assert forth(book, "cleaner", "AQ") == []


def test_only_water_that_was_there_is_on_the_way(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        early = add_sample(book, container="D-1", started_at=NOON + timedelta(minutes=30))
        withdraw(book, "48 L", "D-1", hours=1)
        rinse(book, "20 L", "D-1", hours=2)
        late = add_sample(book, container="D-1", started_at=NOON + timedelta(hours=3))
        rinse(book, "20 L", "D-1", hours=4)
        assert back(book, "sample", early) == ["container D-1", "  wash W-0001", "    engine E-100"]
        assert back(book, "sample", late)[1] == "  wash W-0002"
        assert forth(book, "wash", "W-0001") == [
            "container D-1",
            "  movement V-0002",
            f"  sample {early}",
            f"    verdict {early}",
        ]
        assert forth(book, "wash", "W-0003") == ["container D-1"]


def test_shared_tank_is_told_once(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "20 L", "D-1")
        rinse(book, "20 L", "D-2", hours=1)
        pour(book, "10 L", "D-1", "T-1", hours=2)
        pour(book, "10 L", "D-1", "D-2", hours=3)
        pour(book, "10 L", "D-2", "D-3", hours=4)
        add_sample(book, container="D-3", started_at=NOON + timedelta(hours=5))
        assert forth(book, "engine", "E-100") == [
            "wash W-0001",
            "  container D-1",
            "    container T-1",
            "    container D-2",
            "      container D-3",
            "        sample S-0001",
            "          verdict S-0001",
            "wash W-0002",
            "  container D-2",
            "    container D-3 ^",
        ]


def test_water_poured_to_and_fro_comes_to_an_end(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "40 L", "D-1")
        for hour in range(1, 7):
            ends = ("D-1", "D-2") if hour % 2 else ("D-2", "D-1")
            pour(book, "10 L", *ends, hours=hour)
        assert "    container D-1 ^" in forth(book, "wash", "W-0001")
        assert back(book, "container", "D-2")


def test_voided_transfer_is_off_the_way_but_on_it_as_of_before(ledger_place: str) -> None:
    from effluent.services.container import void_movement

    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        moved = pour(book, "48 L", "D-1", "D-2", hours=1)
        entry = str(book.head().sequence)
        void_movement(book, moved, by="AM", reason="never done")
        assert forth(book, "wash", "W-0001") == ["container D-1"]
        then = trace(book, "wash", "W-0001", as_of=entry)
        assert list(told(then.forth)) == ["container D-1", "  container D-2"]


@pytest.mark.parametrize("noun", ["verdict", "person", "", "wash "])
def test_noun_off_the_chain_is_refused(tmp_path: object, noun: str) -> None:
    with world(f"{tmp_path}/ledger") as book, pytest.raises(ValueRefused, match="trace from one of: engine"):
        trace(book, noun, "x")


def test_record_that_is_not_there_is_refused(ledger_place: str) -> None:
    with world(ledger_place) as book, pytest.raises(RecordMissing, match="did you mean E-100"):
        trace(book, "engine", "E-101")
