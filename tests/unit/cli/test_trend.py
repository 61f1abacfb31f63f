from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from datetime import timedelta
from pathlib import Path

import pytest

from effluent.domain import Qualifier
from effluent.services.ledger import open_ledger
from effluent.settings import CAUTION
from effluent.store.ledger import Ledger
from tests.washing import rinse
from tests.world import NOON, NOW, add_result, add_sample

Typed = Callable[..., tuple[int, list[str]]]


@pytest.fixture
def book(tmp_path: Path, typed: Typed) -> Iterator[Ledger]:
    """The ledger that the commands answer from, open."""
    with open_ledger(str(tmp_path / "ledger"), clock=lambda: NOW) as book:
        yield book


def add_washes(book: Ledger, *texts: str, engine: str = "E-100") -> None:
    """Record washes of an engine a day apart, each sampled; ``<5`` is a non-detect."""
    for days, text in enumerate(texts):
        hours = 24 * days
        wash = rinse(book, "10 L", "T-1", hours=hours, engine=engine)
        sample = add_sample(book, wash=wash, started_at=NOON + timedelta(hours=hours))
        qualifier = Qualifier.BELOW if text.startswith("<") else Qualifier.EQUAL
        add_result(book, sample, "cadmium", text.lstrip("<"), "mg/L", qualifier=qualifier, flag="J")


def test_rising_cadmium_is_told_line_by_line(book: Ledger, typed: Typed) -> None:
    add_washes(book, "0.01", "0.02", "0.04", "0.03", "0.05", "0.06")
    status, lines = typed("trend", "Cd", "--engine", "E-100")
    assert status == 0
    assert lines[:6] == [
        "series:       Cadmium, total, engine E-100",
        "direction:    rising",
        "n:            6 days, 0 with a non-detect, 0 values tied",
        "Mann-Kendall: S = 13, Var = 28.3333, Z = 2.254",
        "p:            0.01667, two-sided, exact; called a trend at 0.05 or less",
        "Sen slope:    3.652, mg/L per year (365.25 days)",
    ]
    assert lines[6].startswith("95% interval: ")
    assert lines[8:11] == [
        "date        sample  drawn from   value  unit  result  remarks",
        "----------  ------  -----------  -----  ----  ------  -------",
        "2026-03-02  S-0001  wash W-0001  0.01   mg/L  1       J",
    ]
    assert lines[17].startswith(
        "A question to the maintenance supervisor, not a finding: cadmium in the water"
    )
    assert lines[-1] == CAUTION


def test_mixed_water_is_left_out_by_name(book: Ledger, typed: Typed) -> None:
    add_washes(book, "4", "3", "2", "1")
    rinse(book, "10 L", "T-1", hours=90, engine="E-200")
    mixed = add_sample(book, started_at=NOON + timedelta(hours=91))
    add_result(book, mixed, "cadmium", "9", "mg/L")
    lines = typed("trend", "cadmium", "--engine", "E-100")[1]
    assert lines[1] == "direction:    no trend shown"
    assert lines[15:18] == [
        "date        sample  drawn from     value  unit  result  left out because",
        "----------  ------  -------------  -----  ----  ------  --------------------------------------",
        "2026-03-06  S-0005  container T-1  9      mg/L  5       its water was mixed with that of E-200",
    ]


def test_slope_of_non_detects_has_two_bounds_and_few_days_no_interval(book: Ledger, typed: Typed) -> None:
    add_washes(book, "<0.01", "0.02", "0.03", "0.04")
    lines = typed("trend", "cadmium", "--engine", "E-100")[1]
    assert lines[2] == "n:            4 days, 1 with a non-detect, 0 values tied"
    assert lines[5].startswith("Sen slope:    between 3.652 and ")
    assert lines[5].endswith("as the non-detects may be, mg/L per year (365.25 days)")
    assert lines[6] == "95% interval: without bounds: so few days cannot reach that confidence"


def test_json_holds_test_slope_and_readings(book: Ledger, typed: Typed) -> None:
    add_washes(book, "1", "2", "3", "4")
    answer = json.loads("\n".join(typed("trend", "cadmium", "--engine", "E-100", "--json")[1]))
    assert (answer["engine"], answer["unit"], answer["direction"]) == ("E-100", "mg/L", "no trend shown")
    assert answer["mann_kendall"]["s"] == 6
    assert answer["mann_kendall"]["p"] == pytest.approx(2 / 24)
    assert answer["sen_slope_per_year"] == {
        "low": 365.25,
        "high": 365.25,
        "lower": None,
        "upper": None,
        "confidence": 0.95,
    }
    assert [one["result"]["text"] for one in answer["used"]] == ["1", "2", "3", "4"]
    assert answer["caution"] == CAUTION


@pytest.mark.parametrize(
    ("words", "status", "complaint"),
    [
        (["cadmium"], 2, "name one of --engine, --point and --container"),
        (["cadmium", "--engine", "E-100", "--point", "SEW"], 2, "name one of --engine"),
        (["cadmium", "--point", "SEW"], 2, "a trend needs 4 to 2000 days"),
        (["unobtainium", "--point", "SEW"], 2, "unobtainium"),
        (["cadmium", "--engine", "E-10"], 3, "did you mean E-100"),
        (["cadmium", "--point", "SEW", "--fraction", "half"], 2, "write one of: total"),
    ],
)
def test_what_cannot_be_answered_is_refused(
    typed: Typed, words: list[str], status: int, complaint: str
) -> None:
    found, lines = typed("trend", *words)
    assert found == status
    assert complaint in lines[-1]
