"""Draw a manifest paper."""

from __future__ import annotations

from functools import partial
from io import BytesIO
from typing import Any

from reportlab.lib.pagesizes import A4, LETTER
from reportlab.platypus import BaseDocTemplate, Frame, PageTemplate

from effluent.errors import ValueRefused
from effluent.paper.canvas import PagedCanvas
from effluent.paper.page import MARGIN, PURPOSE, Furniture, state_words, witness
from effluent.paper.section import story
from effluent.paper.sheet import ManifestSheet

__all__ = ["PAPERS", "render"]

PAPERS = {"A4": A4, "Letter": LETTER}


def render(sheet: ManifestSheet, *, paper: str = "A4") -> bytes:
    """Return the paper of one manifest as a PDF file.

    The same sheet gives the same bytes, in any process.

    Parameters
    ----------
    sheet : ManifestSheet
        What the paper says.
    paper : str
        ``"A4"`` or ``"Letter"``.

    Raises
    ------
    NotPrintable
        If a text holds a character that no shipped font prints right.
    ValueRefused
        If the paper size is unknown, the instant has no zone, or the manifest number fills a page head.
    """
    if paper not in PAPERS:
        raise ValueRefused("paper size", paper, f"use one of {', '.join(PAPERS)}")
    if sheet.created_at.tzinfo is None:
        raise ValueRefused("instant", sheet.created_at.isoformat(), "give it with its zone, as UTC")
    furniture = Furniture(sheet, PAPERS[paper])
    if furniture.head_height + furniture.foot_height > furniture.page_height / 3:
        raise ValueRefused("manifest number", sheet.code, "it fills the page head; use a shorter one")
    buffer = BytesIO()
    document = _document(buffer, furniture)
    document.build(story(sheet, furniture.width), canvasmaker=partial(PagedCanvas, furniture=furniture))
    return buffer.getvalue()


def _document(buffer: BytesIO, furniture: Furniture) -> BaseDocTemplate:
    sheet = furniture.sheet
    frame = Frame(
        MARGIN,
        MARGIN + furniture.foot_height,
        furniture.width,
        furniture.page_height - 2 * MARGIN - furniture.head_height - furniture.foot_height,
        leftPadding=0,
        rightPadding=0,
        topPadding=0,
        bottomPadding=0,
    )

    def under(canvas: Any, _document: Any) -> None:
        furniture.draw_under(canvas)

    return BaseDocTemplate(
        buffer,
        pagesize=(furniture.page_width, furniture.page_height),
        pageTemplates=[PageTemplate(id="page", frames=[frame], onPage=under)],
        title=f"Manifest {sheet.code}, {state_words(sheet.state)}",
        author=sheet.generator.operator,
        subject=PURPOSE,
        creator="effluent",
        keywords=[witness(sheet)],
        invariant=1,
        pageCompression=1,
    )
