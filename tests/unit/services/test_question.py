from __future__ import annotations

import pytest

from effluent.errors import Questioned
from effluent.services.question import answer, plainly


class Noting:
    def __init__(self) -> None:
        self.said: list[str] = []

    def explain(self, text: str) -> None:
        self.said.append(text)


def test_nothing_asked_needs_no_answer() -> None:
    writing = Noting()
    answer(writing, [], accept="")  # type: ignore[arg-type]
    answer(writing, [], accept="because")  # type: ignore[arg-type]
    assert writing.said == []


@pytest.mark.parametrize("accept", ["", "  "])
def test_questions_without_answer_are_raised_together(accept: str) -> None:
    with pytest.raises(Questioned) as refused:
        answer(Noting(), ["rain?", "twice?"], accept=accept)  # type: ignore[arg-type]
    assert refused.value.questions == ("rain?", "twice?")


def test_entry_keeps_answer_and_questions() -> None:
    writing = Noting()
    answer(writing, ["rain?", "twice?"], accept=" it rained ")  # type: ignore[arg-type]
    assert writing.said == ["accepted: it rained (questioned: rain?; twice?)"]


@pytest.mark.parametrize(
    ("kept", "told"),
    [
        ("wrong works", "wrong works"),
        ("wrong works; accepted: brought back (questioned: is it?)", "wrong works; brought back"),
    ],
)
def test_reason_is_told_without_the_questions(kept: str, told: str) -> None:
    assert plainly(kept) == told
