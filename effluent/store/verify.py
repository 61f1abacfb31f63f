"""Whether a ledger still is what its digests say, and if not, where it first departs."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from sqlalchemy import Connection, inspect, select, text

from effluent.store.base import Base, EntryRow, LedgerRow
from effluent.store.digest import GENESIS, contents_text, entry_digest, read_contents
from effluent.store.noun import table_of
from effluent.store.reading import Entry
from effluent.store.span import Finding, Rows, Span, check_spans

__all__ = ["Finding", "number_of", "verify"]

_ENTRY = table_of(EntryRow)
_KINDS = (  # what is named first when an entry has several faults
    "missing entry",
    "reordered",
    "changed entry",
    "missing row",
    "added row",
    "changed row",
)
_GUARD = {"guard": "%RAISE(ABORT, 'the ledger is append-only')%"}


def verify(connection: Connection, *, older: bool = False) -> tuple[Finding, ...]:
    """Check every entry and every row.

    Parameters
    ----------
    connection : sqlalchemy.Connection
        With a transaction of its own, so that all of it sees one state.
    older : bool
        Whether the schema is an earlier one, which need not have every table of this version.

    Returns
    -------
    tuple of Finding
        What does not hold: the earliest entry first, the ledger as a whole last.
    """
    entries = [Entry(*row) for row in connection.execute(select(_ENTRY).order_by(_ENTRY.c.sequence))]
    known = [entry.sequence for entry in entries]
    spans = _spans(entries)
    present = _tables(connection)
    expected = set(spans) if older else set(spans) | set(Base.metadata.tables)
    findings = [*_check_entries(entries), *_check_guards(connection, present)]
    findings.extend(Finding(0, "missing table", name) for name in sorted(expected - present))
    for table in sorted(present - {_ENTRY.name}):
        findings.extend(check_spans(Rows(connection, table), spans.get(table, []), known))
    return tuple(sorted(set(findings), key=_urgency))


def number_of(connection: Connection) -> str:
    """Return the ledger's number, or nothing where even that is gone."""
    ledger = table_of(LedgerRow)
    found = connection.execute(select(ledger.c.number).order_by(ledger.c.row).limit(1)).scalar()
    return str(found or "")


def _urgency(finding: Finding) -> tuple[bool, int, int, str]:
    rank = _KINDS.index(finding.kind) if finding.kind in _KINDS else len(_KINDS)
    return finding.entry == 0, finding.entry, rank, finding.detail


def _tables(connection: Connection) -> set[str]:
    """Return the tables of a ledger that are there; whatever else is in the database is not ours."""
    found = inspect(connection).get_multi_columns()
    own = {_ENTRY.name}
    for (_, name), columns in found.items():
        if [column["name"] for column in columns[:2]] == ["row", "entry"]:
            own.add(name)
    return own


def _spans(entries: list[Entry]) -> Mapping[str, list[Span]]:
    spans: dict[str, list[Span]] = {}
    for entry in entries:
        for brought in read_contents(entry.contents):
            spans.setdefault(brought.table, []).append(Span(entry.sequence, brought))
    return spans


def _check_entries(entries: list[Entry]) -> Iterator[Finding]:
    by_digest = {entry.digest: entry.sequence for entry in entries}
    previous, expected = GENESIS, 1
    if not entries:
        yield Finding(1, "missing entry", "the ledger holds no entry at all")
    for entry in entries:
        if entry.sequence > expected:
            for missing in range(expected, min(entry.sequence, expected + 10)):
                yield Finding(missing, "missing entry", f"after the gap comes entry {entry.sequence}")
        elif entry.sequence < expected:
            yield Finding(0, "changed entry", f"one is numbered {entry.sequence}")
        elif entry.previous_digest != previous:
            yield _out_of_line(entry, by_digest)
        yield from _check_header(entry)
        previous, expected = entry.digest, entry.sequence + 1


def _check_header(entry: Entry) -> Iterator[Finding]:
    brought = read_contents(entry.contents)
    if contents_text(brought) != entry.contents or any(part.rows < 1 or not part.table for part in brought):
        yield Finding(entry.sequence, "changed entry", "what it says it brought cannot be read")
    if not all(isinstance(value, str) for value in entry[1:]) or entry_digest(entry[:-1]) != entry.digest:
        yield Finding(entry.sequence, "changed entry", "its header does not give its digest")


def _out_of_line(entry: Entry, by_digest: Mapping[str, int]) -> Finding:
    after = by_digest.get(entry.previous_digest)
    if after is None:
        return Finding(entry.sequence, "changed entry", "it follows a digest that no entry has")
    return Finding(entry.sequence, "reordered", f"by its digest it follows entry {after}")


def _check_guards(connection: Connection, present: set[str]) -> Iterator[Finding]:
    """Look for the triggers that refuse changes; a ledger without them is open to them."""
    if connection.dialect.name == "sqlite":
        query = "SELECT name FROM sqlite_master WHERE type = 'trigger' AND sql LIKE :guard"
        wanted = {f"tr_{name}_{change}" for name in present for change in ("update", "delete", "replace")}
    else:
        query = "SELECT tgname FROM pg_trigger WHERE tgenabled IN ('O', 'A')"
        wanted = {f"tr_{name}_change" for name in present}
    found = {str(name) for name in connection.execute(text(query), _GUARD).scalars()}
    if missing := sorted(wanted - found):
        yield Finding(0, "unguarded", f"triggers that refuse changes are gone: {', '.join(missing)}")
