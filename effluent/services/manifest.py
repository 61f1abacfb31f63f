"""Disposal manifests: drafted, changed, issued, accepted by the carrier, returned signed, voided."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Mapping, Sequence
from dataclasses import replace
from datetime import date, datetime
from pathlib import Path
from typing import NamedTuple

from effluent.domain import Manifest, ManifestLine, ManifestState, Site
from effluent.errors import ChainBroken, FileMissing, RecordMissing, StateRefused, ValueRefused
from effluent.services.load import doubts, prepared
from effluent.services.moment import local_day
from effluent.services.question import answer
from effluent.services.register import need_reason
from effluent.services.release import Cargo, adverse, cargos_of, filled_at, missing_links
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading, Version
from effluent.store.writing import Writing

__all__ = [
    "Listed",
    "Shown",
    "accepted",
    "add_lines",
    "amend",
    "draft",
    "issue",
    "listing",
    "remove_lines",
    "returned",
    "show",
    "void",
]

_FIXED = {"code", "state", "issued_on", "accepted_on", "returned_on", "signed_by", "signed_copy"}


class Shown(NamedTuple):
    """A manifest as it stands, how it came to be so, and what a draft still lacks or leaves in doubt."""

    value: Manifest
    versions: tuple[Version, ...]
    missing: tuple[str, ...]
    doubts: tuple[str, ...]


class Listed(NamedTuple):
    """A manifest, and for one that is out how many days ago it was issued."""

    manifest: Manifest
    days_out: int | None


def draft(ledger: Ledger, manifest: Manifest, *, by: str, reason: str = "", accept: str = "") -> str:
    """Record a new draft and return its number.

    A line whose quantity is `effluent.services.load.proposed` gets what its container holds on record, in
    whole units; an emergency contact that is not given is the site's.

    Raises
    ------
    RecordMissing, ValueRefused, UnitUnknown, StateRefused
        If it contradicts the records or the form.
    Questioned
        If something is implausible and nobody accepted it.
    NotPrintable
        If its paper could not be printed.
    """
    from effluent.services.sheet import check_printable  # what draws pages loads slowly

    if manifest.state is not ManifestState.DRAFT:
        raise ValueRefused("state", manifest.state.value, "a manifest begins as a draft")
    with ledger.reading() as reading:
        check_printable(reading, prepared(reading, manifest), remark="")

    def job(writing: Writing) -> str:
        complete = prepared(writing, manifest)
        answer(writing, doubts(writing, complete), accept=accept)
        return writing.record(complete)

    return ledger.write(job, by=by, action="draft manifest", reason=reason)


def add_lines(
    ledger: Ledger, code: str, lines: Sequence[ManifestLine], *, by: str, reason: str = "", accept: str = ""
) -> None:
    """Add lines to a draft; a container that is on it already gets its new line in the old place.

    Raises
    ------
    As for `draft`.
    """
    new = {line.container: line for line in lines}

    def job(writing: Writing) -> None:
        old = _in_state(writing, code, ManifestState.DRAFT)
        standing = {line.container: line for line in old.lines}
        _change(writing, replace(old, lines=tuple((standing | new).values())), accept=accept)

    ledger.write(job, by=by, action="amend manifest", reason=reason)


def remove_lines(ledger: Ledger, code: str, containers: Sequence[str], *, by: str, reason: str = "") -> None:
    """Take containers off a draft.

    Raises
    ------
    RecordMissing
        If one is not on it.
    """

    def job(writing: Writing) -> None:
        old = _in_state(writing, code, ManifestState.DRAFT)
        for container in containers:
            if container not in [line.container for line in old.lines]:
                raise RecordMissing("container", container, f"it is not on manifest {code}")
        writing.amend(
            replace(old, lines=tuple(line for line in old.lines if line.container not in containers))
        )

    ledger.write(job, by=by, action="amend manifest", reason=reason)


def amend(
    ledger: Ledger, code: str, changes: Mapping[str, object], *, by: str, reason: str, accept: str = ""
) -> None:
    """Change a draft; the earlier version stays readable.

    Raises
    ------
    StateRefused
        If it is no draft any more.
    ValueRefused
        If nothing changes, no reason is given, or what changes has a use case of its own.
    """
    need_reason(reason, "amend")
    if own := _FIXED & set(changes):
        raise ValueRefused(
            "field", ", ".join(sorted(own)), "it follows from issuing, accepting and returning"
        )

    def job(writing: Writing) -> None:
        old = _in_state(writing, code, ManifestState.DRAFT)
        new = replace(old, **changes)  # type: ignore[arg-type]
        if new == old:
            raise ValueRefused("manifest", code, "nothing would change; name what to change")
        _change(writing, new, accept=accept)

    ledger.write(job, by=by, action="amend manifest", reason=reason)


def issue(ledger: Ledger, code: str, *, by: str, on: date | None = None, accept: str = "") -> None:
    """Issue a draft: from here on its containers are shipped and nothing in it changes.

    Raises
    ------
    ChainBroken
        If a link between wash, container, sample and verdict is missing, each named.
    Questioned
        If a verdict is over or undetermined, or a quantity implausible, and nobody accepted it.
    NotPrintable
        If its paper could not be printed.
    """
    from effluent.services.sheet import check_printable  # what draws pages loads slowly

    with ledger.reading() as reading:
        check_printable(reading, reading.value("manifest", code), remark=accept)

    def job(writing: Writing) -> None:
        manifest = _in_state(writing, code, ManifestState.DRAFT)
        cargos = cargos_of(writing, manifest)
        if missing := missing_links(writing, manifest, cargos):
            raise ChainBroken(f"issuing manifest {code}", missing)
        day = _day(writing, manifest, on, ledger.clock())
        _check_filled_before(cargos, day, writing.value("site", manifest.site))
        ready = prepared(writing, manifest)
        answer(writing, (*doubts(writing, ready), *adverse(cargos)), accept=accept)
        writing.amend(replace(ready, state=ManifestState.ISSUED, issued_on=day))

    ledger.write(job, by=by, action="issue manifest")


def accepted(ledger: Ledger, code: str, *, by: str, on: date) -> None:
    """Record the day on which the first carrier accepted the load.

    Raises
    ------
    StateRefused, ValueRefused
        If the manifest is not out, or the day lies before it was issued or in the future.
    """

    def job(writing: Writing) -> None:
        manifest = _in_state(writing, code, ManifestState.ISSUED)
        day = _after_issue(writing, manifest, on, ledger.clock())
        writing.amend(replace(manifest, accepted_on=day))

    ledger.write(job, by=by, action="accept manifest")


def returned(
    ledger: Ledger, code: str, *, by: str, on: date, signed_by: str, copy_path: str | None = None
) -> None:
    """Record that the signed copy is back; of a scan its SHA-256 is kept, not the scan.

    Raises
    ------
    StateRefused, ValueRefused
        If the manifest is not out, or the day lies before it was issued or in the future.
    FileMissing
        If the scan cannot be read.
    """
    if not signed_by.strip():
        raise ValueRefused("signed by", signed_by, "write the name on the signed copy")
    digest = _sha256(Path(copy_path)) if copy_path else ""

    def job(writing: Writing) -> None:
        manifest = _in_state(writing, code, ManifestState.ISSUED)
        day = _after_issue(writing, manifest, on, ledger.clock())
        if manifest.accepted_on is not None and day < manifest.accepted_on:
            raise ValueRefused("day", day.isoformat(), f"the carrier accepted it on {manifest.accepted_on}")
        back = {"returned_on": day, "signed_by": signed_by.strip(), "signed_copy": digest}
        writing.amend(replace(manifest, state=ManifestState.RETURNED, **back))  # type: ignore[arg-type]

    ledger.write(job, by=by, action="return manifest")


def void(ledger: Ledger, code: str, *, by: str, reason: str, accept: str = "") -> None:
    """Record that a manifest does not stand; its containers are free again, its paper says void.

    Raises
    ------
    StateRefused
        If it is void already.
    Questioned
        If a carrier has the load and `accept` is empty.
    """
    need_reason(reason, "void")

    def job(writing: Writing) -> None:
        manifest: Manifest = writing.value("manifest", code)
        if manifest.state is ManifestState.VOID:
            raise StateRefused(f"manifest {code}", "void", "there is nothing more to void")
        answer(writing, _left(manifest), accept=accept)
        writing.amend(replace(manifest, state=ManifestState.VOID))

    ledger.write(job, by=by, action="void manifest", reason=reason)


def _left(manifest: Manifest) -> tuple[str, ...]:
    """Return what is to be asked before a manifest is voided whose load has left, or was received."""
    if manifest.returned_on is not None:
        gone = f"its signed copy came back on {manifest.returned_on}"
    elif manifest.accepted_on is not None:
        gone = f"the first carrier accepted the load on {manifest.accepted_on}"
    else:
        return ()
    return (f"{gone}: a void sets its containers free in the ledger; are they back on the site?",)


def show(ledger: Ledger, code: str, *, as_of: str | None = None) -> Shown:
    """Return a manifest with its versions, and for a draft what it lacks before it can be issued."""
    with ledger.reading(as_of) as reading:
        versions = reading.versions("manifest", code)
        value: Manifest = versions[-1].value
        if value.state is not ManifestState.DRAFT:
            return Shown(value, versions, (), ())
        cargos = cargos_of(reading, value)
        missing = missing_links(reading, value, cargos)
        open_questions = () if missing else (*doubts(reading, value), *adverse(cargos))
        return Shown(value, versions, missing, open_questions)


def listing(ledger: Ledger, *, as_of: str | None = None) -> tuple[Listed, ...]:
    """Return the manifests, with the days since issue of those whose signed copy is not back."""
    with ledger.reading(as_of) as reading:
        now = ledger.clock() if as_of is None else datetime.fromisoformat(reading.head.recorded_at)
        return tuple(
            Listed(manifest, _days_out(reading, manifest, now)) for manifest in reading.values("manifest")
        )


def _days_out(reading: Reading, manifest: Manifest, now: datetime) -> int | None:
    if manifest.state is not ManifestState.ISSUED or manifest.issued_on is None:
        return None
    return (local_day(now, reading.value("site", manifest.site)) - manifest.issued_on).days


def _change(writing: Writing, new: Manifest, *, accept: str) -> None:
    complete = prepared(writing, new)
    answer(writing, doubts(writing, complete), accept=accept)
    writing.amend(complete)


_NEXT = {
    ManifestState.DRAFT: "issue it first: effluent manifest issue",
    ManifestState.ISSUED: "it cannot be changed; void it, or record its return",
    ManifestState.RETURNED: "it cannot be changed; a wrong one can be voided",
    ManifestState.VOID: "draft a new one",
}


def _in_state(writing: Writing, code: str, wanted: ManifestState) -> Manifest:
    manifest: Manifest = writing.value("manifest", code)
    if manifest.state is not wanted:
        raise StateRefused(f"manifest {code}", manifest.state.value, _NEXT[manifest.state])
    return manifest


def _day(reading: Reading, manifest: Manifest, on: date | None, now: datetime) -> date:
    today = local_day(now, reading.value("site", manifest.site))
    if on is not None and on > today:
        raise ValueRefused("day", on.isoformat(), f"it lies in the future; at the site it is {today}")
    return on or today


def _check_filled_before(cargos: Sequence[Cargo], day: date, site: Site) -> None:
    for cargo in cargos:
        last = filled_at(cargo.contents)
        if last is not None and local_day(last, site) > day:
            remedy = f"water went into container {cargo.contents.container.code} on {local_day(last, site)}"
            raise ValueRefused("day", day.isoformat(), remedy)


def _after_issue(reading: Reading, manifest: Manifest, on: date, now: datetime) -> date:
    if manifest.issued_on is not None and on < manifest.issued_on:
        raise ValueRefused("day", on.isoformat(), f"the manifest was issued on {manifest.issued_on}")
    return _day(reading, manifest, on, now)


def _sha256(path: Path) -> str:
    if os.path.exists(path) and not os.path.isfile(path):  # a pipe would keep us waiting
        raise FileMissing(path, "it is no file; name the scan of the signed copy")
    try:
        with path.open("rb") as scan:
            return hashlib.file_digest(scan, "sha256").hexdigest()
    except FileNotFoundError as error:
        raise FileMissing(path, "name the scan of the signed copy") from error
    except OSError as error:
        raise FileMissing(path, f"it cannot be read ({error.strerror})") from error
