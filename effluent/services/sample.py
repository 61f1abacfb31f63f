"""Samples: taken from a container, a wash stream or a discharge point."""

from __future__ import annotations

from dataclasses import replace
from datetime import datetime
from typing import Any

from effluent.domain import Method, Sample, Site
from effluent.errors import ChainBroken, ValueRefused
from effluent.services.container import contents_of
from effluent.services.moment import local, past
from effluent.services.register import need_reason
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading
from effluent.store.writing import Writing

__all__ = ["site_of", "take", "void"]


def take(ledger: Ledger, sample: Sample, *, by: str, reason: str = "") -> str:
    """Record a sample and return its number.

    Raises
    ------
    ValueRefused
        If it does not stand for exactly one container, wash or point, lies in the future, or its
        times contradict its method.
    ChainBroken
        If the container it was drawn from held nothing then.
    """
    _check_source(sample)

    def job(writing: Writing) -> str:
        site = site_of(writing, sample)
        placed = replace(sample, **_times(sample, site, ledger.clock()))
        _check_method(placed)
        _check_full(writing, placed)
        return writing.record(placed)

    return ledger.write(job, by=by, action="take sample", reason=reason)


def void(ledger: Ledger, code: str, *, by: str, reason: str) -> None:
    """Record that a sample does not stand; its results must be voided first."""
    need_reason(reason, "void")
    ledger.write(lambda writing: writing.void("sample", code), by=by, action="void sample", reason=reason)


def site_of(reading: Reading, sample: Sample) -> Site:
    """Return the site whose water a sample stands for."""
    noun = next(noun for noun in ("container", "wash", "point") if getattr(sample, noun) is not None)
    site: Site = reading.value("site", reading.value(noun, getattr(sample, noun)).site)
    return site


def _check_source(sample: Sample) -> None:
    named = [noun for noun in ("container", "wash", "point") if getattr(sample, noun) is not None]
    if len(named) != 1:
        what = " and ".join(named) or "nothing"
        raise ValueRefused("sample", what, "it stands for exactly one container, wash or discharge point")


def _times(sample: Sample, site: Site, now: datetime) -> dict[str, Any]:
    times = {name: getattr(sample, name) for name in ("started_at", "ended_at")}
    return {
        name: past("time of the sample", local(moment, site), now, site=site)
        for name, moment in times.items()
        if moment is not None
    }


def _check_method(sample: Sample) -> None:
    if sample.method is Method.GRAB:
        if sample.ended_at is not None or sample.aliquots is not None:
            raise ValueRefused("method", "grab", "a grab has one time and no aliquots; was it a composite?")
    elif sample.ended_at is None or sample.ended_at <= sample.started_at:
        raise ValueRefused(
            "end", str(sample.ended_at or ""), "a composite ends after it starts; give both times"
        )
    elif sample.aliquots is not None and sample.aliquots < 2:
        raise ValueRefused("aliquots", str(sample.aliquots), "a composite has two or more")


def _check_full(reading: Reading, sample: Sample) -> None:
    """Refuse a bottle filled from a container that nothing had gone into."""
    if sample.container is None:
        return
    held = contents_of(reading, sample.container)
    last = sample.ended_at or sample.started_at
    if not any(m.target == sample.container and m.moved_at <= last for m in held.movements):
        raise ChainBroken("the sample", (f"container {sample.container} had received nothing by then",))
