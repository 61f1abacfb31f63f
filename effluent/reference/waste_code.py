"""The characteristic waste codes D001 to D043; which of them a waste carries is never decided here."""

from __future__ import annotations

import functools
from collections.abc import Iterator
from dataclasses import dataclass

from effluent.domain.quantity import Quantity
from effluent.errors import RecordMissing
from effluent.reference.analyte import by_key
from effluent.reference.limit import rows
from effluent.reference.table import Source, near_names, read

__all__ = ["WasteCode", "waste_code", "waste_codes"]

_TOXICITY = "40CFR261.24"


@dataclass(frozen=True)
class WasteCode:
    """A waste code, its substance, and the level in the TCLP extract that reaches it.

    ``level`` is ``None`` for the characteristics that are no single level (D001 to D003).
    """

    code: str
    name: str
    cas: str
    level: Quantity | None
    source: Source


@functools.cache
def waste_codes() -> tuple[WasteCode, ...]:
    """Return the codes D001 to D043 in order."""
    return tuple(sorted((*_characteristics(), *_toxic()), key=lambda waste: waste.code))


def waste_code(code: str) -> WasteCode:
    """Return one waste code.

    Raises
    ------
    RecordMissing
        If it is none of D001 to D043.
    """
    known = {waste.code: waste for waste in waste_codes()}
    try:
        return known[code.strip().upper()]
    except KeyError:
        near = near_names(code.upper(), known) or "D001 to D043"
        raise RecordMissing("characteristic waste code", code, f"near ones are {near}") from None


def _characteristics() -> Iterator[WasteCode]:
    for cells in read("waste_codes"):
        yield WasteCode(cells["code"], cells["name"], "", None, Source.of(cells))


def _toxic() -> Iterator[WasteCode]:
    for limit in rows(_TOXICITY):
        analyte = by_key(limit.analyte)
        yield WasteCode(limit.waste_code, analyte.name, analyte.cas, limit.value, limit.source)
