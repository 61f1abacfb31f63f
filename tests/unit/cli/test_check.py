from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path

import pytest

from effluent.__main__ import run
from effluent.domain import Qualifier, Quantity, Statistic
from effluent.settings import CAUTION
from effluent.store.ledger import Ledger
from tests.shipping import fill
from tests.world import add_limit, add_result, add_sample, world


@pytest.fixture
def book(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Ledger]:
    """An open ledger, which the commands find by the environment."""
    monkeypatch.setenv("EFFLUENT_LEDGER", str(tmp_path / "a.ledger"))
    with world(str(tmp_path / "a.ledger")) as book:
        yield book


@pytest.mark.parametrize(
    ("text", "word", "status"),
    [("0.05", "within", 0), ("0.10", "near", 0), ("0.12", "OVER", 1)],
)
def test_the_word_and_the_exit_status(
    book: Ledger, capsys: pytest.CaptureFixture[str], text: str, word: str, status: int
) -> None:
    add_result(book, add_sample(book), "cadmium", text, "mg/L")
    add_limit(book, "SEW", "cadmium", "0.11 mg/L", action_level=Quantity.parse("0.1 mg/L"))
    assert run(["check"]) == status
    said = capsys.readouterr().out
    assert said.splitlines()[2].startswith(word)
    assert "1 verdict: " in said
    assert f"1 {word}" in said
    assert said.endswith(f"{CAUTION}\n")


def test_a_non_detect_above_the_limit_is_undetermined(
    book: Ledger, capsys: pytest.CaptureFixture[str]
) -> None:
    add_result(book, add_sample(book), "cadmium", "0.2", "mg/L", qualifier=Qualifier.BELOW)
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    assert run(["check", "--container", "T-1", "--against", "SEW"]) == 1
    assert capsys.readouterr().out.splitlines()[2].startswith("UNDETERMINED")


def test_nothing_to_judge_says_so(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    sample = add_sample(book)
    unread = add_limit(book, "SEW", "lead", "0.4 mg/L")
    month = add_limit(book, "SEW", "zinc", "2 mg/L", statistic=Statistic.MONTH)
    mass = add_limit(book, "SEW", "zinc", "2 kg/d", statistic=Statistic.MASS_DAY)
    assert run(["check", "--sample", sample]) == 1
    said = capsys.readouterr().out.splitlines()
    assert said[0] == "nothing to judge: no reading meets a limit in force"
    assert f"no reading: container T-1: {unread} at SEW: lead, total, maximum 0.4 mg/L, instantaneous" in said
    assert any(line.startswith(f"not computed by this version: {mass}") for line in said)
    assert any(line.startswith(f"no average: caught water: {month} at SEW: zinc, total") for line in said)
    assert f"no verdict on sample {sample}" in said


def test_the_working_is_line_by_line(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    add_result(book, add_sample(book), "cadmium", "120", "ug/L")
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    run(["check", "--working"])
    said = capsys.readouterr().out.splitlines()
    assert "  conversion: 120 ug/L x 0.001 = 0.12 mg/L" in said
    assert "  comparison: 0.12 > 0.11 mg/L is true" in said


def test_each_working_is_headed_by_what_it_is_of(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    for text in ("0.12", "0.02"):
        add_result(book, add_sample(book), "cadmium", text, "mg/L")
    code = add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    run(["check", "--working"])
    said = capsys.readouterr().out
    assert f"\n\nworking of OVER: S-0001, cadmium against {code} at SEW\n  reading: " in said
    assert f"\n\nworking of within: S-0002, cadmium against {code} at SEW\n  reading: " in said


def test_container_of_several_samples_is_decided_by_the_strictest(
    book: Ledger, capsys: pytest.CaptureFixture[str]
) -> None:
    for text in ("0.02", "0.12", "0.03"):
        add_result(book, add_sample(book), "cadmium", text, "mg/L")
    code = add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    decided = f"OVER, decided by sample S-0002, cadmium, {code} at SEW"
    run(["check"])
    assert f"container T-1, over all its samples: {decided}\n" in capsys.readouterr().out
    run(["check", "--json"])
    told = json.loads(capsys.readouterr().out)["by_container"]
    assert told == {"T-1": {"outcome": "over", "samples": ["S-0002"], "limit": code}}


def test_an_average_shows_its_sums_and_its_verdict(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    for text in ("0.05", "0.09"):
        add_result(book, add_sample(book, point="SEW"), "cadmium", text, "mg/L")
    add_limit(book, "SEW", "cadmium", "0.07 mg/L", statistic=Statistic.MONTH)
    assert run(["check", "--working"]) == 0
    said = capsys.readouterr().out
    assert "  daily value of 2026-03-02: (0.05 + 0.09) / 2 = 0.07 mg/L\n" in said
    assert said.splitlines()[2].startswith("within   0.0%    S-0001, S-0002  2026-03-31")


def test_json_names_the_average_that_gave_none(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    add_sample(book)
    code = add_limit(book, "SEW", "zinc", "2 mg/L", statistic=Statistic.YEAR)
    run(["check", "--json"])
    (one,) = json.loads(capsys.readouterr().out)["unaveraged"]
    assert (one["water"], one["limit"]["code"], bool(one["why"])) == ("caught water", code, True)


def test_json_holds_verdicts_gaps_and_caution(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    sample = add_sample(book)
    add_result(book, sample, "cadmium", "0.1", "mg/L")
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    unread = add_limit(book, "SEW", "lead", "0.4 mg/L")
    assert run(["check", "--json", "--as-of", str(book.head().sequence)]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["strictest"] == {sample: {"outcome": "within", "limit": "L-0001"}}
    assert answer["verdicts"][0]["working"]
    assert answer["without_reading"][0]["limit"]["code"] == unread
    assert answer["caution"] == CAUTION


def test_an_unknown_name_exits_3(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["check", "--point", "SEV"]) == 3
    assert "did you mean SEW?" in capsys.readouterr().err


def test_water_that_no_sample_speaks_for_is_no_pass(book: Ledger, capsys: pytest.CaptureFixture[str]) -> None:
    sample = add_sample(book)
    add_result(book, sample, "cadmium", "0.01", "mg/L")
    add_limit(book, "SEW", "cadmium", "0.11 mg/L")
    assert run(["check", "--container", "T-1"]) == 0
    fill(book, "T-1", hours=1)
    capsys.readouterr()
    assert run(["check", "--container", "T-1"]) == 1
    assert "NOT SAMPLED: container T-1: water went in after its last sample" in capsys.readouterr().out
    assert run(["check", "--sample", sample]) == 0
