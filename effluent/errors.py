"""Everything that can go wrong in front of a user, as one tree.

::

    EffluentError
    ├── InputError       E1xx  exit 2  HTTP 400   what was typed or read in does not hold
    │   ├── ValueRefused     E101  one value, named, with the remedy
    │   ├── UnitUnknown      E102  a unit that nobody here can read
    │   ├── UnitMismatch     E103  two units of different kinds
    │   ├── FileRefused      E104  a file with bad rows; nothing of it was recorded
    │   ├── Questioned       E105  plausible only with a reason; nothing was recorded
    │   ├── NotComputed      E106  a rule the model holds but this version cannot compute
    │   └── NotPrintable     E107  a character no shipped font can print
    ├── NotFoundError    E2xx  exit 3  HTTP 404
    │   ├── RecordMissing    E201  no record of that noun and code
    │   └── FileMissing      E202  no such file or folder
    ├── ConflictError    E3xx  exit 4  HTTP 409   sound in itself, but the ledger says otherwise
    │   ├── AlreadyRecorded  E301  that code, file or result is on record
    │   ├── WouldOverwrite   E302  a file is in the way
    │   ├── ChainBroken      E303  a link between wash, container, sample, verdict is missing
    │   ├── VolumeRefused    E304  a container would overflow or run below empty
    │   └── StateRefused     E305  the record is in a state that forbids this
    └── StoreError       E4xx  exit 5  HTTP 503   the ledger itself
        ├── NotALedger       E401
        ├── SchemaOlder      E402
        ├── SchemaNewer      E403
        ├── LedgerBusy       E404
        ├── LedgerDamaged    E405
        ├── StorageFailed    E406  disk full, read-only folder, file cannot be written
        └── ServerMissing    E407  a database server or its driver cannot be reached

A face prints ``code: text`` and leaves with ``exit_status``; a bug stays a builtin exception.
"""

from __future__ import annotations

from typing import ClassVar, NamedTuple

__all__ = [
    "AlreadyRecorded",
    "ChainBroken",
    "ConflictError",
    "EffluentError",
    "FileMissing",
    "FileRefused",
    "InputError",
    "LedgerBusy",
    "LedgerDamaged",
    "NotALedger",
    "NotComputed",
    "NotFoundError",
    "NotPrintable",
    "Questioned",
    "RecordMissing",
    "RowError",
    "SchemaNewer",
    "SchemaOlder",
    "ServerMissing",
    "StateRefused",
    "StorageFailed",
    "StoreError",
    "UnitMismatch",
    "UnitUnknown",
    "ValueRefused",
    "VolumeRefused",
    "WouldOverwrite",
]


class EffluentError(Exception):
    """Base of the tree; arguments stay readable as ``args`` and the error can be pickled."""

    code: ClassVar[str] = "E000"
    exit_status: ClassVar[int] = 2
    http_status: ClassVar[int] = 400
    template: ClassVar[str] = "{0}"

    def __str__(self) -> str:
        return self.template.format(*self.args)


class InputError(EffluentError):
    """What was typed or read in does not hold."""


class ValueRefused(InputError, ValueError):
    """One value is wrong: ``ValueRefused(what, value, remedy)``."""

    code = "E101"
    template = "{0} {1!r} is not accepted: {2}"


class UnitUnknown(InputError, ValueError):
    """A unit nobody here can read: ``UnitUnknown(unit, remedy)``."""

    code = "E102"
    template = "unit {0!r} is not known: {1}"


class UnitMismatch(InputError, ValueError):
    """Two units of different kinds: ``UnitMismatch(unit, wanted, remedy)``."""

    code = "E103"
    template = "{0!r} cannot be converted to {1!r}: {2}"


class RowError(NamedTuple):
    """One bad cell of a file."""

    row: int
    column: str
    value: str
    reason: str

    def __str__(self) -> str:
        return f"row {self.row}, {self.column} {self.value!r}: {self.reason}"


class FileRefused(InputError):
    """A file with bad rows: ``FileRefused(name, rows, more)``.

    ``rows`` is a tuple of `RowError`; ``more`` counts bad cells beyond those. The text shows the first
    fifty, so that it can be read.
    """

    code = "E104"
    shown: ClassVar[int] = 50

    @property
    def rows(self) -> tuple[RowError, ...]:
        """The bad cells, in the order of the file."""
        rows: tuple[RowError, ...] = self.args[1]
        return rows

    def __str__(self) -> str:
        count = len(self.rows) + sum(self.args[2:])
        heading = f"{self.args[0]}: {count} bad cell{'s' if count != 1 else ''}; nothing was recorded"
        rest = count - min(len(self.rows), self.shown)
        more = [f"  and {rest} more; mend these first, and import again"] if rest else []
        return "\n".join([heading, *(f"  {row}" for row in self.rows[: self.shown]), *more])


class Questioned(InputError):
    """Plausible only with a reason: ``Questioned(questions, remedy)`` with a tuple of sentences."""

    code = "E105"

    @property
    def questions(self) -> tuple[str, ...]:
        """What is questioned, one sentence each."""
        questions: tuple[str, ...] = self.args[0]
        return questions

    def __str__(self) -> str:
        return "\n".join(
            ["questioned, nothing was recorded:", *(f"  - {q}" for q in self.questions), str(self.args[1])]
        )


class NotComputed(InputError):
    """A rule the model holds but this version cannot compute: ``NotComputed(what, remedy)``."""

    code = "E106"
    template = "{0} is not computed by this version: {1}"


class NotPrintable(InputError):
    """A character no shipped font can print: ``NotPrintable(character, text)``."""

    code = "E107"
    template = "the character {0!r} in {1!r} cannot be printed with the fonts on board; spell it otherwise"


class NotFoundError(EffluentError):
    """Something named does not exist."""

    exit_status = 3
    http_status = 404


class RecordMissing(NotFoundError, LookupError):
    """No record of that noun and code: ``RecordMissing(noun, code, remedy)``."""

    code = "E201"
    template = "no {0} {1!r} in this ledger: {2}"


class FileMissing(NotFoundError):
    """No such file or folder: ``FileMissing(path, remedy)``."""

    code = "E202"
    template = "{0} is not there: {1}"


class ConflictError(EffluentError):
    """Sound in itself, but the ledger says otherwise."""

    exit_status = 4
    http_status = 409


class AlreadyRecorded(ConflictError):
    """On record already: ``AlreadyRecorded(what, remedy)``."""

    code = "E301"
    template = "{0} is already on record: {1}"


class WouldOverwrite(ConflictError):
    """A file is in the way: ``WouldOverwrite(path)``."""

    code = "E302"
    template = "{0} exists and is never overwritten; name another place or move it away first"


class ChainBroken(ConflictError):
    """A link is missing: ``ChainBroken(what, missing)`` with a tuple of sentences."""

    code = "E303"

    @property
    def missing(self) -> tuple[str, ...]:
        """The missing links, one sentence each."""
        missing: tuple[str, ...] = self.args[1]
        return missing

    def __str__(self) -> str:
        return "\n".join(
            [f"{self.args[0]} is refused, the chain is broken:", *(f"  - {m}" for m in self.missing)]
        )


class VolumeRefused(ConflictError):
    """A container would overflow or run below empty: ``VolumeRefused(container, reason)``."""

    code = "E304"
    template = "container {0}: {1}"


class StateRefused(ConflictError):
    """The record's state forbids this: ``StateRefused(what, state, remedy)``."""

    code = "E305"
    template = "{0} is {1}: {2}"


class StoreError(EffluentError):
    """The ledger itself cannot be used."""

    exit_status = 5
    http_status = 503


class NotALedger(StoreError):
    """Not a ledger: ``NotALedger(place, remedy)``."""

    code = "E401"
    template = "{0} is not an effluent ledger: {1}"


class SchemaOlder(StoreError):
    """An older schema: ``SchemaOlder(place, found, wanted)``."""

    code = "E402"
    template = (
        "{0} has the older schema {1}, this version needs {2}; run: effluent ledger upgrade --ledger {0} "
        "(it makes a backup first)"
    )


class SchemaNewer(StoreError):
    """A newer schema: ``SchemaNewer(place, found)``."""

    code = "E403"
    template = "{0} has the schema {1}, which this version does not know; install a newer effluent"


class LedgerBusy(StoreError):
    """Somebody else is writing: ``LedgerBusy(place)``."""

    code = "E404"
    template = "{0} is being written by another process; nothing was recorded, try again in a moment"


class LedgerDamaged(StoreError):
    """The file is broken: ``LedgerDamaged(place, reason)``."""

    code = "E405"
    template = "{0} is damaged ({1}); keep the file, and restore the last backup: effluent ledger restore"


class StorageFailed(StoreError):
    """Disk full, read-only folder, file cannot be written: ``StorageFailed(place, reason, state)``.

    ``state`` says what is on record; left out, nothing is.
    """

    code = "E406"
    template = "{0} cannot be written ({1}); {2}"

    def __str__(self) -> str:
        place, reason, *state = self.args
        return self.template.format(place, reason, *state or ["nothing was recorded"])


class ServerMissing(StoreError):
    """A database server or its driver cannot be reached: ``ServerMissing(place, reason)``."""

    code = "E407"
    template = "{0} cannot be reached ({1})"
