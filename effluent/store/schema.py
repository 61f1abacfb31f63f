"""The table of each noun. Rows are only ever added, and hold what `effluent.domain` means by their fields."""

from __future__ import annotations

from typing import Any

from sqlalchemy import CheckConstraint, ForeignKey, ForeignKeyConstraint, Index, Table, UniqueConstraint
from sqlalchemy import text as sql
from sqlalchemy.orm import Mapped, declared_attr, mapped_column

from effluent.store.base import Base, Brings, Versioned, refers

__all__ = [
    "CleanerRow",
    "CompanyRow",
    "ContainerRow",
    "EngineRow",
    "FileRow",
    "LimitRow",
    "ManifestCarrierRow",
    "ManifestLineRow",
    "ManifestRow",
    "MovementRow",
    "PersonRow",
    "PointRow",
    "ResultRow",
    "ResultVoidRow",
    "SampleRow",
    "SiteRow",
    "WashRow",
]


class PersonRow(Versioned, Base):
    """See `effluent.domain.Person`."""

    __tablename__ = "person"
    name: Mapped[str]
    role: Mapped[str]


class CompanyRow(Versioned, Base):
    """See `effluent.domain.Company`."""

    __tablename__ = "company"
    name: Mapped[str]
    role: Mapped[str]
    address: Mapped[str]
    phone: Mapped[str]
    identification: Mapped[str]


class SiteRow(Versioned, Base):
    """See `effluent.domain.Site`."""

    __tablename__ = "site"
    name: Mapped[str]
    operator: Mapped[str]
    address: Mapped[str]
    time_zone: Mapped[str]
    phone: Mapped[str]
    identification: Mapped[str]
    emergency_contact: Mapped[str]
    emergency_phone: Mapped[str]
    unaccounted_threshold: Mapped[str | None]
    shipping_paper_country: Mapped[str]


class PointRow(Versioned, Base):
    """See `effluent.domain.Point`."""

    __tablename__ = "point"
    site: Mapped[str] = refers("site")
    name: Mapped[str]
    kind: Mapped[str]
    authority: Mapped[str]
    permit: Mapped[str]


class EngineRow(Versioned, Base):
    """See `effluent.domain.Engine`."""

    __tablename__ = "engine"
    type_label: Mapped[str]
    site: Mapped[str] = refers("site")
    aircraft: Mapped[str]
    position: Mapped[str]
    hours: Mapped[str]
    cycles: Mapped[str]


class CleanerRow(Versioned, Base):
    """See `effluent.domain.Cleaner`."""

    __tablename__ = "cleaner"
    label: Mapped[str]
    type: Mapped[str]
    form: Mapped[str]
    mix_ratio: Mapped[str]
    density: Mapped[str | None]
    flash_point: Mapped[str | None]
    ph: Mapped[str | None]


class ContainerRow(Versioned, Base):
    """See `effluent.domain.Container`."""

    __tablename__ = "container"
    kind: Mapped[str]
    site: Mapped[str] = refers("site")
    capacity: Mapped[str]
    fill_fraction: Mapped[str]
    tare: Mapped[str | None]
    material: Mapped[str]


class WashRow(Versioned, Base):
    """See `effluent.domain.Wash`."""

    __tablename__ = "wash"
    kind: Mapped[str]
    mode: Mapped[str]
    engine: Mapped[str] = refers("engine")
    site: Mapped[str] = refers("site")
    performed_at: Mapped[str]
    performed_by: Mapped[str] = refers("person")
    location: Mapped[str]
    task: Mapped[str]
    engine_hours: Mapped[str]
    engine_cycles: Mapped[str]
    outside_air: Mapped[str | None]
    weather: Mapped[str]
    cleaner: Mapped[str | None] = refers("cleaner", optional=True)
    lot: Mapped[str]
    concentrate: Mapped[str | None]
    solution_water: Mapped[str | None]
    rinse_water: Mapped[str | None]
    additive: Mapped[str]
    additive_volume: Mapped[str | None]
    grit: Mapped[str]
    grit_mass: Mapped[str | None]
    water_reading: Mapped[str | None]
    soaks: Mapped[int | None]
    rinses: Mapped[int | None]
    caught: Mapped[str | None]
    caught_by: Mapped[str | None]
    retained: Mapped[str | None]
    retained_basis: Mapped[str]
    remarks: Mapped[str]


class MovementRow(Versioned, Base):
    """See `effluent.domain.Movement`."""

    __tablename__ = "movement"
    kind: Mapped[str]
    moved_at: Mapped[str]
    moved_by: Mapped[str] = refers("person")
    volume: Mapped[str]
    wash: Mapped[str | None] = refers("wash", optional=True)
    source: Mapped[str | None] = refers("container", optional=True)
    target: Mapped[str | None] = refers("container", optional=True)
    measured_by: Mapped[str | None]
    destination: Mapped[str]
    remarks: Mapped[str]


class SampleRow(Versioned, Base):
    """See `effluent.domain.Sample`."""

    __tablename__ = "sample"
    container: Mapped[str | None] = refers("container", optional=True)
    wash: Mapped[str | None] = refers("wash", optional=True)
    point: Mapped[str | None] = refers("point", optional=True)
    method: Mapped[str]
    started_at: Mapped[str]
    ended_at: Mapped[str | None]
    aliquots: Mapped[int | None]
    place: Mapped[str]
    taken_by: Mapped[str] = refers("person")
    bottle: Mapped[str]
    preservation: Mapped[str]
    fraction: Mapped[str | None]
    laboratory: Mapped[str | None] = refers("company", optional=True)
    remarks: Mapped[str]


class FileRow(Versioned, Base):
    """See `effluent.domain.File`."""

    __tablename__ = "file"
    name: Mapped[str]
    sha256: Mapped[str]
    size: Mapped[int]
    layout: Mapped[str]


class ResultRow(Brings, Base):
    """See `effluent.domain.Result`; results are replaced by others, never changed."""

    __tablename__ = "result"
    sample: Mapped[str] = refers("sample")
    analyte: Mapped[str]
    fraction: Mapped[str]
    text: Mapped[str]
    unit: Mapped[str]
    qualifier: Mapped[str]
    number: Mapped[str]
    value: Mapped[float]
    canonical_unit: Mapped[str]
    flag: Mapped[str]
    detection_limit: Mapped[str]
    reporting_limit: Mapped[str]
    reporting_value: Mapped[float | None]
    dilution_factor: Mapped[str]
    uncertainty: Mapped[str]
    density: Mapped[str]
    test_method: Mapped[str]
    analysed_at: Mapped[str | None]
    laboratory: Mapped[str]
    report: Mapped[str]
    replicate: Mapped[int]
    supersedes: Mapped[int | None] = mapped_column(ForeignKey("result.row", ondelete="RESTRICT"))
    file: Mapped[str | None] = refers("file", optional=True)
    file_row: Mapped[int | None]
    __table_args__ = (
        # no IN: SQLite would build its list anew for every row of a long file
        CheckConstraint("qualifier = '=' OR qualifier = '<' OR qualifier = '>'", name="qualifier"),
        Index(None, "sample"),
        Index(
            None,
            "supersedes",
            sqlite_where=sql("supersedes IS NOT NULL"),
            postgresql_where=sql("supersedes IS NOT NULL"),
        ),
        {"sqlite_strict": True},
    )


class ResultVoidRow(Brings, Base):
    """A result withdrawn without another in its place."""

    __tablename__ = "result_void"
    result: Mapped[int] = mapped_column(ForeignKey("result.row", ondelete="RESTRICT"))
    __table_args__ = (UniqueConstraint("result"), {"sqlite_strict": True})


class LimitRow(Versioned, Base):
    """See `effluent.domain.Limit`."""

    __tablename__ = "limit"
    point: Mapped[str] = refers("point")
    analyte: Mapped[str]
    fraction: Mapped[str]
    statistic: Mapped[str]
    bound: Mapped[str]
    value: Mapped[str]
    broken_by: Mapped[str]
    rounding: Mapped[str]
    nondetects: Mapped[str]
    action_level: Mapped[str | None]
    effective_from: Mapped[str]
    effective_to: Mapped[str | None]
    authority: Mapped[str]
    document: Mapped[str]
    written_at: Mapped[str]
    reference: Mapped[str]
    entered_by: Mapped[str] = refers("person")
    verified_by: Mapped[str | None] = refers("person", optional=True)
    verified_on: Mapped[str | None]


class ManifestRow(Versioned, Base):
    """See `effluent.domain.Manifest`."""

    __tablename__ = "manifest"
    site: Mapped[str] = refers("site")
    state: Mapped[str]
    facility: Mapped[str] = refers("company")
    emergency_contact: Mapped[str]
    emergency_phone: Mapped[str]
    tracking_number: Mapped[str]
    special_handling: Mapped[str]
    issued_on: Mapped[str | None]
    accepted_on: Mapped[str | None]
    returned_on: Mapped[str | None]
    signed_by: Mapped[str]
    signed_copy: Mapped[str]


class _ManifestPart(Brings):
    """A part of one version of a manifest, in order."""

    manifest: Mapped[str] = mapped_column(sort_order=-8)
    version: Mapped[int] = mapped_column(sort_order=-7)
    position: Mapped[int] = mapped_column(sort_order=-6)

    @declared_attr.directive
    def __table_args__(cls) -> Any:  # noqa: N805
        return (
            UniqueConstraint("manifest", "version", "position"),
            ForeignKeyConstraint(
                ["manifest", "version"], ["manifest.key", "manifest.version"], ondelete="RESTRICT"
            ),
            {"sqlite_strict": True},
        )


class ManifestCarrierRow(_ManifestPart, Base):
    """A carrier of a manifest."""

    __tablename__ = "manifest_carrier"
    company: Mapped[str] = refers("company")


class ManifestLineRow(_ManifestPart, Base):
    """See `effluent.domain.ManifestLine`."""

    __tablename__ = "manifest_line"
    container: Mapped[str] = refers("container")
    description: Mapped[str]
    quantity: Mapped[str]
    waste_codes: Mapped[str]


_INDEXED = {
    "movement": ("wash", "source", "target"),
    "sample": ("container", "wash", "point"),
    "wash": ("engine", "site"),
    "limit": ("point",),
    "manifest_line": ("container",),
}


def _complete(table: Table) -> None:
    """Let the database itself refuse the key of another noun, and find by what is asked for."""
    for column in list(table.columns):
        if noun := column.info.get("noun"):
            table.append_constraint(CheckConstraint(f"\"{column.name}\" LIKE '{noun}/_%'", name=column.name))
    for name in _INDEXED.get(table.name, ()):
        Index(None, table.c[name])


for _table in Base.metadata.tables.values():
    _complete(_table)
