"""Paragraphs and plain ruled tables, the two things a paper is made of."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TypeAlias

from reportlab.lib.colors import Color, black
from reportlab.lib.styles import ParagraphStyle
from reportlab.platypus import PageBreak, Paragraph, Table, TableStyle
from reportlab.platypus.flowables import Flowable
from reportlab.platypus.paraparser import ParaFrag

from effluent.paper.font import BOLD, REGULAR, clean, runs

__all__ = [
    "Row",
    "BODY",
    "GREY",
    "HEADING",
    "LABEL",
    "NOTE",
    "SMALL",
    "STRONG",
    "field",
    "grid",
    "listing",
    "words",
]

Row: TypeAlias = list[list[Flowable]]

GREY = Color(0.36, 0.36, 0.36)
_HAIR = Color(0.62, 0.62, 0.62)
_SHADE = Color(0.93, 0.93, 0.93)


def _style(name: str, size: float, *, bold: bool = False, color: Color = black) -> ParagraphStyle:
    return ParagraphStyle(
        name,
        fontName=BOLD if bold else REGULAR,
        fontSize=size,
        leading=round(size * 1.22, 2),
        textColor=color,
        allowWidows=1,
        allowOrphans=1,
        splitLongWords=1,
    )


BODY = _style("body", 8)
STRONG = _style("strong", 8, bold=True)
SMALL = _style("small", 7)
LABEL = _style("label", 6, color=GREY)
NOTE = _style("note", 6.5, color=GREY)
HEADING = _style("heading", 8.5, bold=True)

_PLAIN = [
    ("FONTNAME", (0, 0), (-1, -1), REGULAR),  # or every cell would name a font that is not embedded
    ("LEFTPADDING", (0, 0), (-1, -1), 3),
    ("RIGHTPADDING", (0, 0), (-1, -1), 3),
    ("TOPPADDING", (0, 0), (-1, -1), 1.5),
    ("BOTTOMPADDING", (0, 0), (-1, -1), 2.5),
    ("VALIGN", (0, 0), (-1, -1), "TOP"),
]
_GRID = TableStyle([*_PLAIN, ("LINEBELOW", (0, 0), (-1, -1), 0.4, _HAIR)])
_HEADED = TableStyle(
    [
        *_PLAIN,
        ("SPAN", (0, 0), (-1, 0)),
        ("LEFTPADDING", (0, 0), (-1, 0), 0),
        ("LINEBELOW", (0, 0), (-1, 0), 0.8, black),
        ("BACKGROUND", (0, 1), (-1, 1), _SHADE),
        ("LINEBELOW", (0, 1), (-1, -1), 0.4, _HAIR),
    ]
)
_RULED = TableStyle([("LINEBEFORE", (1, 1), (-1, -1), 0.4, _HAIR)], parent=_HEADED)


def words(text: str, style: ParagraphStyle = BODY) -> Paragraph:
    """Return a paragraph of text as it stands; no character of it is markup."""
    bold = style.fontName == BOLD
    pieces = runs(clean(text) or "\N{EM DASH}", bold=bold)
    return Paragraph("", style, frags=[_fragment(font, piece, style) for font, piece in pieces])


def _fragment(font: str, piece: str, style: ParagraphStyle) -> ParaFrag:
    return ParaFrag(
        text=piece,
        fontName=font,
        fontSize=style.fontSize,
        textColor=style.textColor,
        bold=0,
        italic=0,
        rise=0,
        greek=0,
        link=[],
        us_lines=[],
    )


def field(label: str, *values: str) -> list[Flowable]:
    """Return a small label with its values below it."""
    return [words(label, LABEL), *(words(value) for value in values)]


def grid(cells: Sequence[Row], widths: Sequence[float]) -> Table:
    """Return rows of labelled fields."""
    return Table(list(cells), colWidths=list(widths), style=_GRID, splitInRow=1, spaceAfter=5)


class _Listing(Table):
    """A table whose rest always begins a new page, never a second head on the same one."""

    def split(self, availWidth: float, availHeight: float) -> list[Flowable]:  # noqa: N803 - the library's names
        """Return what fits, a page break, and the rest."""
        parts: list[Flowable] = super().split(availWidth, availHeight)
        return [parts[0], PageBreak(), *parts[1:]] if len(parts) > 1 else parts


def listing(
    title: str,
    columns: Sequence[str],
    rows: Sequence[Row],
    widths: Sequence[float],
    *,
    note: str = "",
    ruled: bool = False,
) -> Table:
    """Return a titled table whose title, note and column names come again on every page it runs over."""
    heading: list[Flowable] = [words(title, HEADING), *([words(note, NOTE)] if note else [])]
    blanks: Row = [[]] * (len(columns) - 1)
    head: list[Row] = [[heading, *blanks], [[words(column, LABEL)] for column in columns]]
    return _Listing(
        [*head, *rows],
        colWidths=list(widths),
        style=_RULED if ruled else _HEADED,
        repeatRows=2,
        splitInRow=1,
        spaceAfter=5,
    )
