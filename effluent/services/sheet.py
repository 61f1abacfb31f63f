"""The manifest paper worded from the records, and written as a PDF file."""

from __future__ import annotations

import os
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from datetime import datetime
from itertools import chain
from pathlib import Path

from effluent.domain import (
    Bound,
    BrokenBy,
    Company,
    Limit,
    Manifest,
    ManifestLine,
    ManifestState,
    Outcome,
    Result,
    Sample,
    Site,
    Statistic,
    Verdict,
)
from effluent.errors import StorageFailed
from effluent.paper.manifest import render
from effluent.paper.sheet import Generator, LaboratoryRow, ManifestSheet, OriginRow, Party, SheetLine
from effluent.reference.analyte import called
from effluent.reference.code import container_code, container_codes, unit_code, unit_codes
from effluent.services.container import Origin
from effluent.services.load import litres
from effluent.services.moment import local_day
from effluent.services.question import accepted_because, plainly
from effluent.services.release import Cargo, cargos_of, missing_links
from effluent.store.backup import appearing
from effluent.store.database import refuse_taken
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading, Version

__all__ = ["check_printable", "check_target", "pdf", "sheet"]

_BOUNDS = {
    (Bound.MAXIMUM, BrokenBy.BEYOND): "at most",
    (Bound.MAXIMUM, BrokenBy.REACHING): "below",
    (Bound.MINIMUM, BrokenBy.BEYOND): "at least",
    (Bound.MINIMUM, BrokenBy.REACHING): "above",
}
_TIMES = {Statistic.INSTANTANEOUS: "at any time", Statistic.DAILY: "on any day"}


def pdf(ledger: Ledger, code: str, target: str, *, paper: str = "A4", as_of: str | None = None) -> None:
    """Write the paper of a manifest to a new file, whole or not at all.

    A manifest that left the draft state is printed as of the entry of its latest version, so that the same
    ledger gives the same bytes for ever; a draft as of the newest entry.

    Parameters
    ----------
    target : str
        A file that is not there yet.
    paper : str
        ``"A4"`` or ``"Letter"``.
    as_of : str, optional
        Print what stood then, such as the paper as issued of a manifest that was voided later.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
        If the file is there, its folder is not, or it cannot be written.
    NotPrintable
        If a name holds a character that the fonts on board cannot print.
    """
    check_target(target)
    with ledger.reading(as_of) as reading:
        latest = reading.versions("manifest", code)[-1]
        if latest.value.state is ManifestState.DRAFT:
            worded = sheet(reading, latest.value)
    if latest.value.state is not ManifestState.DRAFT:
        with ledger.reading(str(latest.entry.sequence)) as reading:
            worded = sheet(reading, latest.value)
    content = render(worded, paper=paper)
    with appearing(target) as unfinished:
        unfinished.write_bytes(content)


def check_printable(reading: Reading, manifest: Manifest, *, remark: str) -> None:
    """Refuse a manifest whose paper, with a remark on it, cannot be printed.

    Raises
    ------
    NotPrintable
        If a text holds a character that the fonts on board cannot print.
    """
    render(replace(sheet(reading, manifest), state_note=remark))


def sheet(reading: Reading, manifest: Manifest) -> ManifestSheet:
    """Return everything that the paper of a manifest says, in words, as of a view of the ledger."""
    site: Site = reading.value("site", manifest.site)
    cargos = cargos_of(reading, manifest)
    head = reading.head
    return ManifestSheet(
        code=manifest.code,
        state=manifest.state.value,
        generator=_generator(manifest, site),
        carriers=tuple(_party(reading.value("company", code)) for code in manifest.carriers),
        facility=_party(reading.value("company", manifest.facility)),
        lines=_lines(manifest, cargos),
        laboratory=tuple(chain.from_iterable(_laboratory(reading, cargo, site) for cargo in cargos)),
        origins=tuple(_origin(cargo, origin, site) for cargo in cargos for origin in cargo.contents.origins),
        special_handling=manifest.special_handling,
        issued_on=manifest.issued_on.isoformat() if manifest.issued_on else "",
        state_note=_state_note(reading, manifest, cargos),
        tracking_number=manifest.tracking_number,
        ledger_id=reading.ledger_number,
        entry=head.sequence,
        digest=head.digest,
        created_at=datetime.fromisoformat(head.recorded_at),
    )


def _generator(manifest: Manifest, site: Site) -> Generator:
    return Generator(
        operator=site.operator,
        site=site.name,
        address=site.address,
        phone=site.phone,
        identification=site.identification,
        emergency_contact=manifest.emergency_contact,
        emergency_phone=manifest.emergency_phone,
    )


def _party(company: Company) -> Party:
    return Party(
        name=company.name,
        address=company.address,
        phone=company.phone,
        identification=company.identification,
    )


def _lines(manifest: Manifest, cargos: Sequence[Cargo]) -> tuple[SheetLine, ...]:
    """Return one line for all containers of equal description, waste codes, type and unit."""
    merged: dict[tuple[str, ...], SheetLine] = {}
    for line, cargo in zip(manifest.lines, cargos, strict=True):
        new = _line(line, cargo)
        same = (new.description, *new.waste_codes, new.container_code, new.unit_code)
        merged[same] = _together(merged[same], new) if same in merged else new
    return tuple(merged.values())


def _line(line: ManifestLine, cargo: Cargo) -> SheetLine:
    held_in = container_code(cargo.contents.container.kind, cargo.contents.container.material)
    unit = unit_code(line.quantity.unit)
    return SheetLine(
        description=line.description,
        number=1,
        container_code=held_in,
        container_word=next(code.meaning for code in container_codes() if code.code == held_in),
        quantity=int(line.quantity.magnitude),
        unit_code=unit,
        unit_word=next(code.meaning for code in unit_codes() if code.code == unit).partition(" (")[0],
        waste_codes=tuple(line.waste_codes.split()),
        containers=(line.container,),
    )


def _together(one: SheetLine, other: SheetLine) -> SheetLine:
    return replace(
        one,
        number=one.number + other.number,
        quantity=one.quantity + other.quantity,
        containers=one.containers + other.containers,
    )


def _laboratory(reading: Reading, cargo: Cargo, site: Site) -> Iterator[LaboratoryRow]:
    results = {r.row: r for r in reading.results(samples=[sample.code for sample in cargo.samples])}
    samples = {sample.code: sample for sample in cargo.samples}
    names = {company.code: company.name for company in reading.values("company")}
    for verdict in cargo.verdicts:
        analysed = [(results[row], samples[results[row].sample]) for row in verdict.results]
        yield LaboratoryRow(
            container=cargo.contents.container.code,
            sample=", ".join(verdict.samples),
            drawn=_each(_drawn(samples[code], site) for code in verdict.samples),
            analyte=called(verdict.limit.analyte),
            fraction=verdict.limit.fraction.value,
            result="; ".join(_reported(results[row]) for row in verdict.results),
            analysed=_each(_analysed(result, sample, site, names) for result, sample in analysed),
            limit=_limit(verdict.limit),
            source=_source(verdict.limit),
            verdict=verdict.outcome.value,
            notes=_notes(verdict, results),
        )


def _each(texts: Iterable[str]) -> str:
    return "; ".join(text for text in dict.fromkeys(texts) if text)


def _drawn(sample: Sample, site: Site) -> str:
    """Return the site's day on which a sample was drawn, or the first and the last of a composite."""
    days = [local_day(at, site).isoformat() for at in (sample.started_at, sample.ended_at) if at]
    return f"drawn {' to '.join(dict.fromkeys(days))}"


def _analysed(result: Result, sample: Sample, site: Site, names: Mapping[str, str]) -> str:
    """Return who analysed a sample and on which day of its site, as far as the records say it."""
    laboratory = result.laboratory or sample.laboratory or ""
    at = result.analysed_at
    day = f"analysed {local_day(at, site)}" if at else ""
    return ", ".join(part for part in (names.get(laboratory, laboratory), day) if part)


def _reported(result: Result) -> str:
    flag = "" if result.flag in result.text else result.flag
    return " ".join(part for part in (result.text, result.unit, flag) if part)


def _limit(limit: Limit) -> str:
    when = _TIMES.get(limit.statistic, limit.statistic.value)
    return f"{_BOUNDS[limit.bound, limit.broken_by]} {limit.value} {when}"


def _source(limit: Limit) -> str:
    where = f", {limit.written_at}" if limit.written_at else ""
    return f"{limit.authority}: {limit.document}{where}"


def _notes(verdict: Verdict, results: Mapping[int, Result]) -> tuple[str, ...]:
    reason = (verdict.reason,) if verdict.outcome in (Outcome.OVER, Outcome.UNDETERMINED) else ()
    fractions = {results[row].fraction for row in verdict.results} - {verdict.limit.fraction}
    read_as = tuple(f"the reading is of {fraction}" for fraction in sorted(fractions))
    return (*reason, *(() if reason else read_as), *verdict.notes)


def _origin(cargo: Cargo, origin: Origin, site: Site) -> OriginRow:
    return OriginRow(
        container=cargo.contents.container.code,
        wash=origin.wash.code,
        washed_on=local_day(origin.wash.performed_at, site).isoformat(),
        engine=origin.wash.engine,
        kind=origin.wash.kind.value,
        cleaner=origin.cleaner_type.value if origin.cleaner_type else "none",
        volume=litres(origin.volume_l),
    )


def _state_note(reading: Reading, manifest: Manifest, cargos: Sequence[Cargo]) -> str:
    if manifest.state is ManifestState.DRAFT:
        missing = len(missing_links(reading, manifest, cargos))
        links = f"{missing} link{'s' if missing != 1 else ''}"
        return f"Cannot be issued yet: {links} of the chain missing." if missing else ""
    said = [_said(version) for version in reading.versions("manifest", manifest.code)]
    return " ".join(sentence for sentence in dict.fromkeys(said) if sentence)


def _said(version: Version) -> str:
    """Return what the paper says of a version that issued, accepted, returned or voided the manifest."""
    manifest: Manifest = version.value
    if manifest.state is ManifestState.VOID:
        return f"Void since {version.entry.recorded_at[:10]} (UTC): {plainly(version.entry.reason)}."
    if manifest.state is ManifestState.RETURNED:
        return f"Signed copy came back on {manifest.returned_on}, signed by {manifest.signed_by}."
    if manifest.accepted_on is not None:
        return f"The first carrier accepted the load on {manifest.accepted_on}."
    accepted = accepted_because(version.entry.reason) if manifest.state is ManifestState.ISSUED else ""
    return (
        f"Questioned at issue (a verdict of annex A or a quantity), and accepted: {accepted}."
        if accepted
        else ""
    )


def check_target(target: str) -> None:
    """Refuse a place where no new file can be made, before anything else is done.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
    """
    path = Path(target)
    refuse_taken(path)
    if not os.access(path.absolute().parent, os.W_OK):
        raise StorageFailed(path, "the folder takes no new file")
