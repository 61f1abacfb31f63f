"""Rules of the trade for a wash: common practice, no source."""

from __future__ import annotations

from typing import Any

import pytest

from effluent.domain import MeasuredBy, RunningMode
from effluent.errors import Questioned, ValueRefused
from effluent.services.register import check
from effluent.services.rule import check_trade, questions
from effluent.services.wash import record
from tests.washing import add_station, desalination, grit, q, recovery
from tests.world import world


@pytest.mark.parametrize(
    ("name", "value"),
    [("cleaner", "AQ"), ("lot", "L-1"), ("concentrate", q("1 L")), ("soaks", 1), ("grit", "shell")],
)
def test_desalination_wash_is_fresh_water_only(name: str, value: object) -> None:
    with pytest.raises(ValueRefused, match="fresh water only"):
        check_trade(desalination(**{name: value}))


@pytest.mark.parametrize("name", ["rinse_water", "caught", "concentrate", "retained", "additive_volume"])
def test_grit_yields_no_liquid(name: str) -> None:
    with pytest.raises(ValueRefused, match="yields no liquid"):
        check_trade(grit(**{name: q("5 L")}))


def test_grit_goes_in_at_idle() -> None:
    with pytest.raises(ValueRefused, match="grit goes in at idle"):
        check_trade(grit(mode=RunningMode.MOTORING))


@pytest.mark.parametrize(
    ("wash", "remedy"),
    [
        (desalination(rinse_water=None), "give its volume"),
        (recovery(cleaner=None), "name it"),
        (recovery(concentrate=None), "as delivered"),
        (recovery(grit="shell"), "record two washes"),
        (grit(grit=""), "say which grit"),
        (desalination(caught=q("5 L")), "level stick"),
        (desalination(retained=q("5 L")), "basis"),
        (desalination(additive="methanol"), "volume of the additive"),
        (desalination(additive_volume=q("1 L")), "name the additive"),
    ],
)
def test_what_is_lacking_is_named(wash: Any, remedy: str) -> None:
    with pytest.raises(ValueRefused, match=remedy):
        check_trade(wash)


@pytest.mark.parametrize(
    "wash",
    [
        desalination(additive="methanol", additive_volume=q("20 L"), caught=q("60 L"), caught_by="scale"),
        recovery(soaks=2, rinses=3, lot="L-1"),
        recovery(cleaner="RTU", solution_water=None),
        grit(grit_mass=q("3 lb"), outside_air=q("-5 degC")),
    ],
)
def test_sound_wash_passes(wash: Any) -> None:
    check_trade(wash)


CAUGHT = {"caught_by": MeasuredBy.METER}


@pytest.mark.parametrize(
    ("wash", "asked"),
    [
        (desalination(caught=q("60 L"), **CAUGHT), []),
        (desalination(caught=q("61 ± 2 L"), **CAUGHT), []),
        (desalination(caught=q("61 L"), **CAUGHT), ["more was caught (61 L) than put in (60 L)"]),
        (recovery(), []),
        (recovery(solution_water=None), ["0 L of water is far from the cleaner's mix ratio 1:4"]),
        (recovery(cleaner="RTU"), ["Green is ready to use, yet 16 L of water was mixed in"]),
        (recovery(cleaner="RTU", solution_water=None), []),
    ],
)
def test_what_is_unlikely_is_questioned(tmp_path: Any, wash: Any, asked: list[str]) -> None:
    with world(str(tmp_path / "ledger")) as book:
        add_station(book)
        with book.reading() as reading:
            found = list(questions(reading, wash))
    assert len(found) == len(asked)
    assert all(phrase in question for phrase, question in zip(asked, found, strict=True))


def test_same_wash_twice_is_questioned(ledger_place: str) -> None:
    with world(ledger_place) as book:
        record(book, desalination(task="card 1"), {}, by="AM")
        with pytest.raises(
            Questioned, match="W-0001 is a desalination wash of engine E-100 at that time too"
        ):
            record(book, desalination(task="card 1"), {}, by="AM")
        assert record(book, desalination(), {}, by="AM", accept="two washes").code == "W-0002"


@pytest.mark.parametrize("air", ["-300 degC", "-460 degF", "-1 K"])
def test_air_below_absolute_zero_is_refused(air: str) -> None:
    with pytest.raises(ValueRefused, match=r"outside air.*below absolute zero"):
        check(desalination(outside_air=q(air)))
    check(desalination(outside_air=q("-40 degF")))
