"""What stands on every page: what the paper is, its state, its number, and the ledger's witness."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from datetime import UTC
from functools import lru_cache
from itertools import groupby

from reportlab.graphics.barcode import qrencoder
from reportlab.lib.colors import Color, black
from reportlab.pdfgen.canvas import Canvas
from reportlab.platypus import Paragraph

from effluent.paper.block import GREY, NOTE, SMALL, STRONG, words
from effluent.paper.font import BOLD, REGULAR
from effluent.paper.sheet import ManifestSheet
from effluent.settings import CAUTION

__all__ = ["MARGIN", "PURPOSE", "Furniture", "state_words", "witness"]

MARGIN = 36.0
PURPOSE = "Working document: data for completing the official form. Not an official manifest."
_ITEMS = "Items: EPA forms 8700-22 and 8700-22A."
_TITLE = "Waste shipment data sheet"
_QR_SIDE = 62.0
_QR_NAME = "witness"
_PALE = Color(0.93, 0.93, 0.93)
_STATES = {
    "draft": "DRAFT \N{EN DASH} not issued",
    "issued": "ISSUED",
    "returned": "RETURNED",
    "void": "VOID \N{EN DASH} not to be used",
}
_PITCH = 5.5
# Strokes of the pale word's letters: points as pairs of digits, x 0 to 4, y 0 to 6.
_STROKES = {
    "A": "002640 1232",
    "D": "00062645412000",
    "F": "000646 0333",
    "I": "2026",
    "O": "103041453616050110",
    "R": "00063645443303 2340",
    "T": "0646 2620",
    "V": "062046",
}


def state_words(state: str) -> str:
    """Return how a page heading speaks of a state."""
    return _STATES.get(state, state.upper())


def witness(sheet: ManifestSheet) -> str:
    """Return the sentence that the QR code carries and that a reader can compare with the ledger."""
    return f"effluent ledger {sheet.ledger_id} entry {sheet.entry} sha256 {sheet.digest}"


@lru_cache(maxsize=16)
def _code(text: str) -> tuple[int, str]:
    """Return a QR code's modules a side and its dark runs as PDF rectangles, one unit a module."""
    code = qrencoder.QRCode(None, qrencoder.QRErrorCorrectLevel.M)
    code.addData(text)
    code.make()
    side = code.moduleCount
    runs = [(row, *run) for row, cells in enumerate(code.modules) for run in _dark_runs(cells)]
    return side, " ".join(f"{start} {side - 1 - row} {length} 1 re" for row, start, length in runs)


def _dark_runs(cells: Sequence[bool]) -> Iterator[tuple[int, int]]:
    start = 0
    for dark, run in groupby(cells):
        length = sum(1 for _ in run)
        if dark:
            yield start, length
        start += length


class Furniture:
    """Head and foot of one paper's pages, measured once and drawn on each page."""

    def __init__(self, sheet: ManifestSheet, size: tuple[float, float]) -> None:
        self.sheet = sheet
        self.page_width, self.page_height = size
        self.width = self.page_width - 2 * MARGIN
        self._code = words(f"Manifest {sheet.code}", STRONG)
        self._foot = self._foot_words()
        self.head_height = 30 + self._measure(self._code, self.width) + 10
        foot_width = self.width - _QR_SIDE - 8
        self.foot_height = 8 + max(_QR_SIDE, sum(self._measure(part, foot_width) for part in self._foot))

    def _foot_words(self) -> list[Paragraph]:
        sheet = self.sheet
        recorded = sheet.created_at.astimezone(UTC).strftime("%Y-%m-%d %H:%M:%S")
        return [
            words(f"Ledger {sheet.ledger_id}, entry {sheet.entry}", SMALL),
            words(f"sha256 {sheet.digest}", SMALL),
            words(f"Prepared by effluent from the ledger entry recorded at {recorded} UTC.", NOTE),
            words(CAUTION, SMALL),
        ]

    @staticmethod
    def _measure(part: Paragraph, width: float) -> float:
        return float(part.wrap(width, 1e6)[1])

    def draw_under(self, canvas: Canvas) -> None:
        """Draw the large pale word of a draft or void paper below everything else.

        Lines, not text: letters behind a table would be read into its words by whoever searches the file.
        """
        if self.sheet.state not in ("draft", "void"):
            return
        word = self.sheet.state.upper()
        canvas.saveState()
        canvas.translate(self.page_width / 2, self.page_height / 2)
        canvas.rotate(52)
        canvas.scale(22, 22)
        canvas.translate(-(len(word) * _PITCH - 1.5) / 2, -3)
        _draw_strokes(canvas, word)
        canvas.restoreState()

    def draw(self, canvas: Canvas, number: int, total: int) -> None:
        """Draw head and foot of page `number` of `total`."""
        self._draw_head(canvas, f"Page {number} of {total}")
        self._draw_foot(canvas)

    def _draw_head(self, canvas: Canvas, page: str) -> None:
        top, right = self.page_height - MARGIN, self.page_width - MARGIN
        canvas.setFillColor(black)
        canvas.setFont(BOLD, 13)
        canvas.drawString(MARGIN, top - 11, _TITLE)
        canvas.drawRightString(right, top - 11, state_words(self.sheet.state))
        canvas.setFont(REGULAR, 8)
        canvas.drawString(MARGIN, top - 24, f"{PURPOSE} {_ITEMS}")
        canvas.drawRightString(right, top - 24, page)
        low = top - self.head_height + 10
        self._code.drawOn(canvas, MARGIN, low)
        _rule(canvas, MARGIN, right, low - 4)

    def _draw_foot(self, canvas: Canvas) -> None:
        top = MARGIN + self.foot_height - 8
        _rule(canvas, MARGIN, self.page_width - MARGIN, top + 4)
        canvas.saveState()
        canvas.translate(MARGIN, top - _QR_SIDE)
        canvas.doForm(_QR_NAME)
        canvas.restoreState()
        for part in self._foot:
            top -= part.height
            part.drawOn(canvas, MARGIN + _QR_SIDE + 8, top)

    def define_code(self, canvas: Canvas) -> None:
        """Define the QR code once; each page refers to it."""
        side, rectangles = _code(witness(self.sheet))
        canvas.beginForm(_QR_NAME, 0, 0, _QR_SIDE, _QR_SIDE)
        canvas.scale(_QR_SIDE / (side + 4), _QR_SIDE / (side + 4))
        canvas.translate(2, 2)
        path = canvas.beginPath()
        path._code.append(rectangles)  # type: ignore[attr-defined]
        canvas.drawPath(path, stroke=0, fill=1)
        canvas.endForm()


def _draw_strokes(canvas: Canvas, word: str) -> None:
    canvas.setStrokeColor(_PALE)
    canvas.setLineWidth(1)
    canvas.setLineJoin(1)
    canvas.setLineCap(1)
    for place, letter in enumerate(word):
        for stroke in _STROKES[letter].split():
            path = canvas.beginPath()
            points = [
                (place * _PITCH + int(x), int(y)) for x, y in zip(stroke[::2], stroke[1::2], strict=True)
            ]
            path.moveTo(*points[0])
            for point in points[1:]:
                path.lineTo(*point)
            canvas.drawPath(path)


def _rule(canvas: Canvas, left: float, right: float, height: float) -> None:
    canvas.setStrokeColor(GREY)
    canvas.setLineWidth(0.6)
    canvas.line(left, height, right, height)
