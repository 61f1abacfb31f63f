"""Which table holds which domain value."""

from __future__ import annotations

from typing import Any, NamedTuple

from sqlalchemy import Table

from effluent import domain
from effluent.store import schema
from effluent.store.base import Base

__all__ = ["NOUNS", "Noun", "noun_of", "table_of"]


class Noun(NamedTuple):
    """A noun of the trade: its value, its table, and how codes are made up when none is given."""

    name: str
    cls: type[Any]
    row: type[Base]
    prefix: str = ""

    @property
    def table(self) -> Table:
        """The table of its versions."""
        return table_of(self.row)


def table_of(row: type[Base]) -> Table:
    """Return the table behind a row class."""
    table = row.__table__
    if not isinstance(table, Table):
        raise TypeError(f"{row.__name__} is not mapped to a table")
    return table


NOUNS = {
    noun.name: noun
    for noun in (
        Noun("person", domain.Person, schema.PersonRow),
        Noun("company", domain.Company, schema.CompanyRow),
        Noun("site", domain.Site, schema.SiteRow),
        Noun("point", domain.Point, schema.PointRow),
        Noun("engine", domain.Engine, schema.EngineRow),
        Noun("cleaner", domain.Cleaner, schema.CleanerRow),
        Noun("container", domain.Container, schema.ContainerRow),
        Noun("wash", domain.Wash, schema.WashRow, "W"),
        Noun("movement", domain.Movement, schema.MovementRow, "V"),
        Noun("sample", domain.Sample, schema.SampleRow, "S"),
        Noun("file", domain.File, schema.FileRow, "F"),
        Noun("limit", domain.Limit, schema.LimitRow, "L"),
        Noun("manifest", domain.Manifest, schema.ManifestRow, "M"),
    )
}
_BY_CLASS = {noun.cls: noun for noun in NOUNS.values()}


def noun_of(value: object) -> Noun:
    """Return the noun a domain value belongs to."""
    return _BY_CLASS[type(value)]
