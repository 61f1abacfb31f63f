from __future__ import annotations

import shutil
from pathlib import Path
from typing import Any

import pytest
from alembic.autogenerate import compare_metadata
from alembic.config import Config
from alembic.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import CheckConstraint, Connection, inspect, text
from sqlalchemy.exc import IntegrityError

from effluent.errors import LedgerDamaged, NotALedger, SchemaNewer, SchemaOlder, StoreError, ValueRefused
from effluent.services import ledger as service
from effluent.services.ledger import open_ledger, prove, restore, upgrade
from effluent.store import migration
from effluent.store.base import Base
from effluent.store.database import connect
from effluent.store.ledger import Ledger
from effluent.store.migration import head_revision, known_revisions, migrate, revision_of
from tests.docs.source import ROOT
from tests.fault.book import filled_ledger, new_ledger, tamper

LATER = "20991231_widen_person"

# SQLite can make this change only by rebuilding the table.
REBUILD = f'''
import sqlalchemy as sa
from alembic import op

revision = "{LATER}"
down_revision = "{{before}}"


def upgrade():
    rebuild = "always" if op.get_bind().dialect.name == "sqlite" else "never"
    with op.batch_alter_table("record", recreate=rebuild) as batch:
        batch.add_column(sa.Column("later", sa.Text(), nullable=True))
    if op.get_bind().dialect.name == "sqlite":
        for change in ("UPDATE", "DELETE"):
            op.execute(
                f'CREATE TRIGGER "tr_record_{{{{change.lower()}}}}" BEFORE {{{{change}}}} ON "record" '
                "BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
            )
        op.execute(
            'CREATE TRIGGER "tr_record_replace" BEFORE INSERT ON "record" '
            'WHEN EXISTS (SELECT 1 FROM "record" WHERE "row" = NEW."row" OR "key" = NEW."key") '
            "BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
        )
    {{further}}
'''


@pytest.fixture
def ledger(ledger_place: str) -> Ledger:
    return filled_ledger(ledger_place)


@pytest.fixture
def later(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Any:
    """Bring the version of the future, whose schema has one more migration."""

    def arrive(further: str = "") -> None:
        scripts = tmp_path / "later"
        shutil.copytree(ROOT / "migrations", scripts, ignore=shutil.ignore_patterns("__pycache__"))
        body = REBUILD.format(before=head_revision(), further=further or "pass")
        (scripts / "versions" / f"{LATER}.py").write_text(body.replace("{{", "{").replace("}}", "}"))
        monkeypatch.setattr(migration, "_location", lambda: scripts)

    return arrive


def test_known_revisions_are_those_that_alembic_finds() -> None:
    config = Config()
    config.set_main_option("script_location", str(ROOT / "migrations"))
    config.set_main_option("path_separator", "os")
    scripts = ScriptDirectory.from_config(config)
    assert known_revisions() == tuple(script.revision for script in scripts.walk_revisions())[::-1]
    assert scripts.get_heads() == [head_revision()]


def test_migrated_schema_is_that_of_the_models(ledger: Ledger) -> None:
    with ledger.connection() as connection:
        context = MigrationContext.configure(
            connection, opts={"compare_type": True, "compare_server_default": True}
        )
        assert compare_metadata(context, Base.metadata) == []


def test_columns_stand_in_the_order_of_the_models(ledger: Ledger) -> None:
    with ledger.connection() as connection:
        found = inspect(connection).get_multi_columns()
    for name, table in Base.metadata.tables.items():
        assert [c["name"] for c in found[None, name]] == [c.name for c in table.columns], name
        assert [c["nullable"] for c in found[None, name]] == [c.nullable for c in table.columns], name


def named(constraints: Any) -> set[str]:
    return {str(constraint["name"]) for constraint in constraints}


def test_checks_of_the_models_are_in_the_database(ledger: Ledger) -> None:
    """Alembic does not compare check constraints."""
    with ledger.connection() as connection:
        found = inspect(connection).get_multi_check_constraints()
    for name, table in Base.metadata.tables.items():
        wanted = {str(c.name) for c in table.constraints if isinstance(c, CheckConstraint)}
        assert named(found[None, name]) == wanted, name


def test_constraints_are_named(ledger: Ledger) -> None:
    with ledger.connection() as connection:
        look = inspect(connection)
        for name in Base.metadata.tables:
            assert look.get_pk_constraint(name)["name"] == f"pk_{name}"
            foreign = look.get_foreign_keys(name)
            assert all(str(key["name"]).startswith(f"fk_{name}_") for key in foreign)
            assert all(key["options"]["ondelete"] == "RESTRICT" for key in foreign)
            assert all(
                str(key["name"]).startswith(f"uq_{name}_") for key in look.get_unique_constraints(name)
            )


def test_tables_of_a_file_are_strict(tmp_path: Path) -> None:
    ledger = new_ledger(str(tmp_path / "ledger.effluent"))
    with ledger.connection() as connection:
        rows = connection.execute(text("SELECT name, strict FROM pragma_table_list WHERE type = 'table'"))
        strict = {row.name: row.strict for row in rows}
    assert {name for name in Base.metadata.tables if not strict[name]} == set()


def test_older_ledger_is_refused_with_the_command_that_upgrades_it(ledger: Ledger, later: Any) -> None:
    before = head_revision()
    later()
    with pytest.raises(SchemaOlder) as caught:
        open_ledger(ledger.place)
    assert f"run: effluent ledger upgrade --ledger {ledger.place}" in str(caught.value)
    assert caught.value.args[1:] == (before, LATER)


def test_upgraded_ledger_keeps_digests_triggers_and_rows(ledger: Ledger, later: Any) -> None:
    head = ledger.head()
    later()
    assert upgrade(ledger.place, backed_up=True)[0] == LATER
    with open_ledger(ledger.place) as upgraded:
        assert upgraded.head() == head
        assert [f for f in prove(upgraded).findings if f.kind != "missing table"] == []


def test_upgrade_of_a_file_keeps_a_verified_copy_first(tmp_path: Path, later: Any) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    head, before = ledger.head(), head_revision()
    later()
    copy = upgrade(ledger.place)[1]
    assert copy == f"{ledger.place}.before-{LATER}"
    assert revision_of(connect(copy), copy) == before
    report = restore(copy, str(tmp_path / "restored"))
    assert (report.digest, report.findings) == (head.digest, ())


def test_upgrade_of_what_is_at_the_head_does_nothing(ledger: Ledger) -> None:
    assert upgrade(ledger.place) == (head_revision(), "")


def test_damaged_ledger_is_not_upgraded(tmp_path: Path, later: Any) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    tamper(ledger, "UPDATE site SET name = 'x'")
    before = head_revision()
    later()
    with pytest.raises(LedgerDamaged, match="it does not verify: entry 2: changed row: site row 1"):
        upgrade(ledger.place)
    assert [path.name for path in tmp_path.glob("*ledger.effluent*")] == ["ledger.effluent"]
    assert revision_of(connect(ledger.place), ledger.place) == before


@pytest.mark.parametrize(
    ("further", "kind"),
    [
        ("raise ValueError('in the middle')", ValueError),
        ("op.execute('INSERT INTO record SELECT * FROM record')", (IntegrityError, StoreError)),
    ],
)
def test_migration_that_fails_leaves_the_ledger_as_it_was(
    ledger: Ledger, later: Any, further: str, kind: Any
) -> None:
    before = head_revision()
    later(further)
    with pytest.raises(kind):
        upgrade(ledger.place, backed_up=True)
    assert revision_of(connect(ledger.place), ledger.place) == before


def test_migration_that_orphans_a_row_is_refused(tmp_path: Path, later: Any) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    before = head_revision()
    later("op.execute('DROP TRIGGER tr_record_delete'); op.execute('DELETE FROM record WHERE \"row\" = 2')")
    with pytest.raises(LedgerDamaged, match="refers to something that is not there"):
        upgrade(ledger.place)
    assert revision_of(connect(ledger.place), ledger.place) == before


def test_server_is_upgraded_only_when_said_to_be_backed_up(
    ledger: Ledger, later: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(service, "is_server", lambda place: True)
    before = head_revision()
    later()
    with pytest.raises(ValueRefused, match="say --backed-up"):
        upgrade(ledger.place)
    assert revision_of(connect(ledger.place), ledger.place) == before


def stamp(connection: Connection, revision: str | None) -> None:
    connection.execute(text("DELETE FROM alembic_version"))
    if revision:
        connection.execute(text("INSERT INTO alembic_version VALUES (:r)"), {"r": revision})


@pytest.mark.parametrize("act", [open_ledger, upgrade])
def test_newer_ledger_is_refused(ledger: Ledger, act: Any) -> None:
    with ledger.connection() as connection:
        stamp(connection, LATER)
    with pytest.raises(SchemaNewer, match="install a newer effluent"):
        act(ledger.place)


@pytest.mark.parametrize("act", [open_ledger, upgrade])
def test_database_without_a_revision_is_no_ledger(ledger: Ledger, act: Any) -> None:
    with ledger.connection() as connection:
        stamp(connection, None)
    with pytest.raises(NotALedger, match="it holds no ledger"):
        act(ledger.place)


def test_migrations_do_not_import_the_package() -> None:
    sources = [path.read_text() for path in (ROOT / "migrations").rglob("*.py")]
    assert [source for source in sources if "import effluent" in source or "from effluent" in source] == []


def test_migrating_twice_changes_nothing(ledger: Ledger) -> None:
    migrate(connect(ledger.place), ledger.place)
    assert prove(ledger).findings == ()
