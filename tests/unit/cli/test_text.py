from __future__ import annotations

import pytest

from effluent.cli.text import clip, has_hidden, pad, printable, width


@pytest.mark.parametrize(
    ("raw", "shown"),
    [
        ("plain µg/L é 名 🛩", "plain µg/L é 名 🛩"),
        ("\x1b[31mred", "\\x1b[31mred"),
        ("two\nlines\t", "two\\nlines\\t"),
        ("\u202egpj.exe", "\\u202egpj.exe"),
        ("lone \udc80", "lone \\udc80"),
    ],
)
def test_printable_spells_out_what_steers_a_terminal(raw: str, shown: str) -> None:
    assert printable(raw) == shown
    assert has_hidden(raw) == (raw != shown)


def test_clip_keeps_head_tail_and_length() -> None:
    clipped = clip("a" * 10_000_000 + "z")
    assert clipped.startswith("aaa")
    assert clipped.endswith("az")
    assert "(10000001 characters)" in clipped
    assert len(clipped) < 600


def test_clip_leaves_what_can_be_read() -> None:
    assert clip("a" * 1000) == "a" * 1000


# Unicode Standard Annex 11: ideographs and emoji take two columns, combining marks none.
@pytest.mark.parametrize(
    ("text", "columns"), [("drum", 4), ("名", 2), ("e\u0301", 1), ("🛩", 1), ("🛫", 2), ("ﾄ", 1), ("Ａ", 2)]
)
def test_width_counts_columns(text: str, columns: int) -> None:
    assert width(text) == columns
    assert width(pad(text, 6)) == 6
