"""The project's own source, as the checks of its shape read it."""

from __future__ import annotations

import ast
import subprocess
from collections.abc import Iterator
from functools import cache
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
PACKAGE = ROOT / "effluent"

Function = ast.FunctionDef | ast.AsyncFunctionDef
BLOCKS = (ast.If, ast.For, ast.While, ast.With, ast.Try, ast.Match)


@cache
def modules() -> dict[str, Path]:
    """Each module of the package by its dotted name."""
    paths = sorted(PACKAGE.rglob("*.py"))
    return {
        ".".join(path.relative_to(ROOT).with_suffix("").parts).removesuffix(".__init__"): path
        for path in paths
    }


@cache
def tree(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


def functions() -> Iterator[tuple[str, Function]]:
    """Each function and method of the package, with where it stands."""
    for name, path in modules().items():
        for node in ast.walk(tree(path)):
            if isinstance(node, Function):
                yield f"{name}:{node.lineno} {node.name}", node


def code_lines(function: Function) -> int:
    """Lines that hold code, from the `def` on: no blank line, comment or docstring."""
    body = function.body[1:] if ast.get_docstring(function) is not None else function.body
    heads = [function.args, *([function.returns] if function.returns else [])]
    lines = {function.lineno}
    for node in (n for part in [*heads, *body] for n in ast.walk(part)):
        if isinstance(node, ast.expr | ast.stmt | ast.arg | ast.keyword | ast.ExceptHandler | ast.alias):
            last = node.end_lineno or node.lineno
            text = isinstance(node, ast.Constant | ast.JoinedStr)
            lines |= set(range(node.lineno, last + 1)) if text else {node.lineno, last}
    return len(lines)


def arguments(function: Function) -> int:
    given = function.args
    named = [a.arg for a in [*given.posonlyargs, *given.args, *given.kwonlyargs]]
    return len([name for name in named if name not in ("self", "cls")])


def nesting(node: ast.AST, *, is_elif: bool = False) -> int:
    """How deep blocks stand inside each other; an `elif` is as deep as its `if`."""
    inner = max((_child_nesting(node, child) for child in ast.iter_child_nodes(node)), default=0)
    return inner + (isinstance(node, BLOCKS) and not is_elif)


def _child_nesting(node: ast.AST, child: ast.AST) -> int:
    if isinstance(child, Function | ast.ClassDef | ast.Lambda):
        return 0  # counted on its own
    is_elif = isinstance(node, ast.If) and node.orelse == [child] and isinstance(child, ast.If)
    return nesting(child, is_elif=is_elif)


@cache
def tracked(*under: str) -> tuple[str, ...]:
    """Return the files that git holds, as paths from the top."""
    command = ["git", "-C", str(ROOT), "ls-files", "-z", "--", *under]
    listed = subprocess.run(command, capture_output=True, check=True, text=True).stdout
    return tuple(name for name in listed.split("\0") if name)
