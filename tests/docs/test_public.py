"""What a module calls public is there, once, and in an order."""

from __future__ import annotations

import importlib
import inspect

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


@pytest.mark.parametrize("module", OFFERING)
def test_offered_names_are_in_order(module: str) -> None:
    names = offered(module)
    alphabetical = names == sorted(names)
    constants_first = names == sorted(names, key=lambda n: (not n.isupper(), n[0].islower(), n))
    assert alphabetical or constants_first or names == sorted(names, key=str.casefold)
