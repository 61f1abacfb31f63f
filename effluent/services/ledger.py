"""Making, checking, copying and upgrading a ledger."""

from __future__ import annotations

import os
import secrets
from datetime import UTC, datetime
from pathlib import Path
from typing import NamedTuple

from effluent.domain import Person
from effluent.errors import AlreadyRecorded, FileMissing, LedgerDamaged, ValueRefused, WouldOverwrite
from effluent.store.backup import copy_ledger
from effluent.store.database import connect, initialise, is_server, open_existing, shown
from effluent.store.ledger import Clock, Ledger
from effluent.store.migration import check_schema, head_revision, migrate, revision_of
from effluent.store.reading import Entry
from effluent.store.verify import Finding, verify
from effluent.store.writing import Writing

__all__ = ["Report", "backup", "create", "history", "now", "open_ledger", "prove", "restore", "upgrade"]


class Report(NamedTuple):
    """What a verification found; no findings means that everything holds."""

    number: str
    entries: int
    digest: str
    findings: tuple[Finding, ...]


def now() -> datetime:
    """Return the present instant."""
    return datetime.now(UTC)


def create(place: str, person: Person, *, number: str = "", clock: Clock = now) -> str:
    """Make a new ledger with its first person, and return its number.

    Raises
    ------
    WouldOverwrite, AlreadyRecorded
        If there is something at that place.
    """
    number = number or secrets.token_hex(6)
    if is_server(place):
        _create_on_server(place, person, number, clock)
        return number
    path = Path(place)
    if path.exists():
        raise WouldOverwrite(path)
    if not path.absolute().parent.is_dir():
        raise FileMissing(path.absolute().parent, "make the folder first")
    unfinished = path.with_name(f".{path.name}.{os.getpid()}.new")
    try:
        _fill_new(str(unfinished), person, number, clock)
        copy_ledger(str(unfinished), place)
    finally:
        for leftover in path.parent.glob(f"{unfinished.name}*"):
            leftover.unlink()
    return number


def open_ledger(place: str, *, clock: Clock = now) -> Ledger:
    """Open a ledger that is there and has the schema of this version."""
    engine = open_existing(place)
    check_schema(engine, place)
    return Ledger(engine, place, clock=clock)


def upgrade(place: str, *, backed_up: bool = False) -> tuple[str, str]:
    """Bring an older ledger to this version's schema; return the revision and the backup made first.

    Raises
    ------
    ValueRefused
        If the ledger is on a database server and nobody says that it was backed up.
    """
    engine = open_existing(place)
    found, wanted = revision_of(engine, place), head_revision()
    if found == wanted:
        return wanted, ""
    if is_server(place):
        if not backed_up:
            raise ValueRefused(
                "ledger", shown(place), "back it up with the server's tools, then say --backed-up"
            )
        copy = ""
    else:
        copy = f"{place}.before-{wanted}"
        copy_ledger(place, copy)
    migrate(engine, place)
    engine.dispose()
    return wanted, copy


def prove(ledger: Ledger, *, witness: str = "") -> Report:
    """Verify a ledger, and that it still holds the entry a printed page witnesses.

    Parameters
    ----------
    witness : str
        ``ENTRY:DIGEST`` as printed on a page; the digest may be shortened to 12 or more characters.
    """
    with ledger.connection() as connection:
        findings = verify(connection)
    with ledger.reading() as reading:
        head, number = (reading.head, reading.ledger_number) if reading.as_of else (None, "")
        if witness and head:
            findings = (*findings, *_against_witness(reading.entries(), witness))
    return Report(number, head.sequence if head else 0, head.digest if head else "", findings)


def history(ledger: Ledger, *, as_of: str | None = None) -> tuple[Entry, ...]:
    """Return the entries, oldest first."""
    with ledger.reading(as_of) as reading:
        return reading.entries()


def backup(ledger: Ledger, target: str) -> Entry:
    """Copy a ledger while it is in use; return the newest entry of the copy."""
    copy_ledger(ledger.place, target)
    with open_ledger(target) as copy:
        return copy.head()


def restore(source: str, target: str) -> Report:
    """Verify a backup and put a copy of it in a new place.

    Raises
    ------
    LedgerDamaged
        If the backup does not verify; nothing is restored then.
    """
    with open_ledger(source) as ledger:
        report = prove(ledger)
    if report.findings:
        raise LedgerDamaged(source, f"it does not verify: {report.findings[0]}")
    copy_ledger(source, target)
    return report


def _create_on_server(place: str, person: Person, number: str, clock: Clock) -> None:
    engine = connect(place)
    if revision_of(engine, place) is not None:
        raise AlreadyRecorded(f"a ledger in {shown(place)}", "name another database")
    migrate(engine, place)
    with Ledger(engine, place, clock=clock) as ledger:
        _first_entry(ledger, person, number)


def _fill_new(place: str, person: Person, number: str, clock: Clock) -> None:
    engine = connect(place)
    initialise(engine, place)
    migrate(engine, place)
    with Ledger(engine, place, clock=clock) as ledger:
        _first_entry(ledger, person, number)


def _first_entry(ledger: Ledger, person: Person, number: str) -> None:
    def job(writing: Writing) -> None:
        writing.number_ledger(number)
        writing.record(person)

    ledger.write(job, by=person.code, action="create ledger")


def _against_witness(entries: tuple[Entry, ...], witness: str) -> tuple[Finding, ...]:
    sequence, _, digest = witness.partition(":")
    if not sequence.isdecimal() or len(digest) < 12:
        raise ValueRefused(
            "witness", witness, "write ENTRY:DIGEST as printed, at least 12 characters of the digest"
        )
    number = int(sequence)
    if not 1 <= number <= len(entries):
        return (Finding(number, "missing entry", "a page witnesses it"),)
    if not entries[number - 1].digest.startswith(digest.lower()):
        return (Finding(number, "changed entry", "its digest is not the one on the page"),)
    return ()
