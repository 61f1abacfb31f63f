from __future__ import annotations

import hashlib
import os
from collections.abc import Callable, Iterator
from datetime import date, timedelta
from pathlib import Path

import pytest

from effluent.domain import ManifestState
from effluent.errors import (
    ChainBroken,
    FileMissing,
    NotPrintable,
    Questioned,
    RecordMissing,
    StateRefused,
    ValueRefused,
)
from effluent.services import manifest as manifests
from effluent.services.ledger import open_ledger
from effluent.store.ledger import Ledger
from tests.shipping import add_drums, add_parties, fill, line, manifest, ready
from tests.world import NOW, world

TODAY = NOW.date()
WASHED = date(2026, 3, 2)


@pytest.fixture
def book(ledger_place: str) -> Iterator[Ledger]:
    with world(ledger_place) as book:
        add_parties(book)
        yield book


def drafted(book: Ledger, *containers: str, cadmium: str = "0.02") -> str:
    ready(book, *containers, cadmium=cadmium)
    return manifests.draft(book, manifest(*map(line, containers)), by="AM")


def issued(book: Ledger) -> str:
    code = drafted(book, "D-1")
    manifests.issue(book, code, by="AM", on=date(2026, 5, 20))
    return code


def newest(book: Ledger) -> tuple[str, str]:
    return book.head().action, book.head().reason


def test_draft_gets_a_number_of_this_ledger(book: Ledger) -> None:
    code = drafted(book, "D-1")
    shown = manifests.show(book, code)
    assert (code, shown.value.state, str(shown.value.lines[0].quantity)) == (
        "M-0001",
        ManifestState.DRAFT,
        "150 L",
    )
    assert (shown.missing, shown.doubts) == ((), ())


def test_what_is_questioned_needs_a_reason_and_the_entry_keeps_it(book: Ledger) -> None:
    ready(book, "D-1")
    wanted = manifest(line("D-1", "199 L"))
    with pytest.raises(Questioned, match="more than 10 % off"):
        manifests.draft(book, wanted, by="AM")
    manifests.draft(book, wanted, by="AM", accept="weighed", reason="new")
    action, reason = newest(book)
    assert action == "draft manifest"
    assert "new" in reason
    assert "accepted: weighed (questioned: container D-1: 199 L is more" in reason


def test_manifest_begins_as_a_draft(book: Ledger) -> None:
    with pytest.raises(ValueRefused, match="begins as a draft"):
        manifests.draft(book, manifest(state=ManifestState.ISSUED), by="AM")


def test_lines_join_a_draft_and_replace_those_of_the_same_container(book: Ledger) -> None:
    code = drafted(book, "D-1")
    ready(book, "D-2")
    manifests.add_lines(book, code, [line("D-2"), line("D-1", "149 L")], by="AM")
    lines = manifests.show(book, code).value.lines
    assert [(each.container, str(each.quantity)) for each in lines] == [("D-1", "149 L"), ("D-2", "150 L")]


def test_container_is_taken_off_a_draft(book: Ledger) -> None:
    code = drafted(book, "D-1", "D-2")
    manifests.remove_lines(book, code, ["D-1"], by="AM")
    assert [each.container for each in manifests.show(book, code).value.lines] == ["D-2"]
    with pytest.raises(RecordMissing, match="it is not on manifest M-0001"):
        manifests.remove_lines(book, code, ["D-1"], by="AM")


def test_amendment_changes_a_draft_and_keeps_the_old_version(book: Ledger) -> None:
    code = drafted(book, "D-1")
    manifests.amend(book, code, {"carriers": ("SEA", "HAUL")}, by="AM", reason="other haulier")
    versions = manifests.show(book, code).versions
    assert [version.value.carriers for version in versions] == [("HAUL",), ("SEA", "HAUL")]


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({"carriers": ("HAUL",)}, "nothing would change"),
        ({"state": ManifestState.ISSUED}, "it follows from issuing"),
        ({"facility": "HAUL"}, "company HAUL is on record as a carrier"),
    ],
)
def test_amendment_that_does_not_hold_is_refused(book: Ledger, changes: dict[str, object], text: str) -> None:
    code = drafted(book, "D-1")
    with pytest.raises(ValueRefused, match=text):
        manifests.amend(book, code, changes, by="AM", reason="r")


def test_issue_fixes_the_day_and_the_state(book: Ledger) -> None:
    code = drafted(book, "D-1")
    manifests.issue(book, code, by="AM")
    value = manifests.show(book, code).value
    assert (value.state, value.issued_on) == (ManifestState.ISSUED, TODAY)


def test_issue_names_every_missing_link_and_records_nothing(book: Ledger) -> None:
    ready(book, "D-1")
    add_drums(book, "D-2")
    fill(book, "D-2")
    wanted = manifest(line("D-1"), line("D-2"), carriers=())
    code = manifests.draft(book, wanted, by="AM")
    before = book.head()
    with pytest.raises(ChainBroken) as refused:
        manifests.issue(book, code, by="AM", accept="never mind")
    assert refused.value.missing == ("no carrier is named", "container D-2: no sample was taken")
    assert manifests.show(book, code).missing == refused.value.missing
    assert book.head() == before


def test_verdict_over_the_limit_is_shipped_only_with_a_reason(book: Ledger) -> None:
    code = drafted(book, "D-1", cadmium="0.12")
    with pytest.raises(Questioned, match="cadmium total over"):
        manifests.issue(book, code, by="AM")
    assert manifests.show(book, code).doubts[0].startswith("container D-1, sample S-0001: cadmium total over")
    manifests.issue(book, code, by="AM", accept="the works takes it")
    assert newest(book)[1].startswith("accepted: the works takes it")


def test_draft_that_cannot_be_printed_is_not_recorded(book: Ledger) -> None:
    ready(book, "D-1")
    with pytest.raises(NotPrintable):
        manifests.draft(book, manifest(line("D-1"), emergency_contact="\u0645\u064a\u0627\u0647"), by="AM")
    assert manifests.listing(book) == ()


def test_manifest_that_cannot_be_printed_is_not_issued(book: Ledger) -> None:
    ready(book, "D-1", cadmium="0.2")
    code = manifests.draft(book, manifest(line("D-1")), by="AM")
    with pytest.raises(NotPrintable):
        manifests.issue(book, code, by="AM", accept="\u0645\u064a\u0627\u0647")
    assert manifests.show(book, code).value.state is ManifestState.DRAFT


@pytest.mark.parametrize(
    ("on", "text"),
    [
        (TODAY + timedelta(days=1), "lies in the future"),
        (WASHED - timedelta(days=1), "water went into container D-1 on 2026-03-02"),
    ],
)
def test_day_of_issue_lies_between_the_water_and_today(book: Ledger, on: date, text: str) -> None:
    code = drafted(book, "D-1")
    with pytest.raises(ValueRefused, match=text):
        manifests.issue(book, code, by="AM", on=on)


def test_issued_manifest_changes_no_more(book: Ledger) -> None:
    code = issued(book)
    changes: list[Callable[[], None]] = [
        lambda: manifests.amend(book, code, {"facility": "WORKS"}, by="AM", reason="r"),
        lambda: manifests.add_lines(book, code, [line("D-1", "149 L")], by="AM"),
        lambda: manifests.remove_lines(book, code, ["D-1"], by="AM"),
        lambda: manifests.issue(book, code, by="AM"),
    ]
    for change in changes:
        with pytest.raises(StateRefused, match="manifest M-0001 is issued"):
            change()


def test_signed_copy_comes_back_with_its_digest(book: Ledger, tmp_path: Path) -> None:
    code = issued(book)
    scan = tmp_path / "scan.pdf"
    scan.write_bytes(b"invented scan")
    manifests.accepted(book, code, by="AM", on=date(2026, 5, 21))
    manifests.returned(
        book, code, by="AM", on=date(2026, 5, 30), signed_by=" K. Invented ", copy_path=str(scan)
    )
    value = manifests.show(book, code).value
    assert (value.state, value.accepted_on, value.returned_on, value.signed_by) == (
        ManifestState.RETURNED,
        date(2026, 5, 21),
        date(2026, 5, 30),
        "K. Invented",
    )
    assert value.signed_copy == hashlib.sha256(b"invented scan").hexdigest()


def test_return_that_does_not_hold_is_refused(book: Ledger, tmp_path: Path) -> None:
    code = issued(book)
    manifests.accepted(book, code, by="AM", on=date(2026, 5, 21))

    def refusal(on: date = date(2026, 5, 30), name: str = "K", scan: Path | None = None) -> str:
        with pytest.raises((ValueRefused, FileMissing)) as refused:
            manifests.returned(
                book, code, by="AM", on=on, signed_by=name, copy_path=str(scan) if scan else None
            )
        return str(refused.value)

    assert "issued on 2026-05-20" in refusal(date(2026, 5, 19))
    assert "accepted it on 2026-05-21" in refusal(date(2026, 5, 20))
    assert "lies in the future" in refusal(TODAY + timedelta(days=1))
    assert "write the name" in refusal(name=" ")
    assert "name the scan" in refusal(scan=tmp_path / "none.pdf")
    os.mkfifo(tmp_path / "pipe")
    assert "it is no file" in refusal(scan=tmp_path / "pipe")


def test_only_what_is_out_can_come_back(book: Ledger) -> None:
    code = drafted(book, "D-1")
    with pytest.raises(StateRefused, match="is draft: issue it first"):
        manifests.returned(book, code, by="AM", on=TODAY, signed_by="K")
    with pytest.raises(StateRefused, match="is draft: issue it first"):
        manifests.accepted(book, code, by="AM", on=TODAY)


def test_void_manifest_frees_its_containers(book: Ledger) -> None:
    code = issued(book)
    with pytest.raises(ValueRefused, match="say why"):
        manifests.void(book, code, by="AM", reason=" ")
    manifests.void(book, code, by="AM", reason="wrong works")
    assert manifests.show(book, code).value.state is ManifestState.VOID
    assert manifests.draft(book, manifest(line("D-1")), by="AM") == "M-0002"
    with pytest.raises(StateRefused, match="nothing more to void"):
        manifests.void(book, code, by="AM", reason="again")


def test_void_of_a_load_that_left_is_questioned(book: Ledger) -> None:
    code = issued(book)
    manifests.accepted(book, code, by="AM", on=TODAY)
    with pytest.raises(Questioned, match="the first carrier accepted the load on"):
        manifests.void(book, code, by="AM", reason="wrong works")
    manifests.returned(book, code, by="AM", on=TODAY, signed_by="K")
    with pytest.raises(Questioned, match="its signed copy came back on"):
        manifests.void(book, code, by="AM", reason="wrong works")
    manifests.void(book, code, by="AM", reason="wrong works", accept="refused there, brought back")
    assert manifests.show(book, code).value.state is ManifestState.VOID


def test_listing_counts_the_days_of_what_is_not_back(book: Ledger, ledger_place: str) -> None:
    first = issued(book)
    drafted(book, "D-2")
    assert [(each.manifest.code, each.days_out) for each in manifests.listing(book)] == [
        (first, 12),
        ("M-0002", None),
    ]
    entry = str(book.head().sequence)
    with open_ledger(ledger_place, clock=lambda: NOW + timedelta(days=30)) as later:
        assert manifests.listing(later)[0].days_out == 42
        assert manifests.listing(later, as_of=entry)[0].days_out == 12


def test_show_answers_as_of_an_earlier_entry(book: Ledger) -> None:
    code = drafted(book, "D-1")
    entry = str(book.head().sequence)
    manifests.issue(book, code, by="AM")
    assert manifests.show(book, code, as_of=entry).value.state is ManifestState.DRAFT
