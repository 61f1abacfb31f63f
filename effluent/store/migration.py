"""Creating and upgrading the schema with the migrations that ship with the package."""

from __future__ import annotations

from pathlib import Path

from alembic import command
from alembic.config import Config
from alembic.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Engine, text

from effluent.errors import LedgerDamaged, NotALedger, SchemaNewer, SchemaOlder
from effluent.store.database import is_server, shown, translated, writes

__all__ = ["check_schema", "head_revision", "is_older", "known_revisions", "migrate", "revision_of"]


def _config() -> Config:
    package = Path(__file__).parent.parent
    shipped, checkout = package / "migrations", package.parent / "migrations"
    config = Config()
    config.set_main_option(
        "script_location", str(shipped if shipped.is_dir() else checkout).replace("%", "%%")
    )
    config.set_main_option("path_separator", "os")
    return config


def _scripts() -> ScriptDirectory:
    return ScriptDirectory.from_config(_config())


def head_revision() -> str:
    """Return the schema revision this version writes."""
    return str(_scripts().get_current_head())


def known_revisions() -> tuple[str, ...]:
    """Return every revision this version knows, newest first."""
    return tuple(script.revision for script in _scripts().walk_revisions())


def revision_of(engine: Engine, place: str) -> str | None:
    """Return the schema revision a database holds, or None if it holds no ledger."""
    with translated(place), engine.connect() as connection:
        return MigrationContext.configure(connection).get_current_revision()


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
    config = _config()
    with translated(place), engine.connect() as connection:
        if not is_server(place):
            connection.exec_driver_sql("PRAGMA foreign_keys = OFF")
            connection.rollback()
        with writes(connection).begin():
            config.attributes["connection"] = connection
            command.upgrade(config, revision)
            if not is_server(place) and connection.execute(text("PRAGMA foreign_key_check")).first():
                raise LedgerDamaged(place, "a row refers to something that is not there")
