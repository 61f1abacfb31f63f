"""The value column: plain numbers at the speed of a list, everything else cell by cell."""

from __future__ import annotations

from operator import add, methodcaller
from typing import Any, NamedTuple

from effluent.calc.cell import read_cell
from effluent.domain.sample import Qualifier
from effluent.errors import ValueRefused
from effluent.intake.column import SIGNS, says_absent
from effluent.intake.fault import Faults
from effluent.intake.memo import Memo
from effluent.intake.plan import Plan

__all__ = ["ValueReader", "Written"]

_LONGEST_PLAIN = 30
_EQUAL = str(Qualifier.EQUAL)


class Written(NamedTuple):
    """What value cell, flag cell and reporting limit of one result say together."""

    qualifier: str = _EQUAL
    number: str = ""
    flag: str = ""


class ValueReader:
    """Reads values and reporting limits of grid after grid."""

    def __init__(self, decimal: str) -> None:
        self._decimal = decimal
        self._written: Memo[tuple[str, str, str, bool], Written] = Memo(self._read, Written())
        self._values: Memo[tuple[str, Plan], float] = Memo(_canonical, 0.0)
        self._limits: Memo[tuple[str, Plan], float | None] = Memo(_canonical_limit, None)

    def add_values(self, columns: dict[str, list[Any]], plans: list[Plan], faults: Faults) -> None:
        """Add qualifier, number, value and flag to the columns.

        ``value`` is the double nearest to the exact number in the canonical unit: for a plain decimal and
        a unit that differs by a power of ten, reading the digits with that power behind them gives it.
        """
        texts = columns["text"]
        suffixes = [plan.suffix for plan in plans]
        slow = self._slow(texts, columns["flag"], suffixes)
        numbers = texts.copy() if self._decimal == "." else [text.replace(",", ".") for text in texts]
        for place in slow:
            numbers[place], suffixes[place] = "0", ""
        columns["value"] = list(map(float, map(add, numbers, suffixes)))
        columns["number"] = numbers
        columns["qualifier"] = [_EQUAL] * len(texts)
        if slow:
            self._add_slow(columns, plans, slow, faults=faults)

    def add_limits(self, columns: dict[str, list[Any]], plans: list[Plan], faults: Faults) -> None:
        """Add the reporting limits in the canonical unit to the columns."""
        limits = columns["reporting_limit"]
        columns["reporting_value"] = self._limits.column(zip(limits, plans, strict=True))
        faults.add_refused("reporting_limit", zip(limits, plans, strict=True), self._limits)

    def _slow(self, texts: list[str], flags: list[str], suffixes: list[str | None]) -> list[int]:
        """Return the places whose value is not a short plain decimal with a plain power of ten."""
        mark = self._decimal
        if not "".join(texts).isascii() or max(map(len, texts), default=0) > _LONGEST_PLAIN:
            return list(range(len(texts)))
        plain = map(str.isdigit, map(methodcaller("replace", mark, "", 1), texts))
        return [
            place
            for place, (digits, flag, suffix) in enumerate(zip(plain, flags, suffixes, strict=True))
            if not digits or flag or suffix is None
        ]

    def _add_slow(
        self, columns: dict[str, list[Any]], plans: list[Plan], slow: list[int], *, faults: Faults
    ) -> None:
        texts, flags, limits = columns["text"], columns["flag"], columns["reporting_limit"]
        for place in slow:
            key = (texts[place], flags[place], limits[place], plans[place].below_zero)
            written = self._written[key]
            pair = (written.number, plans[place])
            columns["qualifier"][place], columns["number"][place], flags[place] = written
            columns["value"][place] = self._values[pair]
            reason = self._written.refused.get(key) or self._values.refused.get(pair)
            if reason:
                faults.add(place, "value", reason)
        self._written.forget()
        self._values.forget()

    def _read(self, key: tuple[str, str, str, bool]) -> Written:
        """Read a cell with its flag; a non-detect without a number stands for its reporting limit."""
        text, flag, limit, below_zero = key
        if not text:
            raise ValueRefused("value", text, "the cell is empty; write what the laboratory found, or ND")
        signed = flag + text.removeprefix(flag) if flag in SIGNS else text
        cell = read_cell(
            signed.removeprefix("="),
            decimal_comma=self._decimal == ",",
            reporting_limit=limit.replace(".", self._decimal),
            negative=below_zero,
        )
        qualifier = Qualifier.BELOW if flag and flag not in SIGNS and says_absent(flag) else cell.qualifier
        if qualifier != cell.qualifier == Qualifier.ABOVE:
            raise ValueRefused(
                "value", text, "value and flag say above and not detected at once; ask the laboratory"
            )
        flags = " ".join(dict.fromkeys(part for part in (cell.flag, flag) if part and part not in SIGNS))
        return Written(str(qualifier), cell.number, flags)


def _canonical(pair: tuple[str, Plan]) -> float:
    number, plan = pair
    return plan.canonical(number) if number else 0.0


def _canonical_limit(pair: tuple[str, Plan]) -> float | None:
    number, plan = pair
    return plan.canonical(number) if number else None
