from __future__ import annotations

import json

import pytest

from effluent.__main__ import run
from effluent.settings import CAUTION


def test_answer_is_exact_with_its_factor(capsys: pytest.CaptureFixture[str]) -> None:
    # -40 is the same on both scales: NIST SP 811 (2008), appendix B.8, degree Fahrenheit: (t - 32)/1.8.
    assert run(["convert", "-40", "degF", "degC"]) == 0
    assert capsys.readouterr().out.splitlines() == [
        "given:   -40 degF",
        "answer:  -40 degC",
        "factor:  5/9 (about 0.555555555556)",
        "offset:  -160/9 (about -17.7777777778)",
        "working: -40 degF × 5/9 - 160/9 = -40 degC",
        "",
        CAUTION,
    ]


def test_answer_without_an_offset_shows_none(capsys: pytest.CaptureFixture[str]) -> None:
    # 1 US gallon is 231 cubic inches, 3.785411784 L: NIST Handbook 44, appendix C.
    run(["convert", "1", "gal", "L"])
    assert capsys.readouterr().out.splitlines()[:4] == [
        "given:   1 gal",
        "answer:  3.785411784 L",
        "factor:  3.785411784",
        "working: 1 gal × 3.785411784 = 3.785411784 L",
    ]


def test_json_names_the_density_it_used(capsys: pytest.CaptureFixture[str]) -> None:
    run(["convert", "5", "ppm", "mg/L", "--density", "0.998 kg/L", "--json"])
    answer = json.loads(capsys.readouterr().out)
    assert list(answer) == ["given", "answer", "unit", "factor", "offset", "density", "working", "caution"]
    assert (answer["answer"], answer["unit"], answer["factor"]) == ("4.99", "mg/L", "0.998")
    assert (answer["density"], answer["offset"]) == ("0.998 kg/L", "0")


def test_tiny_number_is_exact(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["convert", "1e-20", "mg/L", "ug/L"]) == 0
    assert f"answer:  0.{'0' * 16}1 ug/L" in capsys.readouterr().out


@pytest.mark.parametrize(
    "arguments",
    [
        ["much", "mg/L", "ug/L"],
        ["", "mg/L", "ug/L"],
        ["nan", "mg/L", "ug/L"],
        ["1e9999", "mg/L", "ug/L"],
        ["1", "parsnip", "ug/L"],
        ["1", "mg/L", ""],
        ["1", "mg/L", "kg"],
        ["1", "ppm", "mg/L"],
        ["1", "ppm", "mg/L", "--density", "0 kg/L"],
        ["1", "ppm", "mg/L", "--density", "thick"],
        ["1", "mg/L\x1b[2J", "ug/L"],
        ["\udc80", "mg/L", "ug/L"],
        ["1" * 10_000_000, "mg/L", "ug/L"],
        ["1", "(" * 99, "ug/L"],
        ["1", "🛫", "ug/L"],
        ["1", "mg/L"],
        ["--densty", "5", "1", "mg/L"],
    ],
    ids=range(17),
)
def test_bad_input_ends_in_one_paragraph(capsys: pytest.CaptureFixture[str], arguments: list[str]) -> None:
    assert run(["convert", *arguments]) == 2
    printed = capsys.readouterr()
    assert printed.out == ""
    assert all(line.isprintable() and len(line) < 1200 for line in printed.err.splitlines())
    assert len(printed.err.splitlines()) <= 4
