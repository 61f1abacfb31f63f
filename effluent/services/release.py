"""Whether the chain behind a manifest is whole: contents, washes, samples, results, verdicts, parties."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from datetime import datetime
from itertools import chain
from typing import NamedTuple

from effluent.domain import Manifest, Outcome, Sample, Verdict
from effluent.reference.analyte import called
from effluent.services.check import verdicts_for
from effluent.services.container import Contents, contents_of
from effluent.services.shipment import shipped_containers
from effluent.store.reading import Reading

__all__ = ["Cargo", "adverse", "cargo_of", "cargos_of", "filled_at", "missing_links"]

_OPEN = (Outcome.OVER, Outcome.UNDETERMINED)


class Cargo(NamedTuple):
    """What one container carries, and what is known of it.

    ``samples`` are those taken after the last water went in; earlier ones speak for other water.
    """

    contents: Contents
    samples: tuple[Sample, ...]
    verdicts: tuple[Verdict, ...]


def cargo_of(reading: Reading, container: str) -> Cargo:
    """Return what a container carries and what the laboratory said about it."""
    contents = contents_of(reading, container)
    samples = _speaking(contents, reading.values("sample", container=container))
    return Cargo(contents, samples, verdicts_for(reading, samples))


def filled_at(contents: Contents) -> datetime | None:
    """Return when water last went into a container; ``None`` says never."""
    fills = [each.moved_at for each in contents.movements if each.target == contents.container.code]
    return max(fills, default=None)


def cargos_of(reading: Reading, manifest: Manifest) -> tuple[Cargo, ...]:
    """Return what every container of a manifest carries, in the order of its lines."""
    return tuple(cargo_of(reading, line.container) for line in manifest.lines)


def missing_links(reading: Reading, manifest: Manifest, cargos: Iterable[Cargo]) -> tuple[str, ...]:
    """Return every link that a draft lacks before it can be issued, one sentence each.

    Records that stand are never without those they refer to; the store sees to that.
    """
    of_containers = (_missing_of(reading, cargo) for cargo in cargos)
    return (*_missing_facts(manifest), *_gone(reading, manifest), *chain.from_iterable(of_containers))


def adverse(cargos: Iterable[Cargo]) -> tuple[str, ...]:
    """Return the verdicts over a limit or undetermined, one sentence each."""
    return tuple(
        f"container {cargo.contents.container.code}, sample {', '.join(verdict.samples)}:"
        f" {called(verdict.limit.analyte)} {verdict.limit.fraction} {verdict.outcome} ({verdict.reason})"
        for cargo in cargos
        for verdict in cargo.verdicts
        if verdict.outcome in _OPEN
    )


def _speaking(contents: Contents, samples: Iterable[Sample]) -> tuple[Sample, ...]:
    last = filled_at(contents)
    return tuple(sample for sample in samples if last is not None and sample.started_at > last)


def _missing_facts(manifest: Manifest) -> Iterator[str]:
    if not manifest.lines:
        yield "no container is named"
    if not manifest.carriers:
        yield "no carrier is named"
    if not manifest.emergency_phone:
        yield f"no emergency telephone is named, neither here nor at site {manifest.site}"


def _gone(reading: Reading, manifest: Manifest) -> list[str]:
    shipped = shipped_containers(reading)
    return [
        f"container {line.container}: it was shipped on another manifest"
        for line in manifest.lines
        if line.container in shipped
    ]


def _missing_of(reading: Reading, cargo: Cargo) -> Iterator[str]:
    code = cargo.contents.container.code
    if not cargo.contents.level_l:
        yield f"container {code}: it holds nothing on record"
    elif sum(origin.volume_l for origin in cargo.contents.origins) < cargo.contents.level_l:
        yield f"container {code}: some of its water came from no recorded wash"
    if not cargo.samples:
        yield f"container {code}: {_no_sample(reading, code)}"
    elif unread := _without_results(reading, cargo.samples):
        yield from (f"container {code}: sample {sample} has no results" for sample in unread)
    elif not cargo.verdicts:
        yield f"container {code}: no verdict; no limit of site {cargo.contents.container.site} applies"


def _no_sample(reading: Reading, container: str) -> str:
    older = [sample.code for sample in reading.values("sample", container=container)]
    if older:
        return f"water went in after its last sample ({older[-1]}); take another"
    return "no sample was taken"


def _without_results(reading: Reading, samples: tuple[Sample, ...]) -> list[str]:
    codes = [sample.code for sample in samples]
    known = {key.partition("/")[2] for key in reading.result_columns(["sample"], samples=codes)["sample"]}
    return [code for code in codes if code not in known]
