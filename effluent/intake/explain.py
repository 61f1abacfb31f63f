"""How a laboratory file is understood, before anything of it is recorded."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime
from itertools import islice
from pathlib import Path

from effluent.errors import RowError
from effluent.intake.layout import FIELDS, Layout
from effluent.intake.result import ResultChunk, ResultReader
from effluent.intake.text import TextFile

__all__ = ["Explanation", "explain"]

_FIRST = 5
_ERRORS_SHOWN = 20
_MARKS = {".": "point", ",": "comma"}
_DELIMITERS = {",": "comma", ";": "semicolon", "\t": "tab", "|": "bar"}


@dataclass(frozen=True)
class Explanation:
    """What was found in a file; `lines` says it in text.

    ``columns`` maps our names to the file's headings, ``ignored`` lists headings that nobody reads,
    ``absent`` our names that nothing fills. ``first`` has the first results as read, ``counts`` how many
    results there are of each analyte and unit. ``errors`` has the first bad cells of ``error_count``.
    """

    name: str
    source: str
    heading_row: int
    time_zone: str
    decimal: str
    columns: Mapping[str, str]
    constants: Mapping[str, str]
    wide: Mapping[str, Mapping[str, str]]
    ignored: tuple[str, ...]
    absent: tuple[str, ...]
    result_count: int
    skipped_count: int
    counts: Mapping[tuple[str, str, str, str], int]
    first: tuple[str, ...]
    errors: tuple[RowError, ...]
    error_count: int

    def lines(self) -> list[str]:
        """Return the explanation as text, one line each."""
        return [
            f"{self.name}: {self.source}, headings in row {self.heading_row}",
            f"local times are those of {self.time_zone}; a {_MARKS[self.decimal]} is the decimal mark",
            "columns:",
            *(f"  {theirs!r} is {ours}: {FIELDS[ours]}" for ours, theirs in self.columns.items()),
            *(f"  {heading!r} holds one analyte: {_facts(facts)}" for heading, facts in self.wide.items()),
            *(
                f"  {name} is {constant!r} where nothing else says it"
                for name, constant in self.constants.items()
            ),
            f"  ignored: {', '.join(map(repr, self.ignored)) or 'none'}",
            f"  not given: {', '.join(self.absent) or 'none'}",
            f"results: {self.result_count}, rows skipped: {self.skipped_count}",
            *(f"  {_group(group)}: {count}" for group, count in self.counts.items()),
            "first results as read:",
            *(f"  {line}" for line in self.first),
            *self._error_lines(),
        ]

    def _error_lines(self) -> Iterator[str]:
        yield f"bad cells: {self.error_count}"
        for error in self.errors:
            yield f"  {error}"
        if self.error_count > len(self.errors):
            yield f"  and {self.error_count - len(self.errors)} more"


def explain(path: Path, layout: Layout, *, time_zone: str) -> Explanation:
    """Read a laboratory file to its end and say how each column was understood.

    Parameters
    ----------
    path : Path
        CSV or XLSX.
    layout : Layout
        `effluent.intake.layout.PLAIN` or a mapping file's.
    time_zone : str
        IANA name of the zone of local times, unless the layout names one.

    Raises
    ------
    FileMissing, ValueRefused
        As `effluent.intake.result.ResultReader`. Bad cells are not raised.
    """
    reader = ResultReader(path, layout, time_zone=time_zone)
    bound, table = reader.layout, reader.table
    tally = _Tally()
    for chunk in reader.chunks():
        tally.add(chunk)
    wide_names = {name for facts in bound.wide.values() for name in facts}
    given = {*bound.columns, *bound.constants, *wide_names, *(["value"] if bound.wide else [])}
    used = {*bound.columns.values(), *bound.wide, *bound.skip}
    return Explanation(
        name=path.name,
        source=_source(reader),
        heading_row=table.heading_row,
        time_zone=reader.time_zone,
        decimal=layout.decimal,
        columns=bound.columns,
        constants=bound.constants,
        wide=bound.wide,
        ignored=tuple(heading for heading in table.headings if heading and heading not in used),
        absent=tuple(name for name in FIELDS if name not in given),
        result_count=tally.results,
        skipped_count=tally.skipped,
        counts=dict(sorted(tally.groups.items())),
        first=tuple(tally.first),
        errors=tuple(tally.errors),
        error_count=tally.error_count,
    )


class _Tally:
    """Counts what the chunks hold and keeps the first of everything."""

    def __init__(self) -> None:
        self.results = self.skipped = self.error_count = 0
        self.groups: Counter[tuple[str, str, str, str]] = Counter()
        self.first: list[str] = []
        self.errors: list[RowError] = []

    def add(self, chunk: ResultChunk) -> None:
        columns = chunk.columns
        self.results += len(chunk)
        self.skipped += chunk.skipped
        self.error_count += len(chunk.errors)
        self.errors += chunk.errors[: _ERRORS_SHOWN - len(self.errors)]
        self.groups.update(
            zip(*(columns[name] for name in ("analyte", "fraction", "unit", "canonical_unit")), strict=True)
        )
        good = (place for place in range(len(chunk)) if place not in chunk.bad)
        self.first += [_shown(chunk, place) for place in islice(good, _FIRST - len(self.first))]


def _shown(chunk: ResultChunk, place: int) -> str:
    cell = {name: column[place] for name, column in chunk.columns.items()}
    sign = "" if cell["qualifier"] == "=" else cell["qualifier"]
    words = [
        f"row {cell['file_row']}: sample {cell['sample']}, {cell['analyte']}, {cell['fraction']}, "
        f"{cell['text']!r} {cell['unit']}".rstrip()
        + f" is {sign}{cell['value']!r} {cell['canonical_unit']}",
        *(f"{name} {cell[name]}" for name in ("flag", "reporting_limit", "reissue_of") if cell[name]),
        *([f"analysed_at {_moment(cell['analysed_at'])}"] if cell["analysed_at"] else ()),
    ]
    return ", ".join(words)


def _moment(written: str) -> str:
    """Return an instant of `effluent.intake.instant` as a reader sees it."""
    instant = datetime.fromisoformat(written).replace(tzinfo=None)
    return f"{instant.isoformat(' ', 'seconds' if instant.second else 'minutes')} UTC"


def _source(reader: ResultReader) -> str:
    source = reader.table.source
    if isinstance(source, TextFile):
        return f"text in {source.encoding}, cells divided by {_DELIMITERS[source.delimiter]}"
    return f"workbook, sheet {source.sheet!r}"


def _facts(facts: Mapping[str, str]) -> str:
    return ", ".join(f"{name} {value}" for name, value in facts.items())


def _group(group: tuple[str, str, str, str]) -> str:
    analyte, fraction, unit, canonical = group
    named = f"{analyte or 'unknown analyte'}, {fraction or 'no fraction'}"
    return f"{named}, {unit or 'no unit'} read as {canonical or 'nothing'}"
