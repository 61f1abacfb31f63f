"""Each character gets a font that prints it right, or is refused by name."""

import unicodedata

import pytest

from effluent.errors import NotPrintable
from effluent.paper.font import BOLD, REGULAR, clean, runs


def test_latin_text_stays_in_one_run():
    assert runs("Łódź & Gdańsk") == ((REGULAR, "Łódź & Gdańsk"),)


def test_bold_text_uses_the_bold_font():
    assert runs("within", bold=True) == ((BOLD, "within"),)


def test_characters_missing_from_the_first_font_fall_back_one_by_one():
    assert runs("a 漢 ≥") == (
        (REGULAR, "a "),
        ("EffluentHan", "漢"),
        (REGULAR, " "),
        ("EffluentSymbols", "≥"),
    )


@pytest.mark.parametrize("text", ["Ελλάς", "Москва", "Việt Nam", "İstanbul ığş", "東京ひらカタ", "− → ² µ"])
def test_scripts_without_shaping_are_printable(text):
    assert "".join(piece for _, piece in runs(text)) == text


@pytest.mark.parametrize(
    "character",
    [
        "א",  # Hebrew, right to left
        "ع",  # Arabic, joined
        "क",  # Devanagari: the first font has it, but it needs shaping
        "ก",  # Thai, stacked
        "\u1112",  # Hangul part, has to be composed
        "한",  # Hangul, in no shipped font
        "\u0301",  # combining mark on its own
        "\u202e",  # direction override
        "\u0007",  # control character
        "\U0001f6e2",  # in no shipped font
    ],
)
def test_character_that_would_print_wrong_is_refused_by_name(character):
    with pytest.raises(NotPrintable) as caught:
        runs(f"drum {character}")
    assert caught.value.args == (character, f"drum {character}")


def test_clean_composes_accents_and_joins_lines():
    assert clean(unicodedata.normalize("NFD", " Việt\n\tNam\u00a0 ")) == "Việt Nam"
