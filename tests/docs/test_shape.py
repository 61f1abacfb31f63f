"""The source keeps to the sizes that the contributors' guide names."""

from __future__ import annotations

import ast
import re
import statistics
from collections.abc import Iterator
from pathlib import Path

import pytest

import effluent.errors
from tests.docs.source import PACKAGE, arguments, code_lines, functions, modules, nesting, tracked, tree

FUNCTION_P95 = 30
FUNCTION_MOST = 45
MODULE_MOST = 400
ARGUMENTS_MOST = 6
NESTING_MOST = 4
EXCEPTIONS_PER_KLOC = 5
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml"} | {
    "effluent",
    "migrations",
    "tests",
    "fixtures",
    "docs",
}
# An entry point offers no names.
WITHOUT_ALL = {"effluent", "effluent.__main__"}


def too_large(measure: dict[str, int], most: int) -> list[str]:
    return [f"{where}: {size}" for where, size in measure.items() if size > most]


def test_functions_stay_short() -> None:
    lines = {where: code_lines(function) for where, function in functions()}
    assert too_large(lines, FUNCTION_MOST) == []
    p95 = statistics.quantiles(lines.values(), n=20)[-1]
    assert p95 <= FUNCTION_P95, too_large(lines, FUNCTION_P95)


def test_modules_stay_short() -> None:
    lines = {name: len(path.read_text(encoding="utf-8").splitlines()) for name, path in modules().items()}
    assert too_large(lines, MODULE_MOST) == []


def test_functions_take_few_arguments() -> None:
    assert too_large({where: arguments(f) for where, f in functions()}, ARGUMENTS_MOST) == []


def test_no_bare_true_or_false_is_given_by_position() -> None:
    positional = [(where, arg) for where, f in functions() for arg in [*f.args.posonlyargs, *f.args.args]]
    assert [
        where for where, arg in positional if arg.annotation and ast.unparse(arg.annotation) == "bool"
    ] == []


def test_blocks_nest_little() -> None:
    assert too_large({where: nesting(f) for where, f in functions()}, NESTING_MOST) == []


def public_definitions(body: list[ast.stmt]) -> Iterator[tuple[str, ast.FunctionDef | ast.ClassDef]]:
    """Name each public class, function and method."""
    for node in body:
        if not isinstance(node, ast.FunctionDef | ast.ClassDef) or node.name.startswith("_"):
            continue
        yield node.name, node
        if isinstance(node, ast.ClassDef):
            yield from ((f"{node.name}.{name}", inner) for name, inner in public_definitions(node.body))


@pytest.mark.parametrize("module", modules())
def test_public_names_are_documented(module: str) -> None:
    source = tree(modules()[module])
    bare = [name for name, node in public_definitions(source.body) if not ast.get_docstring(node)]
    assert ast.get_docstring(source), f"{module} has no docstring"
    assert bare == []


@pytest.mark.parametrize("module", sorted(set(modules()) - WITHOUT_ALL))
def test_module_says_what_is_public(module: str) -> None:
    path = modules()[module]
    assigned = [
        node
        for node in tree(path).body
        if isinstance(node, ast.Assign | ast.AnnAssign) and "__all__" in ast.unparse(node).split("=")[0]
    ]
    is_bare_package = path.name == "__init__.py" and len(tree(path).body) == 1
    assert assigned or is_bare_package


@pytest.mark.parametrize("exception", [r"#\s*type:\s*ignore", r"#\s*noqa"])
def test_few_lines_are_exempt_and_each_says_from_what(exception: str) -> None:
    source = "\n".join(path.read_text(encoding="utf-8") for path in modules().values())
    found = re.findall(rf"{exception}.*", source)
    assert [text for text in found if not re.match(rf"{exception}(\[|:)", text)] == []
    assert len(found) * 1000 <= EXCEPTIONS_PER_KLOC * len(source.splitlines())


def test_top_level_holds_nothing_else() -> None:
    top = {name.split("/")[0] for name in tracked()}
    assert {name for name in top if not name.startswith(".")} <= TOP_LEVEL


def test_package_is_what_is_measured() -> None:
    assert Path(effluent.errors.__file__).parent == PACKAGE
    assert len(modules()) >= 20
