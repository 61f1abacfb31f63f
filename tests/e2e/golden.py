"""Papers of an invented shipment, and the golden texts and page images they are held against.

``python -m tests.e2e.golden`` writes the golden files anew; look at every page before keeping them.
"""

from __future__ import annotations

import sys
import tempfile
import textwrap
from collections.abc import Iterator
from dataclasses import replace
from datetime import UTC, datetime
from io import BytesIO
from pathlib import Path

import pdfplumber
from PIL import Image, ImageChops

from effluent.paper.manifest import render
from effluent.paper.sheet import ManifestSheet
from effluent.services import manifest as manifests
from effluent.services.sheet import sheet
from effluent.store.ledger import Ledger
from tests.shipping import add_drums, add_parties, fill, line, manifest, ready
from tests.unit.paper.sheets import DIGEST, pages
from tests.world import add_limit, add_result, world

__all__ = ["GOLDEN", "images", "papers", "text", "unlike"]

GOLDEN = Path(__file__).parents[2] / "fixtures" / "manifest"
_DPI = 30
_BLOCK = 10


def papers(book: Ledger) -> Iterator[tuple[str, bytes]]:
    """Make a shipment in a new ledger, and yield its papers by name, in each state it goes through."""
    add_parties(book)
    add_drums(book, "D-20")
    fill(book, "D-20", "160")
    draft = manifests.draft(book, manifest(line("D-20"), carriers=()), by="AM")
    yield "draft-A4", paper(book, draft, "A4")
    code = shipment(book)
    yield "issued-A4", paper(book, code, "A4")
    yield "issued-Letter", paper(book, code, "Letter")
    manifests.void(book, code, by="AM", reason="wrong works named")
    yield "void-Letter", paper(book, code, "Letter")


def shipment(book: Ledger) -> str:
    """Issue a manifest of six lines and twelve drums, one of them over a limit that nobody verified."""
    drums = [f"D-{number}" for number in range(1, 13)]
    ready(book, *drums)
    add_limit(book, "SEW", "lead", "0.5 mg/L", verified_by=None, verified_on=None)
    analysed = {"laboratory": "Invented Laboratory", "analysed_at": datetime(2026, 3, 9, 10, tzinfo=UTC)}
    add_result(book, "S-0002", "lead", "0.9", "mg/L", flag="J", **analysed)
    lines = [
        line(
            drum,
            description=f"Invented wash water, group {place // 2 + 1}, liquid, not regulated here",
            waste_codes="D006 D008" if place < 2 else "",
        )
        for place, drum in enumerate(drums)
    ]
    wanted = manifest(*lines, carriers=("HAUL", "SEA"), special_handling="Keep from freezing.")
    code = manifests.draft(book, wanted, by="AM")
    manifests.issue(book, code, by="AM", accept="the works takes it, letter of 29 May")
    return code


def paper(book: Ledger, code: str, size: str) -> bytes:
    """Print as the service does, with a fixed witness: the ledger's format is held elsewhere."""
    with book.reading() as reading:
        worded: ManifestSheet = sheet(reading, reading.value("manifest", code))
    return render(replace(worded, digest=DIGEST, entry=1), paper=size)


def text(file: bytes) -> str:
    """Return the words of every page, wrapped for reading."""
    return "\n\n".join(textwrap.fill(page, 100, break_on_hyphens=False) for page in pages(file)) + "\n"


def images(file: bytes) -> list[Image.Image]:
    """Return small grey images of the pages."""
    with pdfplumber.open(BytesIO(file)) as document:
        return [page.to_image(resolution=_DPI).original.convert("L") for page in document.pages]


def unlike(one: Image.Image, other: Image.Image) -> int:
    """Return by how many of 255 grey steps two images differ at most, on average over small squares."""
    if one.size != other.size:
        return 255
    small = (one.width // _BLOCK, one.height // _BLOCK)
    return int(ImageChops.difference(one, other).resize(small, Image.Resampling.BOX).getextrema()[1])


def main() -> int:
    with tempfile.TemporaryDirectory() as folder, world(str(Path(folder) / "ledger")) as book:
        GOLDEN.mkdir(exist_ok=True)
        for name, file in papers(book):
            (GOLDEN / f"{name}.txt").write_text(text(file), encoding="utf-8")
            for number, image in enumerate(images(file), 1):
                image.save(GOLDEN / f"{name}-{number}.png", optimize=True)
    return 0


if __name__ == "__main__":
    sys.exit(main())
