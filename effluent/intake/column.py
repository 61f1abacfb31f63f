"""Columns that need nothing from their neighbours: numbers, dates and texts."""

from __future__ import annotations

from typing import Any

from effluent.calc.cell import read_cell
from effluent.domain.quantity import exact
from effluent.domain.sample import Qualifier
from effluent.errors import ValueRefused
from effluent.intake.instant import Clock
from effluent.intake.memo import Memo

__all__ = ["SIGNS", "column_memos", "says_absent"]

SIGNS = ("<", ">", "=")
"""What stands in a flag column that says how the value stands to the truth."""

_LONGEST_TEXT = 500


def column_memos(decimal: str, clock: Clock) -> dict[str, Memo[str, Any]]:
    """Return what reads each column of its own, by our name."""

    def number(cell: str) -> str:
        return _plain_number(cell, decimal) if cell.strip() else ""

    def factor(cell: str) -> str:
        found = number(cell)
        if found and not exact(found):
            raise ValueRefused("dilution factor", cell, "it is above zero: 1 for a sample not diluted")
        return found

    def instant(cell: str) -> str | None:
        return clock.read(cell.strip()) if cell.strip() else None

    return {
        "sample": Memo(_sample, ""),
        "flag": Memo(_flag, ""),
        "detection_limit": Memo(number, ""),
        "reporting_limit": Memo(number, ""),
        "dilution_factor": Memo(factor, ""),
        "uncertainty": Memo(number, ""),
        "test_method": Memo(_text, ""),
        "analysed_at": Memo(instant, None),
        "laboratory": Memo(_text, ""),
        "report": Memo(_text, ""),
        "replicate": Memo(_replicate, 1),
        "reissue_of": Memo(_text, ""),
    }


def says_absent(flag: str) -> bool:
    """Return whether a flag says "not detected", as U and ND do.

    Raises
    ------
    ValueRefused
        If its meaning is not known, or takes the value back.
    """
    return read_cell(f"1 {flag}", decimal_comma=False).qualifier == Qualifier.BELOW


def _plain_number(cell: str, decimal: str) -> str:
    """Return a number cell as digits with a decimal point and nothing else."""
    found = read_cell(cell.strip().removeprefix("<").strip(), decimal_comma=decimal == ",")
    if found.qualifier != Qualifier.EQUAL or found.flag:
        raise ValueRefused("number", cell, "write the number alone, in the unit of the result")
    return found.number


def _flag(cell: str) -> str:
    text = _text(cell)
    if text and text not in SIGNS:
        try:
            says_absent(text)
        except ValueRefused as error:
            reason = str(error.args[-1])
            raise ValueRefused("flag", cell, f"as a flag it cannot be understood; {reason}") from error
    return text


def _text(cell: str) -> str:
    text = " ".join(cell.split())
    if len(text) > _LONGEST_TEXT:
        raise ValueRefused("text", text[:40] + "…", f"it is longer than {_LONGEST_TEXT} characters")
    return text


def _sample(cell: str) -> str:
    text = _text(cell)
    if not text:
        raise ValueRefused("sample", cell, "the cell is empty; write the sample number of the ledger")
    return text


def _replicate(cell: str) -> int:
    text = cell.strip()
    if not text:
        return 1
    if not (text.isascii() and text.isdigit() and 0 < int(text[:10]) < 1000 and len(text) <= 10):
        raise ValueRefused("replicate", cell, "write 1, or 2 and up for a laboratory duplicate")
    return int(text)
