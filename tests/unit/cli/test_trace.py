"""The command that walks the chain, on a real ledger."""

from __future__ import annotations

import json
from collections.abc import Callable

import pytest

from effluent.services.trace import NOUNS
from effluent.settings import CAUTION

Typed = Callable[..., tuple[int, list[str]]]


@pytest.fixture
def chain(typed: Typed) -> Typed:
    """A wash of two engines' water that met in one tote, and a sample of it."""
    for engine, drum in (("E-100", "D-1"), ("E-200", "D-2")):
        typed(
            *("wash", "record", "--kind", "desal", "--mode", "motoring", "--engine", engine, "--site", "LIS"),
            *("--performed-at", "2026-05-02T23:30Z", "--performed-by", "AM", "--rinse-water", "60 L"),
            *("--caught", "48 L", "--caught-by", "meter", "--into", drum),
        )
        typed("container", "transfer", drum, "T-1", "--volume", "40 L", "--at", "2026-05-03T08:00")
    typed(
        *("sample", "take", "--container", "T-1", "--method", "grab", "--taken-by", "RS"),
        *("--started-at", "2026-05-03T09:00"),
    )
    return typed


NOTHING = "no verdict: no results, or no limit in force for them"


def test_trace_of_an_engine_goes_down_to_the_verdict(chain: Typed) -> None:
    assert chain("trace", "engine", "E-100") == (
        0,
        [
            "engine E-100: Turbofan A (invented)",
            "",
            "came from: nothing recorded",
            "",
            "went to:",
            "  wash W-0001: desalination wash, 2026-05-03, caught 48 L",
            "    container D-1: drum at LIS",
            "      container T-1: tote at LIS",
            "        sample S-0001: grab, 2026-05-03",
            f"          verdict on sample S-0001: {NOTHING}",
            "",
            CAUTION,
        ],
    )


def test_trace_of_a_sample_goes_back_to_every_nozzle(chain: Typed) -> None:
    assert chain("trace", "sample", "S-0001")[1][2:10] == [
        "came from:",
        "  container T-1: tote at LIS",
        "    container D-1: drum at LIS",
        "      wash W-0001: desalination wash, 2026-05-03, caught 48 L",
        "        engine E-100: Turbofan A (invented)",
        "    container D-2: drum at LIS",
        "      wash W-0002: desalination wash, 2026-05-03, caught 48 L",
        "        engine E-200: Turboprop B (invented)",
    ]


def test_trace_as_json_answers_as_of(chain: Typed) -> None:
    sampled = chain("ledger", "history")[1][-3].split()[0]
    answer = json.loads(
        "\n".join(chain("trace", "container", "T-1", "--json", "--as-of", str(int(sampled) - 1))[1])
    )
    assert [link["code"] for link in answer["back"]] == ["D-1", "D-2"]
    assert answer["forth"] == []
    assert list(answer["start"]) == ["noun", "code", "said", "further", "above"]


@pytest.mark.parametrize(
    ("noun", "code", "status", "complaint"),
    [
        ("verdict", "S-0001", 2, "trace from one of: engine, cleaner, wash"),
        ("engine", "E-10", 3, "did you mean E-100"),
        ("wash", "\x07", 2, "control or unreadable"),
    ],
)
def test_wrong_start_is_refused_in_one_paragraph(
    typed: Typed, noun: str, code: str, status: int, complaint: str
) -> None:
    found, lines = typed("trace", noun, code)
    assert found == status
    assert complaint in lines[-1]


def test_help_names_every_noun(typed: Typed) -> None:
    words = " ".join(" ".join(typed("trace", "--help")[1]).split())
    assert f"NOUN is one of {', '.join(NOUNS)}" in words
