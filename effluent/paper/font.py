"""Which shipped font prints which character."""

from __future__ import annotations

import unicodedata
from functools import cache, lru_cache
from itertools import groupby
from pathlib import Path

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

from effluent.errors import NotPrintable

__all__ = ["BOLD", "REGULAR", "clean", "runs"]

REGULAR = "EffluentSans"
BOLD = "EffluentSansBold"
_FALLBACKS = ("EffluentSymbols", "EffluentHan")
_FOLDER = Path(__file__).parent / "fonts"
_FILES = {
    REGULAR: "NotoSans-Regular.ttf",
    BOLD: "NotoSans-Bold.ttf",
    "EffluentSymbols": "DejaVuSans.ttf",
    "EffluentHan": "DroidSansFallbackFull.ttf",
}
# Scripts whose letters join, stack or reorder; drawn letter by letter they would be wrong.
_SHAPED = (
    (0x0590, 0x08FF),
    (0x0900, 0x0E3E),
    (0x0E40, 0x109F),
    (0x1100, 0x11FF),
    (0x1700, 0x1AFF),
    (0x1B00, 0x1C7F),
    (0xA800, 0xAAFF),
    (0xFB1D, 0xFDFF),
    (0xFE70, 0xFEFF),
)


@cache
def _load(name: str) -> frozenset[str]:
    """Register a font once per process and return the characters it prints right."""
    font = TTFont(name, str(_FOLDER / _FILES[name]), shapable=False, asciiReadable=False)
    pdfmetrics.registerFont(font)
    return frozenset(map(chr, font.face.charToGlyph))


@cache
def _stands_alone(character: str) -> bool:
    """Tell whether a letter looks the same whatever its neighbours are."""
    if unicodedata.category(character)[0] in "MC" or unicodedata.bidirectional(character) in (
        "R",
        "AL",
        "AN",
    ):
        return False
    return not any(low <= ord(character) <= high for low, high in _SHAPED)


@cache
def _font_of(character: str, name: str) -> str | None:
    if not _stands_alone(character):
        return None
    return next((font for font in (name, *_FALLBACKS) if character in _load(font)), None)


def clean(text: str) -> str:
    """Return composed text on one line: canonical composition, each run of white space one space."""
    return " ".join(unicodedata.normalize("NFC", text).split())


@lru_cache(maxsize=4096)
def runs(text: str, *, bold: bool = False) -> tuple[tuple[str, str], ...]:
    """Split text into (font name, piece) so that every character has a glyph.

    Raises
    ------
    NotPrintable
        If no shipped font has the character, or its script needs shaping or runs right to left.
    """
    name = BOLD if bold else REGULAR
    _load(name)  # a paragraph names its font even where every piece falls back
    fonts = []
    for character in text:
        font = _font_of(character, name)
        if font is None:
            raise NotPrintable(character, text)
        fonts.append(font)
    pieces = groupby(zip(fonts, text, strict=True), key=lambda pair: pair[0])
    return tuple((font, "".join(character for _, character in piece)) for font, piece in pieces)
