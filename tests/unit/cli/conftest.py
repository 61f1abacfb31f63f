"""A ledger that notes what it was asked, so that these tests see the command line alone."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from types import ModuleType, SimpleNamespace
from typing import Any

import pytest

import effluent.services


class Noted:
    """The calls the command line made, and what it is to be answered."""

    def __init__(self) -> None:
        self.calls: list[tuple[Any, ...]] = []
        self.answers: dict[str, Any] = {}

    @contextmanager
    def open_ledger(self, place: str) -> Iterator[str]:
        self.calls.append(("open", place))
        yield "book"

    def answering(self, name: str) -> Any:
        def call(*arguments: Any, **named: Any) -> Any:
            self.calls.append((name, *arguments, named))
            answer = self.answers.get(name)
            if isinstance(answer, BaseException):
                raise answer
            return answer

        return call


@pytest.fixture
def noted(monkeypatch: pytest.MonkeyPatch) -> Noted:
    noted = Noted()
    wiring = ModuleType("effluent.wiring")
    wiring.open_ledger = noted.open_ledger  # type: ignore[attr-defined]
    monkeypatch.setitem(sys.modules, "effluent.wiring", wiring)
    verbs = {name: noted.answering(name) for name in ("add", "amend", "void", "show", "listing")}
    monkeypatch.setattr(effluent.services, "register", SimpleNamespace(**verbs), raising=False)
    conversion = SimpleNamespace(convert=noted.answering("convert"))
    monkeypatch.setattr(effluent.services, "conversion", conversion, raising=False)
    monkeypatch.setenv("EFFLUENT_LEDGER", "a.ledger")
    monkeypatch.setenv("EFFLUENT_BY", "AM")
    return noted
