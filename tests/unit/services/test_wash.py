from __future__ import annotations

from datetime import UTC, date, datetime, timedelta
from fractions import Fraction
from functools import partial
from typing import Any

import pytest

from effluent.calc.balance import Answer
from effluent.domain import MeasuredBy
from effluent.errors import (
    EffluentError,
    Questioned,
    RecordMissing,
    StateRefused,
    UnitMismatch,
    ValueRefused,
    VolumeRefused,
)
from effluent.services import register
from effluent.services.container import contents
from effluent.services.ledger import history
from effluent.services.wash import amend, balances, record, totals, void
from effluent.store.ledger import Ledger
from tests.washing import add_station, desalination, held, pour, q, recovery, rinse, withdraw
from tests.world import NOON, NOW, add_sample, world

CAUGHT = {"caught": q("48 ± 2 L"), "caught_by": MeasuredBy.LEVEL_STICK}


def test_wash_fills_its_container_and_is_balanced(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        done = record(
            book, desalination(**CAUGHT, retained=q("2 L"), retained_basis="AM"), {"D-1": None}, by="AM"
        )
        assert [(fill.target, str(fill.volume), fill.wash) for fill in done.fills] == [
            ("D-1", "48 ± 2 L", "W-0001")
        ]
        assert done.balanced.balance.unaccounted == 10
        assert done.balanced.flagged is None
        assert held(book, "D-1") == {"W-0001": "48"}


# 55 US gal = 208.197... L: NIST Handbook 44, appendix C; 1 gal = 3.785411784 L exactly
def test_several_containers_share_what_was_caught_in_any_unit(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        wash = desalination(rinse_water=q("20 gal"), caught=q("60 qt"), caught_by=MeasuredBy.METER)
        record(book, wash, {"D-1": q("10 gal"), "D-2": q("20 qt")}, by="AM")
        gallon = Fraction("3.785411784")
        assert contents(book, "D-1").level_l == 10 * gallon
        assert contents(book, "D-2").level_l == 5 * gallon


REFUSED: list[tuple[Any, Any, type[EffluentError], str]] = [
    (desalination(performed_at=NOW + timedelta(minutes=1)), {}, ValueRefused, "in the future"),
    (desalination(**CAUGHT), {}, ValueRefused, "into which container"),
    (desalination(), {"D-1": None}, ValueRefused, "nothing was caught"),
    (desalination(**CAUGHT), {"D-1": None, "D-2": None}, ValueRefused, "volume of each container"),
    (desalination(**CAUGHT), {"D-1": q("40 L"), "D-2": q("7 L")}, ValueRefused, "together they must hold"),
    (desalination(**CAUGHT), {"X-1": None}, ValueRefused, "it stands at CHI, the wash was at LIS"),
    (desalination(**CAUGHT), {"D-9": None}, RecordMissing, "did you mean"),
    (desalination(engine="E-9"), {}, RecordMissing, "no engine 'E-9'"),
    (desalination(site="LISS"), {}, RecordMissing, "did you mean LIS"),
    (desalination(performed_by="ZZ"), {}, RecordMissing, "no person 'ZZ'"),
    (desalination(rinse_water=q("-1 L")), {}, ValueRefused, "negative"),
    (desalination(rinse_water=q("1e999 L")), {}, ValueRefused, "nothing here is that large"),
    (desalination(rinse_water=q("60 L ± 1e999 %")), {}, ValueRefused, "nothing here is that large"),
    (desalination(rinse_water=q("60 kg")), {}, UnitMismatch, r"effluent convert 60 kg L .* \(in rinse water"),
    (desalination(outside_air=q("5 L")), {}, UnitMismatch, "in outside air '5 L'"),
    (recovery(cleaner="ZZ"), {}, RecordMissing, "no cleaner 'ZZ'"),
]


def test_what_cannot_have_been_leaves_the_ledger_as_it_was(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        before = book.head()
        for wash, fills, error, text in REFUSED:
            with pytest.raises(error, match=text):
                record(book, wash, fills, by="AM")
        assert book.head() == before


def test_container_takes_no_more_than_its_working_capacity(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "150 L", "D-1")
        with pytest.raises(VolumeRefused) as refused:
            rinse(book, "47.60001 L", "D-1", hours=1)
        assert str(refused.value).startswith(
            "container D-1: at 2026-03-02 13:00 Europe/Lisbon it would hold 197.60001 L, "
            "above its working capacity of 197.60000 L; use another container"
        )
        rinse(book, "47.6 L", "D-1", hours=1)


def test_late_entry_is_held_against_what_came_after(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "150 L", "D-1", hours=10)
        withdraw(book, "150 L", "D-1", hours=11)
        rinse(book, "150 L", "D-1", hours=12)
        with pytest.raises(VolumeRefused, match="03-02 22:00"):
            rinse(book, "60 L", "D-1", hours=1)


def test_amended_wash_counts_as_if_recorded_right_at_first(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        record(book, desalination(**CAUGHT), {"D-1": None}, by="AM")
        later = amend(book, "W-0001", {"caught": q("47 ± 2 L")}, by="AM", reason="misread")
        assert [(fill.code, str(fill.volume)) for fill in later.fills] == [("V-0001", "47 ± 2 L")]
        assert held(book, "D-1") == {"W-0001": "47"}
        assert contents(book, "D-1", as_of=str(book.head().sequence - 1)).level_l == 48


def test_amendment_can_move_the_water_to_other_containers(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        record(book, desalination(**CAUGHT), {"D-1": None}, by="AM")
        amend(book, "W-0001", {"into": {"D-2": q("40 L"), "D-3": q("8 L")}}, by="AM", reason="other drums")
        assert [held(book, drum) for drum in ("D-1", "D-2", "D-3")] == [{}, {"W-0001": "40"}, {"W-0001": "8"}]


@pytest.mark.parametrize(
    ("changes", "text"),
    [
        ({}, "nothing would change"),
        ({"rinse_water": q("60 L"), "into": {"D-1": q("48 ± 2 L")}}, "nothing would change"),
        ({"site": "CHI"}, "it stands at LIS, the wash was at CHI"),
        ({"performed_at": NOW + timedelta(days=1)}, "in the future"),
    ],
)
def test_amendment_that_cannot_be_is_refused(tmp_path: Any, changes: Any, text: str) -> None:
    with world(str(tmp_path / "ledger")) as book:
        add_station(book)
        record(book, desalination(**CAUGHT), {"D-1": None}, by="AM")
        with pytest.raises(ValueRefused, match=text):
            amend(book, "W-0001", changes, by="AM", reason="x")
        assert held(book, "D-1") == {"W-0001": "48"}


def test_words_of_a_wash_can_be_amended_after_its_drum_was_moved(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        record(book, desalination(**CAUGHT), {"D-1": None}, by="AM")
        register.amend(book, "container", "D-1", {"site": "CHI"}, by="AM", reason="moved")
        amend(book, "W-0001", {"remarks": "windy"}, by="AM", reason="left out")
        assert held(book, "D-1") == {"W-0001": "48"}


def test_void_wash_takes_its_fills_along(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        void(book, "W-0001", by="AM", reason="logged twice")
        assert contents(book, "D-1").movements == ()
        assert register.show(book, "wash", "W-0001").voided
        assert balances(book) == ()


@pytest.mark.parametrize("change", [{"caught": q("40 L")}, {"performed_at": NOON + timedelta(hours=3)}, None])
def test_correction_under_a_sample_is_questioned_by_its_number(tmp_path: Any, change: Any) -> None:
    def correct(**given: Any) -> None:
        job = void if change is None else partial(amend, changes=change)
        job(book, "W-0001", by="AM", reason="misread", **given)

    with world(str(tmp_path / "ledger")) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        add_sample(book, container="D-1", started_at=NOON + timedelta(hours=2))
        with pytest.raises(Questioned, match="D-1: sample S-0001 speaks for water of W-0001"):
            correct()
        correct(accept="drum was sampled again")
        assert "drum was sampled again" in history(book)[-1].reason


def test_sample_of_a_container_the_water_was_poured_into_is_asked_about(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        rinse(book, "40 L", "D-1", hours=1)
        pour(book, "20 L", "D-1", "D-2", hours=2)
        add_sample(book, container="D-2", started_at=NOON + timedelta(hours=3))
        add_sample(book, container="D-2", started_at=NOON + timedelta(hours=1))
        with pytest.raises(Questioned, match="D-2: sample S-0001 speaks"):
            void(book, "W-0001", by="AM", reason="logged twice")


def test_correction_that_leaves_sampled_water_as_it_was_asks_nothing(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        add_sample(book, container="D-1", started_at=NOON + timedelta(hours=2))
        rinse(book, "40 L", "D-1", hours=3)
        amend(book, "W-0001", {"performed_at": NOON + timedelta(minutes=5)}, by="AM", reason="slip")
        void(book, "W-0002", by="AM", reason="logged twice")
        assert held(book, "D-1") == {"W-0001": "48"}


def test_wash_whose_water_moved_on_or_was_sampled_cannot_be_voided(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        withdraw(book, "40 L", "D-1", hours=1)
        with pytest.raises(VolumeRefused, match=r"40\.0 L below empty"):
            void(book, "W-0001", by="AM", reason="x")
        rinse(book, "48 L", "D-2", hours=2)
        add_sample(book, wash="W-0002")
        with pytest.raises(StateRefused, match="referred to by sample S-0001"):
            void(book, "W-0002", by="AM", reason="x")


def test_corrections_need_a_reason(ledger_place: str) -> None:
    with world(ledger_place) as book:
        record(book, desalination(), {}, by="AM")
        with pytest.raises(ValueRefused, match="say why"):
            void(book, "W-0001", by="AM", reason=" ")
        with pytest.raises(ValueRefused, match="say why"):
            amend(book, "W-0001", {"task": "x"}, by="AM", reason="")


def set_threshold(book: Ledger, share: str) -> None:
    register.amend(book, "site", "LIS", {"unaccounted_threshold": q(share)}, by="AM", reason="set")


@pytest.mark.parametrize(
    ("share", "answer"), [("10 %", Answer.ABOVE), ("30 %", Answer.WITHIN), ("20 %", Answer.OPEN)]
)
def test_balance_is_held_against_the_site_s_own_threshold(tmp_path: Any, share: str, answer: Answer) -> None:
    with world(str(tmp_path / "ledger")) as book:
        add_station(book)
        record(book, desalination(**CAUGHT), {"D-1": None}, by="AM")
        set_threshold(book, share)
        assert [each.flagged for each in balances(book)] == [answer]


def test_balances_are_chosen_by_site_type_and_local_day(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        record(book, desalination(performed_at=datetime(2026, 4, 1, 23, 30, tzinfo=UTC)), {}, by="AM")
        record(book, desalination(engine="E-200"), {}, by="AM")
        assert [b.wash.code for b in balances(book, since=date(2026, 4, 2))] == ["W-0001"]
        assert [b.wash.code for b in balances(book, until=date(2026, 4, 1))] == ["W-0002"]
        assert [b.wash.code for b in balances(book, engine_type="Turboprop B (invented)")] == ["W-0002"]
        assert balances(book, site="CHI") == ()
        with pytest.raises(RecordMissing):
            balances(book, site="ZZZ")


def test_totals_go_by_local_month(ledger_place: str) -> None:
    with world(ledger_place) as book:
        record(book, desalination(performed_at=datetime(2026, 3, 31, 23, 30, tzinfo=UTC)), {}, by="AM")
        record(book, desalination(performed_at=datetime(2026, 4, 9, tzinfo=UTC)), {}, by="AM")
        summed = totals(balances(book))
    assert {group: balance.put_in for group, balance in summed.items()} == {
        ("LIS", "Turbofan A (invented)", "2026-04"): 120
    }


def test_balances_and_earlier_contents_answer_as_of_an_entry(ledger_place: str) -> None:
    with world(ledger_place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
        entry = str(book.head().sequence)
        rinse(book, "40 L", "D-1", hours=1)
        assert len(balances(book, as_of=entry)) == 1
        assert contents(book, "D-1", as_of=entry).level_l == 48
        assert balances(book)[0].wash.performed_at == NOON
