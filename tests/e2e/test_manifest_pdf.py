"""Manifest papers from a ledger to the page, held against golden texts and page images."""

from __future__ import annotations

from PIL import Image

from effluent.paper.manifest import render
from tests.e2e.golden import GOLDEN, images, papers, text, unlike
from tests.unit.paper.sheets import sheet
from tests.world import world

# Grey steps of 255, averaged over squares of 8.5 mm. A missing word makes 40 and more, a digit 5.
TOLERANCE = 8


def test_papers_read_and_look_like_the_golden_ones(ledger_place: str) -> None:
    with world(ledger_place) as book:
        made = dict(papers(book))
    for name, file in made.items():
        assert text(file).split() == (GOLDEN / f"{name}.txt").read_text(encoding="utf-8").split(), name
        looks = images(file)
        assert len(looks) == len(list(GOLDEN.glob(f"{name}-*.png"))), name
        for number, look in enumerate(looks, 1):
            with Image.open(GOLDEN / f"{name}-{number}.png") as golden:
                assert unlike(look, golden) <= TOLERANCE, (name, number)


def test_missing_words_are_seen() -> None:
    with_words, without = (images(render(sheet(special_handling=words)))[0] for words in ("Keep dry.", ""))
    assert unlike(with_words, with_words) == 0
    assert unlike(with_words, without) > TOLERANCE
