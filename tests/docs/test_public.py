"""What a module calls public is there, once, and in an order."""

from __future__ import annotations

import importlib
import inspect
import itertools

import pytest

from tests.docs.source import modules

OFFERING = [name for name in modules() if name != "effluent.__main__"]


def offered(module: str) -> list[str]:
    return list(getattr(importlib.import_module(module), "__all__", []))


@pytest.mark.parametrize("module", OFFERING)
def test_offered_names_exist(module: str) -> None:
    names = offered(module)
    assert [name for name in names if not hasattr(importlib.import_module(module), name)] == []
    assert len(names) == len(set(names))


def defined(module: str) -> set[str]:
    """Return the public classes and functions that this module itself defines."""
    members = vars(importlib.import_module(module)).items()
    return {
        name
        for name, value in members
        if not name.startswith("_")
        and (inspect.isclass(value) or inspect.isfunction(value))
        and value.__module__ == module
    }


@pytest.mark.parametrize("module", OFFERING)
def test_defined_names_are_offered_or_private(module: str) -> None:
    assert defined(module) - set(offered(module)) == set()


def kind(name: str) -> str:
    return "constant" if name.isupper() else "class" if name[0].isupper() else "function"


def is_in_order(names: list[str]) -> bool:
    """Tell whether all are sorted, or classes, constants and functions stand together, each sorted."""
    groups = [(of, list(group)) for of, group in itertools.groupby(names, key=kind)]
    together = len(groups) == len({of for of, _ in groups})
    return names == sorted(names) or (together and all(group == sorted(group) for _, group in groups))


@pytest.mark.parametrize("module", OFFERING)
def test_offered_names_are_in_order(module: str) -> None:
    assert is_in_order(offered(module))


@pytest.mark.parametrize("names", [["b", "a"], ["a", "B", "c"], ["B", "A", "c"]])
def test_disorder_is_seen(names: list[str]) -> None:
    assert not is_in_order(names)
