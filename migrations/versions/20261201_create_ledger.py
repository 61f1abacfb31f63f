"""Create the tables of a ledger, and the triggers that make them append-only."""

import sqlalchemy as sa
from alembic import op

revision = "20261201_create_ledger"
down_revision = None

TEXT = sa.Text().with_variant(sa.Text(collation="C"), "postgresql")
WHOLE = sa.BigInteger().with_variant(sa.Integer(), "sqlite")
REAL = sa.Double().with_variant(sa.REAL(), "sqlite")

TABLES = (
    "entry",
    "ledger",
    "record",
    "cleaner",
    "company",
    "container",
    "engine",
    "file",
    "limit",
    "manifest",
    "movement",
    "person",
    "point",
    "result",
    "sample",
    "site",
    "wash",
    "manifest_carrier",
    "manifest_line",
    "result_void",
)

# What INSERT OR REPLACE takes for the same row: it deletes the old one without asking the DELETE trigger.
VERSION = ("key", "version")
PART = ("manifest", "version", "position")
ALIKE = {
    "entry": [("sequence",), ("digest",)],
    "ledger": [("row",)],
    "record": [("row",), ("key",)],
    "result": [("row",)],
    "manifest_carrier": [("row",), PART],
    "manifest_line": [("row",), PART],
    "result_void": [("row",), ("result",)],
}


def upgrade():
    create_tables()
    if op.get_bind().dialect.name == "sqlite":
        forbid_changes_sqlite()
    else:
        forbid_changes_postgresql()


def forbid_changes_sqlite():
    for table in TABLES:
        for change in ("UPDATE", "DELETE"):
            op.execute(
                f'CREATE TRIGGER "tr_{table}_{change.lower()}" BEFORE {change} ON "{table}" '
                "BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
            )
        op.execute(
            f'CREATE TRIGGER "tr_{table}_replace" BEFORE INSERT ON "{table}" WHEN {is_there(table)} '
            "BEGIN SELECT RAISE(ABORT, 'the ledger is append-only'); END"
        )


def is_there(table):
    conditions = [
        f'EXISTS (SELECT 1 FROM "{table}" WHERE '
        + " AND ".join(f'"{column}" = NEW."{column}"' for column in columns)
        + ")"
        for columns in ALIKE.get(table, [("row",), VERSION])
    ]
    return " OR ".join(conditions)


def forbid_changes_postgresql():
    op.execute(
        "CREATE FUNCTION effluent_forbid() RETURNS trigger LANGUAGE plpgsql AS "
        "$$ BEGIN RAISE EXCEPTION 'the ledger is append-only'; END $$"
    )
    for table in TABLES:
        op.execute(
            f'CREATE TRIGGER "tr_{table}_change" BEFORE UPDATE OR DELETE OR TRUNCATE ON "{table}" '
            "FOR EACH STATEMENT EXECUTE FUNCTION effluent_forbid()"
        )


def create_tables():
    op.create_table(
        "entry",
        sa.Column("sequence", WHOLE, autoincrement=False, nullable=False),
        sa.Column("recorded_at", TEXT, nullable=False),
        sa.Column("recorded_by", TEXT, nullable=False),
        sa.Column("action", TEXT, nullable=False),
        sa.Column("reason", TEXT, nullable=False),
        sa.Column("contents", TEXT, nullable=False),
        sa.Column("previous_digest", TEXT, nullable=False),
        sa.Column("digest", TEXT, nullable=False),
        sa.PrimaryKeyConstraint("sequence", name=op.f("pk_entry")),
        sa.UniqueConstraint("digest", name=op.f("uq_entry_digest")),
        sqlite_strict=True,
    )
    op.create_table(
        "ledger",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("number", TEXT, nullable=False),
        sa.Column("format", WHOLE, nullable=False),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_ledger")),
        sqlite_strict=True,
    )
    op.create_table(
        "record",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("noun", TEXT, nullable=False),
        sa.CheckConstraint("key LIKE noun || '/_%'", name=op.f("ck_record_key")),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_record")),
        sa.UniqueConstraint("key", name=op.f("uq_record_key")),
        sqlite_strict=True,
    )
    op.create_table(
        "cleaner",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("label", TEXT, nullable=False),
        sa.Column("type", TEXT, nullable=False),
        sa.Column("form", TEXT, nullable=False),
        sa.Column("mix_ratio", TEXT, nullable=False),
        sa.Column("density", TEXT, nullable=True),
        sa.Column("flash_point", TEXT, nullable=True),
        sa.Column("ph", TEXT, nullable=True),
        sa.CheckConstraint("version >= 1", name=op.f("ck_cleaner_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_cleaner_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_cleaner_key"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_cleaner")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_cleaner_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "company",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("name", TEXT, nullable=False),
        sa.Column("role", TEXT, nullable=False),
        sa.Column("address", TEXT, nullable=False),
        sa.Column("phone", TEXT, nullable=False),
        sa.Column("identification", TEXT, nullable=False),
        sa.CheckConstraint("version >= 1", name=op.f("ck_company_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_company_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_company_key"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_company")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_company_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "container",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("kind", TEXT, nullable=False),
        sa.Column("site", TEXT, nullable=False),
        sa.Column("capacity", TEXT, nullable=False),
        sa.Column("fill_fraction", TEXT, nullable=False),
        sa.Column("tare", TEXT, nullable=True),
        sa.Column("material", TEXT, nullable=False),
        sa.CheckConstraint("\"site\" LIKE 'site/_%'", name=op.f("ck_container_site")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_container_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_container_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_container_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["site"], ["record.key"], name=op.f("fk_container_site"), ondelete="RESTRICT"
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_container")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_container_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "engine",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("type_label", TEXT, nullable=False),
        sa.Column("site", TEXT, nullable=False),
        sa.Column("aircraft", TEXT, nullable=False),
        sa.Column("position", TEXT, nullable=False),
        sa.Column("hours", TEXT, nullable=False),
        sa.Column("cycles", TEXT, nullable=False),
        sa.CheckConstraint("\"site\" LIKE 'site/_%'", name=op.f("ck_engine_site")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_engine_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_engine_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_engine_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(["site"], ["record.key"], name=op.f("fk_engine_site"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_engine")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_engine_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "file",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("name", TEXT, nullable=False),
        sa.Column("sha256", TEXT, nullable=False),
        sa.Column("size", WHOLE, nullable=False),
        sa.Column("layout", TEXT, nullable=False),
        sa.CheckConstraint("version >= 1", name=op.f("ck_file_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_file_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_file_key"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_file")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_file_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "limit",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("point", TEXT, nullable=False),
        sa.Column("analyte", TEXT, nullable=False),
        sa.Column("fraction", TEXT, nullable=False),
        sa.Column("statistic", TEXT, nullable=False),
        sa.Column("bound", TEXT, nullable=False),
        sa.Column("value", TEXT, nullable=False),
        sa.Column("broken_by", TEXT, nullable=False),
        sa.Column("rounding", TEXT, nullable=False),
        sa.Column("nondetects", TEXT, nullable=False),
        sa.Column("action_level", TEXT, nullable=True),
        sa.Column("effective_from", TEXT, nullable=False),
        sa.Column("effective_to", TEXT, nullable=True),
        sa.Column("authority", TEXT, nullable=False),
        sa.Column("document", TEXT, nullable=False),
        sa.Column("written_at", TEXT, nullable=False),
        sa.Column("reference", TEXT, nullable=False),
        sa.Column("entered_by", TEXT, nullable=False),
        sa.Column("verified_by", TEXT, nullable=True),
        sa.Column("verified_on", TEXT, nullable=True),
        sa.CheckConstraint("\"entered_by\" LIKE 'person/_%'", name=op.f("ck_limit_entered_by")),
        sa.CheckConstraint("\"point\" LIKE 'point/_%'", name=op.f("ck_limit_point")),
        sa.CheckConstraint("\"verified_by\" LIKE 'person/_%'", name=op.f("ck_limit_verified_by")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_limit_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_limit_voided")),
        sa.ForeignKeyConstraint(
            ["entered_by"], ["record.key"], name=op.f("fk_limit_entered_by"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_limit_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(["point"], ["record.key"], name=op.f("fk_limit_point"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["verified_by"], ["record.key"], name=op.f("fk_limit_verified_by"), ondelete="RESTRICT"
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_limit")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_limit_key_version")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_limit_point"), "limit", ["point"], unique=False)
    op.create_table(
        "manifest",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("site", TEXT, nullable=False),
        sa.Column("state", TEXT, nullable=False),
        sa.Column("facility", TEXT, nullable=False),
        sa.Column("emergency_contact", TEXT, nullable=False),
        sa.Column("emergency_phone", TEXT, nullable=False),
        sa.Column("tracking_number", TEXT, nullable=False),
        sa.Column("special_handling", TEXT, nullable=False),
        sa.Column("issued_on", TEXT, nullable=True),
        sa.Column("accepted_on", TEXT, nullable=True),
        sa.Column("returned_on", TEXT, nullable=True),
        sa.Column("signed_by", TEXT, nullable=False),
        sa.Column("signed_copy", TEXT, nullable=False),
        sa.CheckConstraint("\"facility\" LIKE 'company/_%'", name=op.f("ck_manifest_facility")),
        sa.CheckConstraint("\"site\" LIKE 'site/_%'", name=op.f("ck_manifest_site")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_manifest_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_manifest_voided")),
        sa.ForeignKeyConstraint(
            ["facility"], ["record.key"], name=op.f("fk_manifest_facility"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_manifest_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(["site"], ["record.key"], name=op.f("fk_manifest_site"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_manifest")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_manifest_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "movement",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("kind", TEXT, nullable=False),
        sa.Column("moved_at", TEXT, nullable=False),
        sa.Column("moved_by", TEXT, nullable=False),
        sa.Column("volume", TEXT, nullable=False),
        sa.Column("wash", TEXT, nullable=True),
        sa.Column("source", TEXT, nullable=True),
        sa.Column("target", TEXT, nullable=True),
        sa.Column("measured_by", TEXT, nullable=True),
        sa.Column("destination", TEXT, nullable=False),
        sa.Column("remarks", TEXT, nullable=False),
        sa.CheckConstraint("\"moved_by\" LIKE 'person/_%'", name=op.f("ck_movement_moved_by")),
        sa.CheckConstraint("\"source\" LIKE 'container/_%'", name=op.f("ck_movement_source")),
        sa.CheckConstraint("\"target\" LIKE 'container/_%'", name=op.f("ck_movement_target")),
        sa.CheckConstraint("\"wash\" LIKE 'wash/_%'", name=op.f("ck_movement_wash")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_movement_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_movement_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_movement_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["moved_by"], ["record.key"], name=op.f("fk_movement_moved_by"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(
            ["source"], ["record.key"], name=op.f("fk_movement_source"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(
            ["target"], ["record.key"], name=op.f("fk_movement_target"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["wash"], ["record.key"], name=op.f("fk_movement_wash"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_movement")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_movement_key_version")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_movement_source"), "movement", ["source"], unique=False)
    op.create_index(op.f("ix_movement_target"), "movement", ["target"], unique=False)
    op.create_index(op.f("ix_movement_wash"), "movement", ["wash"], unique=False)
    op.create_table(
        "person",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("name", TEXT, nullable=False),
        sa.Column("role", TEXT, nullable=False),
        sa.CheckConstraint("version >= 1", name=op.f("ck_person_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_person_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_person_key"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_person")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_person_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "point",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("site", TEXT, nullable=False),
        sa.Column("name", TEXT, nullable=False),
        sa.Column("kind", TEXT, nullable=False),
        sa.Column("authority", TEXT, nullable=False),
        sa.Column("permit", TEXT, nullable=False),
        sa.CheckConstraint("\"site\" LIKE 'site/_%'", name=op.f("ck_point_site")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_point_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_point_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_point_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(["site"], ["record.key"], name=op.f("fk_point_site"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_point")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_point_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "result",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("sample", TEXT, nullable=False),
        sa.Column("analyte", TEXT, nullable=False),
        sa.Column("fraction", TEXT, nullable=False),
        sa.Column("text", TEXT, nullable=False),
        sa.Column("unit", TEXT, nullable=False),
        sa.Column("qualifier", TEXT, nullable=False),
        sa.Column("number", TEXT, nullable=False),
        sa.Column("value", REAL, nullable=False),
        sa.Column("canonical_unit", TEXT, nullable=False),
        sa.Column("flag", TEXT, nullable=False),
        sa.Column("detection_limit", TEXT, nullable=False),
        sa.Column("reporting_limit", TEXT, nullable=False),
        sa.Column("reporting_value", REAL, nullable=True),
        sa.Column("dilution_factor", TEXT, nullable=False),
        sa.Column("uncertainty", TEXT, nullable=False),
        sa.Column("density", TEXT, nullable=False),
        sa.Column("test_method", TEXT, nullable=False),
        sa.Column("analysed_at", TEXT, nullable=True),
        sa.Column("laboratory", TEXT, nullable=False),
        sa.Column("report", TEXT, nullable=False),
        sa.Column("replicate", WHOLE, nullable=False),
        sa.Column("supersedes", WHOLE, nullable=True),
        sa.Column("file", TEXT, nullable=True),
        sa.Column("file_row", WHOLE, nullable=True),
        sa.CheckConstraint(
            "qualifier = '=' OR qualifier = '<' OR qualifier = '>'", name=op.f("ck_result_qualifier")
        ),
        sa.CheckConstraint("\"file\" LIKE 'file/_%'", name=op.f("ck_result_file")),
        sa.CheckConstraint("\"sample\" LIKE 'sample/_%'", name=op.f("ck_result_sample")),
        sa.ForeignKeyConstraint(["file"], ["record.key"], name=op.f("fk_result_file"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["sample"], ["record.key"], name=op.f("fk_result_sample"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(
            ["supersedes"], ["result.row"], name=op.f("fk_result_supersedes"), ondelete="RESTRICT"
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_result")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_result_sample"), "result", ["sample"], unique=False)
    op.create_index(
        op.f("ix_result_supersedes"),
        "result",
        ["supersedes"],
        unique=False,
        sqlite_where=sa.text("supersedes IS NOT NULL"),
        postgresql_where=sa.text("supersedes IS NOT NULL"),
    )
    op.create_table(
        "sample",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("container", TEXT, nullable=True),
        sa.Column("wash", TEXT, nullable=True),
        sa.Column("point", TEXT, nullable=True),
        sa.Column("method", TEXT, nullable=False),
        sa.Column("started_at", TEXT, nullable=False),
        sa.Column("ended_at", TEXT, nullable=True),
        sa.Column("aliquots", WHOLE, nullable=True),
        sa.Column("place", TEXT, nullable=False),
        sa.Column("taken_by", TEXT, nullable=False),
        sa.Column("bottle", TEXT, nullable=False),
        sa.Column("preservation", TEXT, nullable=False),
        sa.Column("fraction", TEXT, nullable=True),
        sa.Column("laboratory", TEXT, nullable=True),
        sa.Column("remarks", TEXT, nullable=False),
        sa.CheckConstraint("\"container\" LIKE 'container/_%'", name=op.f("ck_sample_container")),
        sa.CheckConstraint("\"laboratory\" LIKE 'company/_%'", name=op.f("ck_sample_laboratory")),
        sa.CheckConstraint("\"point\" LIKE 'point/_%'", name=op.f("ck_sample_point")),
        sa.CheckConstraint("\"taken_by\" LIKE 'person/_%'", name=op.f("ck_sample_taken_by")),
        sa.CheckConstraint("\"wash\" LIKE 'wash/_%'", name=op.f("ck_sample_wash")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_sample_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_sample_voided")),
        sa.ForeignKeyConstraint(
            ["container"], ["record.key"], name=op.f("fk_sample_container"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_sample_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["laboratory"], ["record.key"], name=op.f("fk_sample_laboratory"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["point"], ["record.key"], name=op.f("fk_sample_point"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["taken_by"], ["record.key"], name=op.f("fk_sample_taken_by"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["wash"], ["record.key"], name=op.f("fk_sample_wash"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_sample")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_sample_key_version")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_sample_container"), "sample", ["container"], unique=False)
    op.create_index(op.f("ix_sample_point"), "sample", ["point"], unique=False)
    op.create_index(op.f("ix_sample_wash"), "sample", ["wash"], unique=False)
    op.create_table(
        "site",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("name", TEXT, nullable=False),
        sa.Column("operator", TEXT, nullable=False),
        sa.Column("address", TEXT, nullable=False),
        sa.Column("time_zone", TEXT, nullable=False),
        sa.Column("phone", TEXT, nullable=False),
        sa.Column("identification", TEXT, nullable=False),
        sa.Column("emergency_contact", TEXT, nullable=False),
        sa.Column("emergency_phone", TEXT, nullable=False),
        sa.Column("unaccounted_threshold", TEXT, nullable=True),
        sa.Column("shipping_paper_country", TEXT, nullable=False),
        sa.CheckConstraint("version >= 1", name=op.f("ck_site_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_site_voided")),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_site_key"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_site")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_site_key_version")),
        sqlite_strict=True,
    )
    op.create_table(
        "wash",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("key", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("voided", WHOLE, nullable=False),
        sa.Column("kind", TEXT, nullable=False),
        sa.Column("mode", TEXT, nullable=False),
        sa.Column("engine", TEXT, nullable=False),
        sa.Column("site", TEXT, nullable=False),
        sa.Column("performed_at", TEXT, nullable=False),
        sa.Column("performed_by", TEXT, nullable=False),
        sa.Column("location", TEXT, nullable=False),
        sa.Column("task", TEXT, nullable=False),
        sa.Column("engine_hours", TEXT, nullable=False),
        sa.Column("engine_cycles", TEXT, nullable=False),
        sa.Column("outside_air", TEXT, nullable=True),
        sa.Column("weather", TEXT, nullable=False),
        sa.Column("cleaner", TEXT, nullable=True),
        sa.Column("lot", TEXT, nullable=False),
        sa.Column("concentrate", TEXT, nullable=True),
        sa.Column("solution_water", TEXT, nullable=True),
        sa.Column("rinse_water", TEXT, nullable=True),
        sa.Column("additive", TEXT, nullable=False),
        sa.Column("additive_volume", TEXT, nullable=True),
        sa.Column("grit", TEXT, nullable=False),
        sa.Column("grit_mass", TEXT, nullable=True),
        sa.Column("water_reading", TEXT, nullable=True),
        sa.Column("soaks", WHOLE, nullable=True),
        sa.Column("rinses", WHOLE, nullable=True),
        sa.Column("caught", TEXT, nullable=True),
        sa.Column("caught_by", TEXT, nullable=True),
        sa.Column("retained", TEXT, nullable=True),
        sa.Column("retained_basis", TEXT, nullable=False),
        sa.Column("remarks", TEXT, nullable=False),
        sa.CheckConstraint("\"cleaner\" LIKE 'cleaner/_%'", name=op.f("ck_wash_cleaner")),
        sa.CheckConstraint("\"engine\" LIKE 'engine/_%'", name=op.f("ck_wash_engine")),
        sa.CheckConstraint("\"performed_by\" LIKE 'person/_%'", name=op.f("ck_wash_performed_by")),
        sa.CheckConstraint("\"site\" LIKE 'site/_%'", name=op.f("ck_wash_site")),
        sa.CheckConstraint("version >= 1", name=op.f("ck_wash_version")),
        sa.CheckConstraint("voided IN (0, 1)", name=op.f("ck_wash_voided")),
        sa.ForeignKeyConstraint(
            ["cleaner"], ["record.key"], name=op.f("fk_wash_cleaner"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["engine"], ["record.key"], name=op.f("fk_wash_engine"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(["key"], ["record.key"], name=op.f("fk_wash_key"), ondelete="RESTRICT"),
        sa.ForeignKeyConstraint(
            ["performed_by"], ["record.key"], name=op.f("fk_wash_performed_by"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(["site"], ["record.key"], name=op.f("fk_wash_site"), ondelete="RESTRICT"),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_wash")),
        sa.UniqueConstraint("key", "version", name=op.f("uq_wash_key_version")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_wash_engine"), "wash", ["engine"], unique=False)
    op.create_index(op.f("ix_wash_site"), "wash", ["site"], unique=False)
    op.create_table(
        "manifest_carrier",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("manifest", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("position", WHOLE, nullable=False),
        sa.Column("company", TEXT, nullable=False),
        sa.CheckConstraint("\"company\" LIKE 'company/_%'", name=op.f("ck_manifest_carrier_company")),
        sa.ForeignKeyConstraint(
            ["company"], ["record.key"], name=op.f("fk_manifest_carrier_company"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(
            ["manifest", "version"],
            ["manifest.key", "manifest.version"],
            name=op.f("fk_manifest_carrier_manifest_version"),
            ondelete="RESTRICT",
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_manifest_carrier")),
        sa.UniqueConstraint(
            "manifest", "version", "position", name=op.f("uq_manifest_carrier_manifest_version_position")
        ),
        sqlite_strict=True,
    )
    op.create_table(
        "manifest_line",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("manifest", TEXT, nullable=False),
        sa.Column("version", WHOLE, nullable=False),
        sa.Column("position", WHOLE, nullable=False),
        sa.Column("container", TEXT, nullable=False),
        sa.Column("description", TEXT, nullable=False),
        sa.Column("quantity", TEXT, nullable=False),
        sa.Column("waste_codes", TEXT, nullable=False),
        sa.CheckConstraint("\"container\" LIKE 'container/_%'", name=op.f("ck_manifest_line_container")),
        sa.ForeignKeyConstraint(
            ["container"], ["record.key"], name=op.f("fk_manifest_line_container"), ondelete="RESTRICT"
        ),
        sa.ForeignKeyConstraint(
            ["manifest", "version"],
            ["manifest.key", "manifest.version"],
            name=op.f("fk_manifest_line_manifest_version"),
            ondelete="RESTRICT",
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_manifest_line")),
        sa.UniqueConstraint(
            "manifest", "version", "position", name=op.f("uq_manifest_line_manifest_version_position")
        ),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_manifest_line_container"), "manifest_line", ["container"], unique=False)
    op.create_table(
        "result_void",
        sa.Column("row", WHOLE, autoincrement=False, nullable=False),
        sa.Column("entry", WHOLE, nullable=False),
        sa.Column("result", WHOLE, nullable=False),
        sa.ForeignKeyConstraint(
            ["result"], ["result.row"], name=op.f("fk_result_void_result"), ondelete="RESTRICT"
        ),
        sa.PrimaryKeyConstraint("row", name=op.f("pk_result_void")),
        sa.UniqueConstraint("result", name=op.f("uq_result_void_result")),
        sqlite_strict=True,
    )
