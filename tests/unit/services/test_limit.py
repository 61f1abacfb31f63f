from __future__ import annotations

from dataclasses import replace
from datetime import date

import pytest

from effluent.domain import Bound, Fraction, Limit, Quantity, Statistic
from effluent.errors import (
    EffluentError,
    Questioned,
    RecordMissing,
    StateRefused,
    UnitMismatch,
    ValueRefused,
)
from effluent.services.limit import (
    Adoption,
    adopt,
    amend,
    enter,
    listing,
    reference,
    retire,
    show,
    verify,
)
from tests.world import world

CADMIUM = Limit(
    point="SEW",
    analyte="Cd",
    value=Quantity.parse("0.11 mg/L"),
    effective_from=date(2026, 1, 1),
    authority="Invented Water Board",
    document="permit 7 (invented)",
    entered_by="RS",
)
PH = replace(CADMIUM, analyte="pH", bound=Bound.MINIMUM, value=Quantity.parse("5.0"))
DISSOLVED = replace(CADMIUM, analyte="Cadmium, dissolved", fraction=Fraction.DISSOLVED)
LOAD = replace(CADMIUM, statistic=Statistic.MASS_DAY, value=Quantity.parse("0.02 kg/d"))
ADOPTION = Adoption(
    key="40CFR433.17/cadmium/daily",
    point="SEW",
    effective_from=date(2026, 1, 1),
    acknowledge="permit 7, page 3, cites it",
    changes={"authority": "Invented Water Board"},
)


@pytest.mark.parametrize("limit", [CADMIUM, PH, DISSOLVED, LOAD], ids=lambda limit: limit.analyte)
def test_a_limit_is_entered_under_the_analytes_own_name(ledger_place: str, limit: Limit) -> None:
    with world(ledger_place) as book:
        code = enter(book, replace(limit, verified_by="JT"), by="RS")
        held = show(book, code).value
    assert held.analyte in ("cadmium", "ph")
    assert (held.value, held.entered_by, held.verified_by) == (limit.value, "RS", None)


@pytest.mark.parametrize(
    ("changed", "error", "words"),
    [
        ({"analyte": "kryptonite"}, ValueRefused, "kryptonite"),
        ({"analyte": "dissolved cadmium"}, ValueRefused, "make both agree"),
        ({"value": Quantity.parse("5 s.u.")}, UnitMismatch, "a pH is no limit for cadmium"),
        ({"value": Quantity.parse("0.11")}, ValueRefused, "write its unit"),
        ({"value": Quantity.parse("-1 mg/L")}, ValueRefused, "negative"),
        ({"value": Quantity.parse("1 ± 0.1 mg/L")}, ValueRefused, "no uncertainty"),
        ({"statistic": Statistic.MASS_DAY}, UnitMismatch, "kg/d"),
        ({"effective_to": date(2025, 12, 31)}, ValueRefused, "before the first day"),
        ({"action_level": Quantity.parse("120 ug/L")}, ValueRefused, "beyond the limit"),
        ({"point": "NOWHERE"}, RecordMissing, "NOWHERE"),
    ],
)
def test_a_limit_that_contradicts_itself_is_refused(
    ledger_place: str, changed: dict[str, object], error: type[EffluentError], words: str
) -> None:
    with world(ledger_place) as book:
        with pytest.raises(error, match=words):
            enter(book, replace(CADMIUM, **changed), by="RS")  # type: ignore[arg-type]
        assert listing(book) == ()


def test_an_equal_limit_at_the_same_time_is_questioned(ledger_place: str) -> None:
    with world(ledger_place) as book:
        first = enter(book, CADMIUM, by="RS")
        with pytest.raises(Questioned, match=f"{first} says 0.11 mg/L for the same"):
            enter(book, CADMIUM, by="RS")
        enter(book, CADMIUM, by="RS", accept="two permits")
        assert "two permits" in book.head().reason


def test_limits_that_follow_each_other_are_not_questioned(ledger_place: str) -> None:
    with world(ledger_place) as book:
        enter(book, replace(CADMIUM, effective_to=date(2026, 6, 30)), by="RS")
        enter(book, replace(CADMIUM, effective_from=date(2026, 7, 1)), by="RS")
        assert [limit.code for limit in listing(book, on=date(2026, 7, 1))] == ["L-0002"]


def test_another_person_verifies(ledger_place: str) -> None:
    with world(ledger_place) as book:
        code = enter(book, CADMIUM, by="RS")
        with pytest.raises(StateRefused, match="entered by RS: another person"):
            verify(book, code, by="RS")
        verify(book, code, by="JT")
        held = show(book, code).value
        assert (held.verified_by, held.verified_on) == ("JT", date(2026, 6, 1))
        with pytest.raises(StateRefused, match="nothing is left to verify"):
            verify(book, code, by="AM")


def test_an_amendment_resets_the_verification(ledger_place: str) -> None:
    with world(ledger_place) as book:
        code = enter(book, CADMIUM, by="RS")
        verify(book, code, by="JT")
        amend(book, code, {"value": Quantity.parse("0.07 mg/L")}, by="JT", reason="misread")
        held = show(book, code).value
        assert (str(held.value), held.entered_by, held.verified_by) == ("0.07 mg/L", "JT", None)
        with pytest.raises(StateRefused):
            verify(book, code, by="JT")


@pytest.mark.parametrize("changes", [{}, {"verified_by": "JT"}, {"value": CADMIUM.value}])
def test_an_empty_or_forged_amendment_is_refused(ledger_place: str, changes: dict[str, object]) -> None:
    with world(ledger_place) as book:
        code = enter(book, CADMIUM, by="RS")
        with pytest.raises(ValueRefused):
            amend(book, code, changes, by="JT", reason="because")


def test_a_retired_limit_keeps_its_verification(ledger_place: str) -> None:
    with world(ledger_place) as book:
        code = enter(book, CADMIUM, by="RS")
        verify(book, code, by="JT")
        retire(book, code, date(2026, 5, 31), by="RS", reason="new permit")
        held = show(book, code).value
        assert (held.effective_to, held.verified_by) == (date(2026, 5, 31), "JT")
        with pytest.raises(StateRefused, match="in force to 2026-05-31 only"):
            retire(book, code, date(2026, 6, 30), by="RS", reason="later")


def test_a_row_of_a_table_is_adopted_with_its_source(ledger_place: str) -> None:
    with world(ledger_place) as book:
        code = adopt(book, ADOPTION, by="RS")
        held = show(book, code).value
        assert book.head().reason == "acknowledged: permit 7, page 3, cites it"
    assert (str(held.value), held.statistic, held.reference) == ("0.11 mg/L", "daily", ADOPTION.key)
    assert held.document.startswith("40 CFR 433.17(a), 2015")
    assert (held.authority, held.entered_by, held.verified_by) == ("Invented Water Board", "RS", None)


@pytest.mark.parametrize("changed", [{"acknowledge": " "}, {"changes": {}}, {"point": "X"}, {"key": "x/y"}])
def test_an_adoption_names_what_it_rests_on(ledger_place: str, changed: dict[str, object]) -> None:
    with world(ledger_place) as book:
        with pytest.raises(EffluentError):
            adopt(book, replace(ADOPTION, **changed), by="RS")  # type: ignore[arg-type]
        assert listing(book) == ()


def test_listing_by_point_and_analyte(ledger_place: str) -> None:
    with world(ledger_place) as book:
        enter(book, CADMIUM, by="RS")
        enter(book, PH, by="RS")
        assert [limit.analyte for limit in listing(book, point="SEW", analyte="7440-43-9")] == ["cadmium"]
        assert listing(book, point="HAUL") == ()


def test_reference_rows_by_table_and_analyte() -> None:
    found = reference("40CFR433.17", analyte="Cd")
    assert {row.key.rpartition("/")[2] for row in found} == {"daily", "month"}
    assert all(row.source.citation.startswith("40 CFR 433.17") for row in found)
