"""What every table of a ledger shares: typed columns, the entry that brought a row, versions.

``record`` gives each thing one stable key (``wash/W-0001``); the table of its noun holds its versions.
"""

from __future__ import annotations

from typing import Any

from sqlalchemy import CheckConstraint, ForeignKey, MetaData, UniqueConstraint
from sqlalchemy.orm import DeclarativeBase, Mapped, declared_attr, mapped_column

from effluent.store.column import REAL_NUMBER, TEXT, WHOLE

__all__ = ["APPLICATION_ID", "Base", "Brings", "EntryRow", "LedgerRow", "RecordRow", "Versioned", "refers"]

APPLICATION_ID = 0x45464C55  # "EFLU", in the header of the SQLite file


class Base(DeclarativeBase):
    """Typed columns, named constraints, strict tables."""

    metadata = MetaData(
        naming_convention={
            "pk": "pk_%(table_name)s",
            "fk": "fk_%(table_name)s_%(column_0_N_name)s",
            "uq": "uq_%(table_name)s_%(column_0_N_name)s",
            "ix": "ix_%(table_name)s_%(column_0_N_name)s",
            "ck": "ck_%(table_name)s_%(constraint_name)s",
        }
    )
    type_annotation_map = {str: TEXT, int: WHOLE, float: REAL_NUMBER}  # noqa: RUF012
    __table_args__: Any = {"sqlite_strict": True}  # noqa: RUF012


def refers(noun: str, *, optional: bool = False) -> Any:
    """Return a column that holds the key of a record of that noun."""
    return mapped_column(
        ForeignKey("record.key", ondelete="RESTRICT"), info={"noun": noun}, nullable=optional
    )


class EntryRow(Base):
    """One write transaction: who, when, why, what it brought, and the chain of digests."""

    __tablename__ = "entry"
    sequence: Mapped[int] = mapped_column(primary_key=True, autoincrement=False)
    recorded_at: Mapped[str]
    recorded_by: Mapped[str]
    action: Mapped[str]
    reason: Mapped[str]
    contents: Mapped[str]
    previous_digest: Mapped[str]
    digest: Mapped[str]
    __table_args__ = (UniqueConstraint("digest"), {"sqlite_strict": True})


class Brings:
    """A row that an entry brought; row numbers of a table run from 1 without a gap.

    ``entry`` is no foreign key: the entry is written last, so the key would be deferred, and SQLite would
    look through every row of every table at each commit. The entry's digest holds its rows instead.
    """

    row: Mapped[int] = mapped_column(primary_key=True, autoincrement=False, sort_order=-10)

    entry: Mapped[int] = mapped_column(sort_order=-9)


class LedgerRow(Brings, Base):
    """The ledger's own number and format, brought by its first entry."""

    __tablename__ = "ledger"
    number: Mapped[str]
    format: Mapped[int]


class RecordRow(Brings, Base):
    """The stable identity of a thing."""

    __tablename__ = "record"
    key: Mapped[str]
    noun: Mapped[str]
    __table_args__ = (
        UniqueConstraint("key"),
        CheckConstraint("key LIKE noun || '/_%'", name="key"),
        {"sqlite_strict": True},
    )


class Versioned(Brings):
    """One version of a record; the highest version is what holds."""

    @declared_attr
    def key(cls) -> Mapped[str]:  # noqa: N805
        """Return the column with the record's key."""
        return mapped_column(ForeignKey("record.key", ondelete="RESTRICT"), sort_order=-8)

    version: Mapped[int] = mapped_column(sort_order=-7)
    voided: Mapped[int] = mapped_column(sort_order=-6)

    @declared_attr.directive
    def __table_args__(cls) -> Any:  # noqa: N805
        return (
            UniqueConstraint("key", "version"),
            CheckConstraint("version >= 1", name="version"),
            CheckConstraint("voided IN (0, 1)", name="voided"),
            {"sqlite_strict": True},
        )
