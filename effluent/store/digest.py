"""The canonical form that is digested; ``docs/ledger-format.md`` states it for strangers.

Rows of one table are digested as the compact JSON array of their value arrays, in the order of their row
numbers and columns; an entry as the compact JSON array of its header, which holds the digests of its rows.
The header states the number of columns too: one that a later version adds comes last and stays outside.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Sequence
from typing import NamedTuple

from effluent.store.column import Plain

__all__ = ["GENESIS", "Brought", "RowDigest", "contents_text", "entry_digest", "read_contents"]

GENESIS = "0" * 64


class RowDigest:
    """The running digest of the rows that one entry brings to one table."""

    def __init__(self) -> None:
        self._hash = hashlib.sha256(b"[")
        self.count = 0
        self.columns = 0

    def update(self, rows: Sequence[Sequence[Plain]]) -> None:
        """Take in further rows."""
        if rows:
            self._hash.update((b"," if self.count else b"") + _compact(rows)[1:-1])
            self.count += len(rows)
            self.columns = len(rows[0])

    def hexdigest(self) -> str:
        """Return the digest of the rows so far."""
        closed = self._hash.copy()
        closed.update(b"]")
        return closed.hexdigest()


class Brought(NamedTuple):
    """What an entry brought to one table."""

    table: str
    first_row: int
    rows: int
    columns: int
    digest: str


def contents_text(brought: Iterable[Brought]) -> str:
    """Return the contents column of an entry, tables in alphabetical order."""
    return _compact([list(part) for part in sorted(brought)]).decode("ascii")


def read_contents(text: str) -> tuple[Brought, ...]:
    """Return what an entry's contents column says; a text that says nothing gives no parts."""
    try:
        return tuple(Brought(str(t), int(f), int(n), int(c), str(d)) for t, f, n, c, d in json.loads(text))
    except (ValueError, TypeError, RecursionError):
        return ()


def entry_digest(header: Sequence[Plain]) -> str:
    """Return the digest of an entry: every column but the digest itself, in order."""
    return hashlib.sha256(_compact(header)).hexdigest()


def _compact(value: object) -> bytes:
    return json.dumps(value, separators=(",", ":"), allow_nan=False).encode("ascii")
