"""Making, checking, copying and upgrading a ledger."""

from __future__ import annotations

import os
import re
import secrets
from datetime import UTC, datetime
from typing import Any, NamedTuple

from effluent.domain import Person
from effluent.errors import AlreadyRecorded, FileMissing, LedgerDamaged, RecordMissing, ValueRefused
from effluent.store.backup import appearing, copy_ledger
from effluent.store.database import connect, finish, initialise, is_server, open_existing, shown
from effluent.store.digest import read_contents
from effluent.store.ledger import Clock, Ledger, view
from effluent.store.migration import check_schema, head_revision, is_older, migrate, revision_of
from effluent.store.reading import Entry, Reading
from effluent.store.verify import Finding, number_of, verify
from effluent.store.writing import Writing

__all__ = [
    "Report",
    "backup",
    "brought_by",
    "create",
    "history",
    "now",
    "open_ledger",
    "prove",
    "restore",
    "upgrade",
]


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
        engine = connect(place)
        if revision_of(engine, place) is None:
            migrate(engine, place)
        _first_entry(Ledger(engine, place, clock=clock), person, number)
        return number
    with appearing(place) as unfinished:
        engine = connect(str(unfinished))
        initialise(engine, place)
        migrate(engine, place)
        _first_entry(Ledger(engine, place, clock=clock), person, number)
        finish(engine, place)
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
    LedgerDamaged
        If the ledger does not verify; nothing is changed then.
    """
    engine, wanted = open_existing(place), head_revision()
    if not is_older(engine, place):
        return wanted, ""
    if is_server(place):
        copy = ""
        if not backed_up:
            raise ValueRefused(
                "ledger", shown(place), "back it up with the server's tools, then say --backed-up"
            )
    else:
        copy = f"{place}.before-{wanted}"
        copy_ledger(place, copy, check=lambda made: _need_sound(made, place), journal="DELETE")
    migrate(engine, place)
    return wanted, copy


def prove(ledger: Ledger, *, witness: str = "") -> Report:
    """Verify a ledger, and that it still holds the entry a printed page witnesses.

    Parameters
    ----------
    witness : str
        ``ENTRY:DIGEST`` as printed on a page; the digest may be shortened to 12 or more characters.
    """
    expected = _read_witness(witness) if witness else None
    with ledger.connection() as connection:
        return _report(connection, expected)


def history(ledger: Ledger, *, as_of: str | None = None) -> tuple[Entry, ...]:
    """Return the entries, oldest first."""
    with ledger.reading(as_of) as reading:
        return reading.entries()


def brought_by(entry: Entry) -> dict[str, int]:
    """Return how many rows an entry brought to each table."""
    return {brought.table: brought.rows for brought in read_contents(entry.contents)}


def backup(ledger: Ledger, target: str) -> Entry:
    """Copy a ledger while it is in use; return the newest entry of the copy."""
    copy_ledger(ledger.place, target, journal="DELETE")
    with open_ledger(target) as copy:
        return copy.head()


def restore(source: str, target: str) -> Report:
    """Put a copy of a backup in a new place, if the copy verifies.

    Raises
    ------
    LedgerDamaged
        If it does not verify; nothing is restored then.
    FileMissing
        If there is no such backup.
    """
    if not is_server(source):
        if not os.path.exists(source):
            raise FileMissing(source, "name the file that effluent ledger backup wrote")
        is_older(open_existing(source), source)
    reports: list[Report] = []
    copy_ledger(source, target, check=lambda made: reports.append(_need_sound(made, source)))
    return reports[0]


def _need_sound(copy: str, place: str) -> Report:
    engine = connect(copy)
    older = is_older(engine, place)
    with Ledger(engine, place, clock=now).connection() as connection:
        report = _report(connection, older=older)
    if report.findings:
        raise LedgerDamaged(place, f"it does not verify: {report.findings[0]}")
    return report


def _report(connection: Any, witness: tuple[int, str] | None = None, *, older: bool = False) -> Report:
    findings = verify(connection, older=older)
    reading = view(connection)
    if witness:
        findings = (*findings, *_against_witness(reading, *witness))
    digest = reading.head.digest if reading.as_of else ""
    return Report(number_of(connection), reading.as_of, digest, findings)


def _first_entry(ledger: Ledger, person: Person, number: str) -> None:
    def job(writing: Writing) -> None:
        if writing.as_of > 1:
            raise AlreadyRecorded(f"a ledger in {shown(ledger.place)}", "name another database")
        writing.number_ledger(number)
        writing.record(person)

    ledger.write(job, by=person.code, action="create ledger")


def _read_witness(witness: str) -> tuple[int, str]:
    sequence, _, digest = witness.strip().partition(":")
    if not re.fullmatch("[0-9]{1,18}", sequence) or not re.fullmatch("[0-9a-fA-F]{12,64}", digest):
        raise ValueRefused(
            "witness", witness, "write ENTRY:DIGEST as printed, at least 12 characters of the digest"
        )
    return int(sequence), digest.lower()


def _against_witness(reading: Reading, sequence: int, digest: str) -> tuple[Finding, ...]:
    try:
        entry = reading.entry(sequence)
    except RecordMissing:
        return (Finding(sequence, "missing entry", "a page witnesses it"),)
    if not entry.digest.startswith(digest):
        return (Finding(sequence, "changed entry", "its digest is not the one on the page"),)
    return ()
