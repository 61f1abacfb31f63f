from __future__ import annotations

from collections.abc import Iterator
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Any

import pytest

from effluent.domain import Bound, BrokenBy, Container, ContainerKind, Quantity, Statistic
from effluent.errors import FileMissing, StorageFailed, WouldOverwrite
from effluent.paper.sheet import ManifestSheet
from effluent.services import manifest as manifests
from effluent.services.sheet import check_target, pdf, sheet
from effluent.store.ledger import Ledger
from tests.shipping import DESCRIPTION, add_drums, add_parties, fill, line, manifest, ready
from tests.world import add_limit, add_result, record, world


@pytest.fixture
def book(ledger_place: str) -> Iterator[Ledger]:
    with world(ledger_place) as book:
        add_parties(book)
        yield book


def drafted(book: Ledger, *lines: Any, **given: Any) -> str:
    return manifests.draft(book, manifest(*lines, **given), by="AM")


def worded(book: Ledger, code: str) -> ManifestSheet:
    with book.reading() as reading:
        return sheet(reading, reading.value("manifest", code))


def test_equal_lines_are_printed_as_one(book: Ledger) -> None:
    add_drums(book, *(f"D-{n}" for n in range(1, 5)))
    record(
        book,
        Container(
            code="P-1",
            kind=ContainerKind.DRUM,
            site="LIS",
            capacity=Quantity("208", "L"),
            material="plastic",
        ),
    )
    for container in ("D-1", "D-2", "D-3", "D-4", "P-1"):
        fill(book, container)
    code = drafted(
        book,
        line("D-1"),
        line("D-2", waste_codes="D006"),
        line("D-3"),
        line("D-4", "40 gal"),
        line("P-1"),
    )
    assert [
        (part.containers, part.number, part.container_code, part.quantity, part.unit_code, part.waste_codes)
        for part in worded(book, code).lines
    ] == [
        (("D-1", "D-3"), 2, "DM", 300, "L", ()),
        (("D-2",), 1, "DM", 150, "L", ("D006",)),
        (("D-4",), 1, "DM", 40, "G", ()),
        (("P-1",), 1, "DF", 150, "L", ()),
    ]


def test_words_come_from_the_records(book: Ledger) -> None:
    ready(book, "D-1")
    said = worded(book, drafted(book, line("D-1"), carriers=("HAUL", "SEA"), special_handling="Keep dry."))
    assert (said.generator.operator, said.generator.emergency_phone) == (
        "Invented Air Services",
        "+00 555 0111",
    )
    assert [carrier.name for carrier in said.carriers] == ["Invented Haulage", "Second Invented Haulage"]
    assert (said.facility.name, said.special_handling) == ("Invented Treatment Works", "Keep dry.")
    assert (said.lines[0].description, said.lines[0].unit_word) == (DESCRIPTION, "litres")
    assert (said.ledger_id, said.entry, said.digest) == ("test", book.head().sequence, book.head().digest)


def test_origins_name_wash_engine_and_volume(book: Ledger) -> None:
    ready(book, "D-1")
    (origin,) = worded(book, drafted(book, line("D-1"))).origins
    assert (origin.container, origin.wash, origin.washed_on, origin.engine, origin.volume) == (
        "D-1",
        "W-0001",
        "2026-03-02",
        "E-100",
        "150 L",
    )
    assert (origin.kind, origin.cleaner) == ("desalination wash", "none")


def test_laboratory_summary_gives_result_limit_source_and_verdict(book: Ledger) -> None:
    ready(book, "D-1")
    add_limit(
        book,
        "HAUL",
        "ph",
        "5.0",
        bound=Bound.MINIMUM,
        broken_by=BrokenBy.REACHING,
        statistic=Statistic.DAILY,
        written_at="table 2",
        verified_by=None,
        verified_on=None,
    )
    add_result(book, "S-0001", "ph", "4.2", "", flag="J")
    rows = worded(book, drafted(book, line("D-1"))).laboratory
    assert [(r.analyte, r.result, r.limit, r.source, r.verdict) for r in rows] == [
        (
            "cadmium",
            "0.02 mg/L",
            "at most 0.11 mg/L at any time",
            "Invented Water Board: permit 7 (invented)",
            "within",
        ),
        ("pH", "4.2 J", "above 5.0 on any day", "Invented Water Board: permit 7 (invented), table 2", "over"),
    ]
    assert rows[0].notes == ()
    assert "limit not verified by a second person" in rows[1].notes


def test_laboratory_summary_gives_the_days_of_the_site_and_the_laboratory(book: Ledger) -> None:
    ready(book, "D-1")
    night = datetime(2026, 7, 1, 23, 30, tzinfo=UTC)
    add_result(book, "S-0001", "cadmium", "0.03", "mg/L", replicate=2, laboratory="HAUL", analysed_at=night)
    first, second = worded(book, drafted(book, line("D-1"))).laboratory
    assert (first.drawn, first.analysed) == ("drawn 2026-03-02", "")
    assert second.analysed == "Invented Haulage, analysed 2026-07-02"


def test_stale_sample_is_left_out_of_the_summary(book: Ledger) -> None:
    ready(book, "D-1")
    fill(book, "D-1", "20", hours=3)
    said = worded(book, drafted(book, line("D-1")))
    assert said.laboratory == ()
    assert said.state_note == "Cannot be issued yet: 1 link of the chain missing."


def test_state_note_tells_the_life_of_the_manifest(book: Ledger) -> None:
    ready(book, "D-1", cadmium="0.2")
    code = drafted(book, line("D-1"))
    assert worded(book, code).state_note == ""
    manifests.issue(book, code, by="AM", on=date(2026, 5, 20), accept="the works takes it")
    manifests.accepted(book, code, by="AM", on=date(2026, 5, 21))
    manifests.returned(book, code, by="AM", on=date(2026, 5, 30), signed_by="K. Invented")
    manifests.void(book, code, by="AM", reason="wrong works", accept="refused there, brought back")
    assert worded(book, code).state_note == (
        "Questioned at issue (a verdict of annex A or a quantity), and accepted: the works takes it."
        " The first carrier accepted the load on 2026-05-21."
        " Signed copy came back on 2026-05-30, signed by K. Invented."
        " Void since 2026-06-01 (UTC): wrong works; refused there, brought back."
    )


def printed(book: Ledger, code: str, target: Path, **given: Any) -> bytes:
    pdf(book, code, str(target), **given)
    return target.read_bytes()


def test_issued_paper_is_the_same_for_ever(book: Ledger, tmp_path: Path) -> None:
    ready(book, "D-1", "D-2")
    code, draft = drafted(book, line("D-1")), drafted(book, line("D-2"))
    manifests.issue(book, code, by="AM")
    first = printed(book, code, tmp_path / "1.pdf")
    sketch = printed(book, draft, tmp_path / "2.pdf")
    add_drums(book, "D-9")
    assert printed(book, code, tmp_path / "3.pdf") == first
    assert printed(book, draft, tmp_path / "4.pdf") != sketch
    manifests.void(book, code, by="AM", reason="wrong works")
    assert printed(book, code, tmp_path / "5.pdf") != first
    before = str(book.head().sequence - 1)
    assert printed(book, code, tmp_path / "6.pdf", as_of=before) == first


def test_file_in_the_way_is_never_overwritten(book: Ledger, tmp_path: Path) -> None:
    code = drafted(book)
    target = tmp_path / "paper.pdf"
    target.write_text("mine")
    with pytest.raises(WouldOverwrite):
        pdf(book, code, str(target))
    assert [(each.name, each.read_text()) for each in tmp_path.glob("*.pdf")] == [("paper.pdf", "mine")]


def test_place_that_takes_no_file_is_refused(book: Ledger, tmp_path: Path) -> None:
    code = drafted(book)
    with pytest.raises(FileMissing, match="make the folder first"):
        check_target(str(tmp_path / "none" / "paper.pdf"))
    with pytest.raises(StorageFailed):
        pdf(book, code, str(tmp_path / ("x" * 300)))


def test_folder_that_takes_no_file_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    # The tests may run as a user whom no mode of a folder stops.
    monkeypatch.setattr("effluent.services.sheet.os.access", lambda *_: False)
    with pytest.raises(StorageFailed, match="takes no new file"):
        check_target(str(tmp_path / "paper.pdf"))


def test_full_disk_leaves_nothing_behind(
    book: Ledger, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(_: Path, content: bytes) -> None:
        raise OSError(28, f"No space left on device for {len(content)} bytes")

    code = drafted(book)
    folder = tmp_path / "papers"
    folder.mkdir()
    monkeypatch.setattr(Path, "write_bytes", fail)
    with pytest.raises(StorageFailed, match="No space left"):
        pdf(book, code, str(folder / "paper.pdf"))
    assert list(folder.iterdir()) == []
