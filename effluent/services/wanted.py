"""Which samples are asked about."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from datetime import date
from typing import NamedTuple

from effluent.domain import Sample
from effluent.services.water import Water, waters
from effluent.store.reading import Reading

__all__ = ["Wanted", "wanted_waters"]


class Wanted(NamedTuple):
    """Which samples are asked about; all that is named must hold, and days are local days of the site."""

    sample: str | None = None
    container: str | None = None
    point: str | None = None
    site: str | None = None
    since: date | None = None
    until: date | None = None


def wanted_waters(
    reading: Reading, wanted: Wanted, *, points: Iterable[str] | None = None
) -> tuple[Water, ...]:
    """Return the samples asked for, grouped as by `effluent.services.water.waters`.

    Raises
    ------
    RecordMissing
        If something named is not in the ledger.
    """
    for noun in ("container", "point", "site"):
        if code := getattr(wanted, noun):
            reading.value(noun, code)
    first, last = wanted.since or date.min, wanted.until or date.max
    found = [
        replace(water, samples=tuple(s for s in water.samples if first <= water.day(s) <= last))
        for water in waters(reading, _named(reading, wanted), points=points)
        if wanted.site in (None, water.site)
    ]
    return tuple(water for water in found if water.samples)


def _named(reading: Reading, wanted: Wanted) -> tuple[Sample, ...]:
    origins = {"container": wanted.container, "point": wanted.point}
    named = {noun: code for noun, code in origins.items() if code is not None}
    if wanted.sample is None:
        found: tuple[Sample, ...] = reading.values("sample", **named)
        return found
    sample = reading.value("sample", wanted.sample)
    return (sample,) if all(getattr(sample, noun) == code for noun, code in named.items()) else ()
