"""Creating and upgrading the schema with the migrations that ship with the package."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path

from sqlalchemy import Engine, inspect, text

from effluent.errors import LedgerDamaged, NotALedger, SchemaNewer, SchemaOlder
from effluent.store.database import is_server, shown, translated, writes

__all__ = ["check_schema", "head_revision", "is_older", "known_revisions", "migrate", "revision_of"]

_REVISION = re.compile(r'^(down_)?revision = (?:"([^"]+)"|None)$', re.MULTILINE)


def _location() -> Path:
    package = Path(__file__).parent.parent
    shipped, checkout = package / "migrations", package.parent / "migrations"
    return shipped if shipped.is_dir() else checkout


def known_revisions() -> tuple[str, ...]:
    """Return every revision this version knows, oldest first."""
    return _revisions(_location())


@cache
def _revisions(location: Path) -> tuple[str, ...]:
    """Read the revisions off the migrations' text: every command asks, and Alembic takes long to load."""
    after: dict[str, str] = {}
    for path in (location / "versions").glob("*.py"):
        found = dict(_REVISION.findall(path.read_text(encoding="utf-8")))
        after[found["down_"]] = found[""]
    known = [after[""]]
    while known[-1] in after:
        known.append(after[known[-1]])
    return tuple(known)


def head_revision() -> str:
    """Return the schema revision this version writes."""
    return known_revisions()[-1]


def revision_of(engine: Engine, place: str) -> str | None:
    """Return the schema revision a database holds, or None if it holds no ledger."""
    with translated(place), engine.connect() as connection:
        if not inspect(connection).has_table("alembic_version"):
            return None
        found = connection.execute(text("SELECT version_num FROM alembic_version")).scalar()
        return None if found is None else str(found)


def check_schema(engine: Engine, place: str) -> None:
    """Refuse a ledger whose schema is not the one this version writes.

    Raises
    ------
    NotALedger, SchemaOlder, SchemaNewer
    """
    if is_older(engine, place):
        raise SchemaOlder(shown(place), revision_of(engine, place), head_revision())


def is_older(engine: Engine, place: str) -> bool:
    """Tell whether a ledger's schema is an earlier one than this version writes.

    Raises
    ------
    NotALedger, SchemaNewer
    """
    found = revision_of(engine, place)
    if found is None:
        raise NotALedger(shown(place), "it holds no ledger; make one with: effluent ledger create")
    if found not in known_revisions():
        raise SchemaNewer(shown(place), found)
    return found != head_revision()


def migrate(engine: Engine, place: str, revision: str = "head") -> None:
    """Bring a database to a revision, all or nothing.

    Foreign keys are off while SQLite tables may be rebuilt, and checked before the commit.

    Raises
    ------
    LedgerDamaged
        If a row refers to something that is not there; nothing is changed then.
    """
    from alembic import command
    from alembic.config import Config

    config = Config()
    config.set_main_option("script_location", str(_location()).replace("%", "%%"))
    config.set_main_option("path_separator", "os")
    with translated(place), engine.connect() as connection:
        if not is_server(place):
            # Outside a transaction: within one it would do nothing.
            connection.connection.cursor().execute("PRAGMA foreign_keys = OFF")
        with writes(connection).begin():
            config.attributes["connection"] = connection
            command.upgrade(config, revision)
            if not is_server(place) and connection.execute(text("PRAGMA foreign_key_check")).first():
                raise LedgerDamaged(place, "a row refers to something that is not there")
