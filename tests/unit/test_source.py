"""The measures of the source count what they say."""

from __future__ import annotations

import ast

import pytest

from tests.docs.source import Function, arguments, code_lines, nesting

COUNTED = '''
def act(self, first, *rest, named=1):
    """Say what it does.

    At length.
    """

    # a remark
    text = """one
    two"""
    return call(
        first,
        text,
    )
'''
ELIFS = "def act(a):\n    if a == 1: pass\n    elif a == 2: pass\n    elif a == 3: pass\n"
DEEP = "def act(a):\n    for b in a:\n        if b:\n            with b: pass\n        else: pass\n"
APART = "def act(a):\n    if a:\n        def inner(b):\n            if b:\n                for c in b: pass\n"


def function(text: str) -> Function:
    node = ast.parse(text).body[0]
    assert isinstance(node, ast.FunctionDef)
    return node


def test_code_lines_leave_out_docstring_remarks_and_blanks() -> None:
    assert code_lines(function(COUNTED)) == 7  # def, two of text, four of return


def test_arguments_leave_out_self() -> None:
    assert arguments(function(COUNTED)) == 2


@pytest.mark.parametrize(("text", "depth"), [(ELIFS, 1), (DEEP, 3), (APART, 1), ("def act(): pass", 0)])
def test_nesting_counts_blocks_inside_blocks(text: str, depth: int) -> None:
    assert nesting(function(text)) == depth
