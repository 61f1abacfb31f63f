from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from datetime import timedelta
from fractions import Fraction
from pathlib import Path

import pytest

from effluent.calc.noncompliance import Criteria
from effluent.domain import Qualifier, Statistic
from effluent.services.ledger import open_ledger
from effluent.services.noncompliance import Code
from effluent.settings import CAUTION
from effluent.store.ledger import Ledger
from tests.world import NOON, NOW, add_limit, add_result, add_sample

Typed = Callable[..., tuple[int, list[str]]]
LONG_AGO = NOON.replace(year=2024)
HALF = ("--point", "SEW", "--since", "2024-01-01", "--until", "2024-06-30", "--windows", "fixed halves")


@pytest.fixture
def book(tmp_path: Path, typed: Typed) -> Iterator[Ledger]:
    """The ledger that the commands answer from, open, with a limit for cadmium."""
    with open_ledger(str(tmp_path / "ledger"), clock=lambda: NOW) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        yield book


def add_readings(book: Ledger, *texts: str, analyte: str = "cadmium") -> None:
    """Record samples of SEW a day apart; ``<5`` is a non-detect."""
    for days, text in enumerate(texts):
        sample = add_sample(book, point="SEW", started_at=LONG_AGO + timedelta(days=days))
        qualifier = Qualifier.BELOW if text.startswith("<") else Qualifier.EQUAL
        add_result(book, sample, analyte, text.lstrip("<"), "mg/L", qualifier=qualifier)


def test_counts_are_told_line_by_line(book: Ledger, typed: Typed) -> None:
    add_readings(book, "0.12", "0.14", "0.10")
    status, lines = typed("noncompliance", *HALF)
    assert status == 1
    assert lines[:5] == [
        "point:       SEW, separator outlet",
        "windows:     fixed halves that end from 2024-01-01 to 2024-06-30",
        "(A) chronic: 66 % or more beyond the limit",
        "(B) review:  33 % or more at or beyond the limit x 1.2 (1.4 for BOD, TSS, oil and grease; "
        "not for pH, temperature, minima)",
        "",
    ]
    assert [" ".join(line.split()) for line in (lines[5], lines[7])] == [
        "window analyte fraction limits n exceeding share (A) at factor share (B) finding",
        "2024-01-01 to 2024-06-30 cadmium total L-0001 3 2 66 2/3 % met 1 33 1/3 % met MET",
    ]
    assert "40 CFR 403.8(f)(2)(viii)(A) and (B), 2015 annual edition" in lines[9]
    assert "The authority decides" in lines[9]
    assert lines[-1] == CAUTION


def test_own_figures_are_printed_as_such(book: Ledger, typed: Typed) -> None:
    add_readings(book, "0.12", "0.10")
    words = ["--chronic-share", "70%", "--exceeding", "reaching", "--review-share", "40", "--factor", "1.15"]
    status, lines = typed("noncompliance", *HALF, *words)
    assert status == 0
    assert lines[2] == "(A) chronic: 70 % or more at or beyond the limit [your own figures]"
    assert lines[3].startswith("(B) review:  40 % or more at or beyond the limit x 1.15 (1.4 for BOD")
    assert lines[3].endswith(" [your own figures]")
    assert lines[7].endswith("2  1          50 %   not met  0          0 %    not met  not met")


def test_bounds_astride_cannot_be_told(book: Ledger, typed: Typed) -> None:
    add_readings(book, "<0.2")
    status, lines = typed("noncompliance", *HALF)
    assert status == 1
    share = "0 to 1 0 % to 100 % cannot be told"
    assert " ".join(lines[7].split()).endswith(f"L-0001 1 {share} {share} CANNOT BE TOLD")


def test_what_is_not_counted_is_named(book: Ledger, typed: Typed) -> None:
    add_limit(book, "SEW", "zinc", "2 mg/L", statistic=Statistic.MONTH)
    add_readings(book, "1", "2", analyte="zinc")
    status, lines = typed("noncompliance", *HALF)
    assert status == 1
    assert lines[5:10] == [
        "nothing to count: no result meets an instantaneous or daily limit in force",
        "",
        "no measurement: cadmium, total, from 2024-01-01 to 2024-06-30; in force: L-0001; whether one "
        "was due is another question",
        "not counted: 2 results of zinc, for whose fraction and unit no instantaneous or daily limit was "
        "in force",
        "not judged here: L-0002, zinc, calendar month average",
    ]


def test_window_that_can_still_change_says_so(book: Ledger, typed: Typed) -> None:
    add_readings(book, "0.1")
    words = ["--since", "2999-01-01", "--until", "2999-12-31"]
    assert "2999" in typed("noncompliance", "--point", "SEW", *words)[1][1]
    far = add_sample(book, point="SEW", started_at=NOON.replace(year=2998, month=12))
    add_result(book, far, "cadmium", "0.1", "mg/L")
    lines = typed("noncompliance", "--point", "SEW", *words)[1]
    assert lines[7].startswith("2998-10-01 to 2999-03-31 (not over)  cadmium")


def test_json_holds_counts_code_and_gaps(book: Ledger, typed: Typed) -> None:
    add_readings(book, "0.12", "0.14", "0.10")
    status, lines = typed("noncompliance", *HALF, "--json")
    answer = json.loads("\n".join(lines))
    (one,) = answer["judged"]
    assert (status, one["finding"], one["limits"], one["factor"]) == (1, "met", ["L-0001"], "1.2")
    assert one["chronic"] == {
        "count": 3,
        "surely": 2,
        "possibly": 2,
        "percent_needed": 66,
        "finding": "met",
    }
    assert answer["code"]["windows"] == "fixed halves"
    assert (answer["clear"], answer["unread"], answer["caution"]) == (False, [], CAUTION)


def test_defaults_are_the_federal_figures(book: Ledger, typed: Typed) -> None:
    """40 CFR 403.8(f)(2)(viii)(A) and (B): 66 % exceed; 33 % equal or exceed 1.2 or 1.4 times."""
    add_readings(book, "0.1")
    code = json.loads("\n".join(typed("noncompliance", *HALF, "--json")[1]))["code"]
    assert code == {
        "windows": "fixed halves",
        "chronic_share": 66,
        "exceeding": "beyond",
        "review_share": 33,
        "reviewing": "reaching",
        "factor": "1.2",
        "factor_oils": "1.4",
    }
    assert (Criteria().technical_factor, Code().factor_oils) == (Fraction("1.2"), Fraction("1.4"))


@pytest.mark.parametrize(
    ("words", "status", "complaint"),
    [
        (["--chronic-share", "0%"], 2, "no whole percentage from 1% to 100%"),
        (["--review-share", "33.5"], 2, "no whole percentage"),
        (["--factor", "0.9"], 2, "below 1"),
        (["--factor-oils", "much"], 2, "write digits"),
        (["--windows", "months"], 2, "write one of: rolling quarters, fixed halves"),
        (["--until", "2024-01-31"], 2, "no window ends in it"),
        (["--until", "2023-12-31"], 2, "it ends before it begins"),
        (["--point", "SEV"], 3, "did you mean SEW"),
    ],
)
def test_what_cannot_be_answered_is_refused(
    typed: Typed, words: list[str], status: int, complaint: str
) -> None:
    found, lines = typed("noncompliance", *HALF, *words)
    assert found == status
    assert complaint in lines[-1]
