from __future__ import annotations

import hashlib

import pytest

from effluent.store.digest import Brought, RowDigest, contents_text, entry_digest, read_contents


def rows_digest(*chunks: list[tuple[object, ...]]) -> str:
    digest = RowDigest()
    for chunk in chunks:
        digest.update(chunk)  # type: ignore[arg-type]
    return digest.hexdigest()


def sha256(text: str) -> str:
    return hashlib.sha256(text.encode("ascii")).hexdigest()


@pytest.mark.parametrize(
    ("row", "canonical"),
    [
        ((1, 2, "µg/L"), r'[[1,2,"\u00b5g/L"]]'),
        ((1, 2, None, -3), "[[1,2,null,-3]]"),
        ((1, 2, 110.0, 0.05), "[[1,2,110.0,0.05]]"),
        ((1, 2, 1e16, 1.5e-05, 5e-324), "[[1,2,1e+16,1.5e-05,5e-324]]"),
        ((1, 2, 'a"b\\c\n\t/\x7f'), r'[[1,2,"a\"b\\c\n\t/\u007f"]]'),
        ((1, 2, "\U0001f6e2"), r'[[1,2,"\ud83d\udee2"]]'),
        ((1, 2, ""), '[[1,2,""]]'),
    ],
)
def test_rows_are_digested_in_the_form_that_the_format_states(
    row: tuple[object, ...], canonical: str
) -> None:
    assert rows_digest([row]) == sha256(canonical)


def test_digest_does_not_depend_on_how_rows_arrive() -> None:
    rows = [(n, 1, str(n)) for n in range(1, 8)]
    assert rows_digest(rows) == rows_digest(rows[:3], [], rows[3:4], rows[4:])


def test_digest_of_rows_can_be_asked_for_in_between() -> None:
    digest = RowDigest()
    digest.update([(1, 1)])
    assert digest.hexdigest() == sha256("[[1,1]]")
    digest.update([(2, 1)])
    assert (digest.hexdigest(), digest.count, digest.columns) == (sha256("[[1,1],[2,1]]"), 2, 2)


def test_entry_is_digested_as_the_array_of_its_header() -> None:
    header = (1, "2026-03-01T12:00:00.000000Z", "MS", "add", "", "[]", "0" * 64)
    canonical = '[1,"2026-03-01T12:00:00.000000Z","MS","add","","[]","' + "0" * 64 + '"]'
    assert entry_digest(header) == sha256(canonical)


def test_contents_are_sorted_and_read_back() -> None:
    parts = (Brought("wash", 1, 2, 33, "b" * 64), Brought("record", 4, 2, 4, "a" * 64))
    text = contents_text(parts)
    assert text == f'[["record",4,2,4,"{"a" * 64}"],["wash",1,2,33,"{"b" * 64}"]]'
    assert read_contents(text) == parts[::-1]


@pytest.mark.parametrize("text", ["", "[", "7", "[7]", '[["a",1]]', '[["a","x",1,2,"d"]]', "[" * 100_000])
def test_contents_that_say_nothing_give_no_parts(text: str) -> None:
    assert read_contents(text) == ()


@pytest.mark.parametrize("value", [float("nan"), float("inf"), b"bytes"])
def test_what_no_column_holds_is_not_digested(value: object) -> None:
    with pytest.raises((TypeError, ValueError)):
        rows_digest([(1, 1, value)])
