"""The water that samples speak for: of a container, a wash or a discharge point, and where it may leave."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import date
from typing import Any
from zoneinfo import ZoneInfo

from effluent.calc.reading import Reading as LaboratoryReading
from effluent.domain import Result, Sample
from effluent.reference.holding import clock_start, deadline, holding
from effluent.store.reading import Reading

__all__ = ["Water", "readings_of", "site_of", "waters"]

_NO_ZONE = "UTC"


@dataclass(frozen=True)
class Water:
    """Samples of one container, wash or discharge point.

    ``points`` are the discharge points whose limits apply: its own for a sample at a point, those of the
    site for caught water. ``site`` is empty where the record it was drawn from was voided.
    """

    label: str
    samples: tuple[Sample, ...]
    site: str
    zone: ZoneInfo
    points: tuple[str, ...]

    @property
    def point(self) -> str | None:
        """The discharge point the samples were drawn at; `None` for caught water."""
        first = self.samples[0]
        return first.point if first.container is None and first.wash is None else None

    def day(self, sample: Sample) -> date:
        """Return the local day a sample counts for: that on which drawing it began."""
        return sample.started_at.astimezone(self.zone).date()

    def is_late(self, sample: Sample, result: Result) -> bool:
        """Tell whether a result was analysed after its holding time; without a date it is not known."""
        hold = holding(result.analyte, test_method=result.test_method, fraction=result.fraction)
        if hold is None or result.analysed_at is None:
            return False
        return result.analysed_at > deadline(clock_start(sample).astimezone(self.zone), hold)


def readings_of(reading: Reading, water: Water) -> list[LaboratoryReading]:
    """Return what the laboratory read in the samples of a water, each with the day it counts for."""
    samples = {sample.code: sample for sample in water.samples}
    days = {code: water.day(sample) for code, sample in samples.items()}
    return [
        LaboratoryReading.of(
            result, day=days[result.sample], late=water.is_late(samples[result.sample], result)
        )
        for result in reading.results(samples=samples)
    ]


def waters(
    reading: Reading, samples: Sequence[Sample], *, points: Iterable[str] | None = None
) -> tuple[Water, ...]:
    """Return samples grouped by what they were drawn from, in the order first met.

    Parameters
    ----------
    reading : Reading
        An open view of the ledger.
    samples : sequence of Sample
        Of any origin.
    points : iterable of str, optional
        Only these points of the site count for caught water.
    """
    groups: dict[tuple[str, str], list[Sample]] = {}
    for sample in samples:
        groups.setdefault(_drawn_from(sample), []).append(sample)
    places = _Places(reading, groups)
    wanted = None if points is None else set(points)
    return tuple(places.water(origin, tuple(group), wanted) for origin, group in groups.items())


def site_of(reading: Reading, sample: Sample) -> str:
    """Return the site a sample was drawn at; empty where what it was drawn from was voided."""
    return _Places(reading, [_drawn_from(sample)]).site(_drawn_from(sample))


def _drawn_from(sample: Sample) -> tuple[str, str]:
    if sample.container is not None:
        return ("container", sample.container)
    if sample.wash is not None:
        return ("wash", sample.wash)
    return ("point", sample.point or "")


class _Places:
    """Sites, time zones and points of what samples were drawn from."""

    def __init__(self, reading: Reading, origins: Iterable[tuple[str, str]]) -> None:
        self._sites: dict[tuple[str, str], str] = {}
        wanted: dict[str, list[str]] = {}
        for noun, code in origins:
            wanted.setdefault(noun, []).append(code)
        for noun, codes in wanted.items():
            found: tuple[Any, ...] = reading.values(noun, key=codes)
            self._sites |= {(noun, record.code): record.site for record in found}
        self._zones = {site.code: site.time_zone for site in reading.values("site")}
        self._points: dict[str, list[str]] = {}
        for point in reading.values("point"):
            self._points.setdefault(point.site, []).append(point.code)

    def site(self, origin: tuple[str, str]) -> str:
        return self._sites.get(origin, "")

    def water(self, origin: tuple[str, str], samples: tuple[Sample, ...], wanted: set[str] | None) -> Water:
        noun, code = origin
        site = self.site(origin)
        points = [code] if noun == "point" else self._points.get(site, [])
        return Water(
            label=f"{noun} {code}",
            samples=samples,
            site=site,
            zone=ZoneInfo(self._zones.get(site, _NO_ZONE)),
            points=tuple(point for point in points if wanted is None or point in wanted),
        )
