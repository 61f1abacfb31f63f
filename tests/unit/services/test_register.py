from __future__ import annotations

import pytest

from effluent.domain import Cleaner, CleanerForm, CleanerType, Container, ContainerKind, Engine, Person
from effluent.errors import AlreadyRecorded, RecordMissing, StateRefused, ValueRefused
from effluent.services.register import add, amend, check, listing, show, void
from tests.washing import add_station, desalination, q, rinse
from tests.world import SITE, add_wash, record, world


def test_what_was_never_used_can_be_voided_and_stays_readable(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add(book, Engine(code="E-999", type_label="typed twice", site="LIS"), by="AM")
        void(book, "engine", "E-999", by="AM", reason="typed twice")
        assert [engine.code for engine in listing(book, "engine")] == ["E-100"]
        assert show(book, "engine", "E-999").voided
        with pytest.raises(AlreadyRecorded):
            add(book, Engine(code="E-999", type_label="again", site="LIS"), by="AM")


@pytest.mark.parametrize(
    ("noun", "code", "referring"),
    [("engine", "E-100", "wash W-0001"), ("site", "LIS", "point SEW, point HAUL, engine E-100 and 2 more")],
)
def test_what_is_referred_to_cannot_be_voided(tmp_path: object, noun: str, code: str, referring: str) -> None:
    with world(f"{tmp_path}/ledger") as book:
        add_wash(book)
        with pytest.raises(StateRefused, match=f"{code} is referred to by {referring}"):
            void(book, noun, code, by="AM", reason="x")


def test_person_who_recorded_something_cannot_be_voided(ledger_place: str) -> None:
    with world(ledger_place) as book:
        with pytest.raises(StateRefused, match="person AM is named by 2 entries"):
            void(book, "person", "AM", by="JT", reason="left")
        void(book, "person", "RS", by="JT", reason="typed twice")
        with pytest.raises(StateRefused, match="named by 1 entry"):
            void(book, "person", "JT", by="AM", reason="left")


def test_site_of_washes_may_be_amended_and_their_engine_move(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        amend(book, "site", "LIS", {"time_zone": "Asia/Tokyo"}, by="AM", reason="x")
        amend(book, "engine", "E-100", {"site": "CHI"}, by="AM", reason="moved")
        assert f"{listing(book, 'wash')[0].performed_at:%H:%M}" == "21:00"


def test_times_of_voided_records_are_still_local(ledger_place: str) -> None:
    with world(ledger_place) as book:
        record(book, Person(code="ZZ", name="Zoe"))
        add_station(book)
        record(book, desalination(code="W-1", site="CHI"))
        void(book, "wash", "W-1", by="AM", reason="twice")
        void(book, "container", "X-1", by="AM", reason="sold")
        void(book, "site", "CHI", by="AM", reason="closed")
        assert f"{show(book, 'wash', 'W-1').value.performed_at:%H:%M %Z}" == "06:00 CST"


def test_amendment_without_change_or_reason_is_refused(ledger_place: str) -> None:
    with world(ledger_place) as book:
        with pytest.raises(ValueRefused, match="nothing would change"):
            amend(book, "engine", "E-100", {"site": "LIS"}, by="AM", reason="x")
        with pytest.raises(ValueRefused, match="say why"):
            amend(book, "engine", "E-100", {"site": "LIS"}, by="AM", reason="")
        with pytest.raises(RecordMissing):
            amend(book, "engine", "E-1", {"site": "LIS"}, by="AM", reason="x")


def drum(**given: object) -> Container:
    standard = {"code": "D-9", "kind": ContainerKind.DRUM, "site": "LIS", "capacity": q("55 gal")}
    return Container(**{**standard, **given})  # type: ignore[arg-type]


def cleaner(form: CleanerForm, ratio: str) -> Cleaner:
    return Cleaner(code="C", label="Blue", type=CleanerType.AQUEOUS, form=form, mix_ratio=ratio)


def zone(name: str) -> object:
    return type(SITE)(code="X", name="x", operator="x", address="x", time_zone=name)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (drum(capacity=q("0 L")), "holds more than nothing"),
        (drum(capacity=q("-1 L")), "negative"),
        (drum(capacity=q("1e13 L")), "nothing here is that large"),
        (drum(fill_fraction=q("0 %")), "above 0 %"),
        (drum(fill_fraction=q("101 %")), "up to 100 %"),
        (drum(tare=q("-1 kg")), "negative"),
        (cleaner(CleanerForm.CONCENTRATE, ""), "a concentrate has a mix ratio"),
        (cleaner(CleanerForm.READY, "1:4"), "a ready-to-use cleaner has none"),
        (cleaner(CleanerForm.CONCENTRATE, "four"), "parts of cleaner to parts of water"),
        (zone("Lisbon"), "IANA name"),
        (zone("../etc/passwd"), "IANA name"),
        (zone(""), "IANA name"),
    ],
)
def test_value_that_contradicts_itself_is_refused(value: object, text: str) -> None:
    with pytest.raises(ValueRefused, match=text):
        check(value)


@pytest.mark.parametrize(
    "value", [drum(), drum(fill_fraction=q("100 %")), cleaner(CleanerForm.READY, ""), SITE]
)
def test_sound_value_passes(value: object) -> None:
    check(value)
