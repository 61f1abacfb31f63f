"""A ledger that notes what it was asked, so that tests see the command line alone; and a real one."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from types import ModuleType, SimpleNamespace
from typing import Any

import pytest

import effluent.services
from effluent.__main__ import run
from tests.washing import add_station
from tests.world import world


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


@pytest.fixture
def typed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> Callable[..., tuple[int, list[str]]]:
    """Type a command on the invented ledger; get the exit status and the lines of answer or complaint."""
    monkeypatch.setenv("EFFLUENT_LEDGER", str(tmp_path / "ledger"))
    monkeypatch.setenv("EFFLUENT_BY", "AM")
    with world(str(tmp_path / "ledger")) as book:
        add_station(book)

    def type_in(*arguments: str) -> tuple[int, list[str]]:
        status = run(arguments)
        answer = capsys.readouterr()
        return status, (answer.out or answer.err).splitlines()

    return type_in
