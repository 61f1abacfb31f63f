from __future__ import annotations

import json
from datetime import UTC, date, datetime
from fractions import Fraction

import pytest

from effluent.cli import show
from effluent.domain import Person, Point, PointKind, Quantity
from effluent.settings import CAUTION


def test_table_lines_up_with_wide_characters() -> None:
    assert show.table(["code", "name"], [["東京", "a"], ["LIS", "two\nlines"], ["x", None]]).split("\n") == [
        "code  name",
        "----  ----------",
        "東京  a",
        "LIS   two\\nlines",
        "x",
    ]


def test_card_leaves_out_what_has_no_value() -> None:
    pairs = [("name", "Ana"), ("role", ""), ("flash point", Quantity("61", "degC")), ("ph", None)]
    assert show.card(pairs).split("\n") == ["name:        Ana", "flash point: 61 degC"]


def test_card_of_nothing_is_empty() -> None:
    assert show.card([]) == ""


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (None, ""),
        (True, "yes"),
        (False, "no"),
        (PointKind.SEWER, "sewer connection"),
        (Quantity("60", "L", "2 %"), "60 L ± 2 %"),
        (datetime(2026, 3, 1, 14, 30, tzinfo=UTC), "2026-03-01 14:30 UTC"),
        (datetime(2026, 3, 1, 14, 30, 5, tzinfo=UTC).replace(tzinfo=None), "2026-03-01 14:30:05"),
        (date(2026, 3, 1), "2026-03-01"),
        (("a", "b\x07"), "a, b\\x07"),
        (Fraction(1, 3), "1/3"),
        (7, "7"),
    ],
)
def test_text_is_one_plain_line(value: object, shown: str) -> None:
    assert show.text(value) == shown


@pytest.mark.parametrize(
    ("number", "shown"),
    [
        (Fraction(0), "0"),
        (Fraction(100), "100"),
        (Fraction(-5, 2), "-2.5"),
        (Fraction(1, 8), "0.125"),
        (Fraction(3785411784, 10**9), "3.785411784"),
        (Fraction(1, 10**30), "0." + "0" * 29 + "1"),
        (Fraction(5, 9), "5/9"),
    ],
)
def test_decimal_loses_nothing(number: Fraction, shown: str) -> None:
    assert show.decimal(number) == shown
    assert Fraction(shown) == number


def test_fraction_is_shown_with_its_first_digits() -> None:
    assert show.with_decimals(Fraction(-5, 9)) == "-5/9 (about -0.555555555556)"
    assert show.with_decimals(Fraction(5, 4)) == "1.25"


def test_screen_ends_with_the_caution(capsys: pytest.CaptureFixture[str]) -> None:
    show.screen("one", "", "two")
    assert capsys.readouterr().out == f"one\n\ntwo\n\n{CAUTION}\n"


def test_document_keeps_the_order_of_keys_and_ends_with_the_caution(
    capsys: pytest.CaptureFixture[str],
) -> None:
    show.document({"z": Fraction(1, 3), "a": Person(code="é\udc80", name="N")})
    out = capsys.readouterr().out
    assert out.isascii()
    assert list(json.loads(out)) == ["z", "a", "caution"]
    assert json.loads(out)["a"] == {"code": "é\udc80", "name": "N", "role": ""}


def test_plain_keeps_exact_values_as_text() -> None:
    point = Point(code="P", site="S", name="n", kind=PointKind.SEWER)
    answer = {
        "point": point,
        "at": datetime(2026, 3, 1, tzinfo=UTC),
        "on": date(2026, 3, 1),
        "q": (Quantity("1", "L"),),
    }
    assert show.plain(answer) == {
        "point": {
            "code": "P",
            "site": "S",
            "name": "n",
            "kind": "sewer connection",
            "authority": "",
            "permit": "",
        },
        "at": "2026-03-01T00:00:00+00:00",
        "on": "2026-03-01",
        "q": ["1 L"],
    }


def test_plain_of_an_unknown_kind_is_an_error() -> None:
    with pytest.raises(TypeError, match="no agreed form"):
        show.plain(object())
