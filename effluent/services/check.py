"""Holding what the laboratory found against the limits of the place."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from types import MappingProxyType
from typing import NamedTuple

from effluent.calc.average_verdict import is_average
from effluent.calc.rule import in_force
from effluent.calc.verdict import is_single, judge, strictest, without_reading
from effluent.domain import Limit, Sample, Verdict
from effluent.services.averaging import Averaging, Unaveraged, averaging
from effluent.services.unsampled import unsampled
from effluent.services.wanted import Wanted, wanted_waters
from effluent.services.water import Water, readings_of, waters
from effluent.settings import CAUTION
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading

__all__ = ["Checked", "Unaveraged", "Unread", "Wanted", "check", "container_verdicts", "verdicts_for"]


class Unread(NamedTuple):
    """A limit in force for some water of which there is no reading; `water` as in ``container T-1``."""

    water: str
    limit: Limit


class Checked(NamedTuple):
    """What the limits of the place say.

    ``strictest`` has for each sample the verdict that decides, ``by_container`` for each container with
    verdicts on several samples the one that decides over all of them; ``without_verdict`` the samples about
    which nothing can be said, because no limit applies or nothing was read; ``unaveraged`` the limits of
    averages that give no verdict, and why; ``unsampled`` why no sample speaks for what the container asked
    about holds now. A verdict on an average counts for every sample that has a part in it.
    """

    verdicts: tuple[Verdict, ...]
    strictest: Mapping[str, Verdict]
    without_reading: tuple[Unread, ...]
    not_computed: tuple[Limit, ...]
    without_verdict: tuple[str, ...]
    unaveraged: tuple[Unaveraged, ...] = ()
    unsampled: str = ""
    by_container: Mapping[str, Verdict] = MappingProxyType({})
    caution: str = CAUTION


def check(
    ledger: Ledger, wanted: Wanted | None = None, *, against: str | None = None, as_of: str | None = None
) -> Checked:
    """Hold the readings of samples against the limits in force where their water may leave.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    wanted : Wanted, optional
        Without it every sample.
    against : str, optional
        Hold caught water against the limits of this point alone.
    as_of : str, optional
        Answer with what was known then.

    Raises
    ------
    RecordMissing
        If something named is not in the ledger.
    """
    with ledger.reading(as_of) as reading:
        points = None if against is None else (reading.value("point", against).code,)
        bodies = wanted_waters(reading, wanted or Wanted(), points=points)
        checked = _checked([_Judged.of(reading, water) for water in bodies])
        return checked._replace(unsampled=_unsampled(reading, wanted or Wanted()))


def _unsampled(reading: Reading, wanted: Wanted) -> str:
    """Look at what a container holds now, unless one sample or days gone by are asked about."""
    if wanted.container is None or wanted.sample or wanted.until:
        return ""
    return unsampled(reading, wanted.container)


def verdicts_for(
    reading: Reading, samples: Sequence[Sample], *, points: Iterable[str] | None = None
) -> tuple[Verdict, ...]:
    """Return the verdicts on samples inside a view that is open already.

    A sample drawn at a point is held against the limits of that point; one of a container or a wash
    against those of all points of its site, or only of `points`. Limits that are not in force on the
    sample's day, or not computed by this version, give no verdict. An average has all samples of its point
    and window in it, also those that are not among these.
    """
    judged = [_Judged.of(reading, water) for water in waters(reading, samples, points=points)]
    return _in_order(judged)


def container_verdicts(reading: Reading, container: str) -> tuple[Verdict, ...]:
    """Return the verdicts on every sample drawn from a container."""
    return verdicts_for(reading, reading.values("sample", container=container))


class _Judged(NamedTuple):
    """One water with its verdicts, and the limits that gave none."""

    water: Water
    single: tuple[Verdict, ...]
    unread: tuple[Limit, ...]
    not_computed: tuple[Limit, ...]
    averaging: Averaging

    @classmethod
    def of(cls, reading: Reading, water: Water) -> _Judged:
        limits = _limits(reading, water)
        single = [limit for limit in limits if is_single(limit)]
        averaged = averaging(reading, water, [limit for limit in limits if is_average(limit)])
        readings = readings_of(reading, water)
        return cls(
            water=water,
            single=judge(readings, single),
            unread=(*without_reading(readings, single), *averaged.unread),
            not_computed=tuple(one for one in limits if not (is_single(one) or is_average(one))),
            averaging=averaged,
        )

    @property
    def verdicts(self) -> tuple[Verdict, ...]:
        return (*self.single, *self.averaging.verdicts)


def _limits(reading: Reading, water: Water) -> list[Limit]:
    """Return the limits of a water's points that are in force on the day of any of its samples."""
    days = {water.day(sample) for sample in water.samples}
    found: tuple[Limit, ...] = reading.values("limit", point=water.points)
    return [limit for limit in found if any(in_force(limit, day) for day in days)]


def _in_order(judged: Iterable[_Judged]) -> tuple[Verdict, ...]:
    found = [verdict for each in judged for verdict in each.verdicts]
    return tuple(sorted(found, key=lambda verdict: (verdict.day, verdict.samples)))


def _checked(judged: Sequence[_Judged]) -> Checked:
    verdicts = _in_order(judged)
    asked = {sample.code: None for each in judged for sample in each.water.samples}
    deciding = {code: verdict for code, verdict in strictest(verdicts).items() if code in asked}
    silent = [code for code in asked if code not in deciding]
    not_computed = {limit.code: limit for each in judged for limit in each.not_computed}
    return Checked(
        verdicts=verdicts,
        strictest=deciding,
        without_reading=tuple(Unread(each.water.label, limit) for each in judged for limit in each.unread),
        not_computed=tuple(not_computed.values()),
        without_verdict=tuple(silent),
        by_container=_by_container(judged, deciding),
        unaveraged=tuple(dict.fromkeys(one for each in judged for one in each.averaging.unaveraged)),
    )


def _by_container(judged: Iterable[_Judged], deciding: Mapping[str, Verdict]) -> dict[str, Verdict]:
    """Return the strictest verdict over all samples of each container of which several have one."""
    found: dict[str, Verdict] = {}
    for water in (each.water for each in judged):
        container = water.samples[0].container
        own = {code: deciding[code] for code in (sample.code for sample in water.samples) if code in deciding}
        if container is None or len(own) < 2:
            continue
        together = (replace(verdict, samples=(container,), notes=(code,)) for code, verdict in own.items())
        [code] = strictest(together)[container].notes
        found[container] = own[code]
    return found
