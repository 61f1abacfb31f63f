"""A canvas that dates itself from the ledger and numbers its pages "n of m"."""

from __future__ import annotations

from datetime import UTC, datetime
from hashlib import md5
from typing import Any

from reportlab.pdfgen.canvas import Canvas

from effluent.paper.font import REGULAR
from effluent.paper.page import Furniture, witness

__all__ = ["LedgerTime", "PagedCanvas"]


class LedgerTime:
    """The instant written into the file, in the shape the PDF library asks for."""

    def __init__(self, instant: datetime) -> None:
        utc = instant.astimezone(UTC)
        self.t = utc.timestamp()
        self.YMDhms = utc.timetuple()[:6]
        self.dhh = self.dmm = 0


class PagedCanvas(Canvas):
    """Keeps each page until their number is known, then draws heads and feet."""

    _doc: Any

    def __init__(self, *args: Any, furniture: Furniture, **options: Any) -> None:
        super().__init__(*args, **{**options, "initialFontName": REGULAR})
        self._furniture = furniture
        self._kept: list[dict[str, Any]] = []
        # the library would mix the clock or SOURCE_DATE_EPOCH into both
        self._doc.signature = md5(witness(furniture.sheet).encode(), usedforsecurity=False)
        self._doc._timeStamp = LedgerTime(furniture.sheet.created_at)
        self.setCatalogEntry("Lang", furniture.sheet.language)
        self.setViewerPreference("DisplayDocTitle", "true")
        furniture.define_code(self)

    def showPage(self) -> None:  # noqa: N802 - the library's name
        """Keep the page instead of writing it."""
        self._kept.append(dict(self.__dict__))
        self._startPage()  # type: ignore[attr-defined]

    def save(self) -> None:
        """Write all kept pages with head and foot, then the file."""
        kept = self._kept
        for number, page in enumerate(kept, 1):
            self.__dict__.update(page)
            self._furniture.draw(self, number, len(kept))
            super().showPage()
        super().save()
