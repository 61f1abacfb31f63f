"""Laboratory files read into a ledger, all of them or nothing."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import NamedTuple

from effluent.domain import File
from effluent.errors import AlreadyRecorded, FileMissing, StorageFailed, ValueRefused
from effluent.intake.explain import Explanation
from effluent.intake.explain import explain as explain_file
from effluent.intake.layout import PLAIN, Layout
from effluent.intake.relay import chunks_ahead
from effluent.intake.result import ResultChunk, ResultReader
from effluent.services.delivery import Batch, batches
from effluent.services.receiving import Receiving
from effluent.services.water import site_of
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading
from effluent.store.writing import Writing

__all__ = ["Imported", "Order", "Progress", "explain_files", "import_files"]

Progress = Callable[[str, float], object]
"""Called with the name of a file and the share of it that is read, 0 to 1."""

_PIECE = 1 << 20


class Imported(NamedTuple):
    """What an import brought: files by code and name, and results by number."""

    files: tuple[tuple[str, str], ...]
    first_number: int
    result_count: int
    skipped: int


@dataclass(frozen=True, kw_only=True)
class Order:
    """Which files to read, and how.

    ``layout`` is the laboratory's mapping file; without one the files have our own column set.
    ``time_zone`` is that of local times unless the mapping file names one; without both it is the zone of
    the site of the first sample. ``decimal_comma`` says that a comma is the decimal mark, whatever the
    mapping file says.
    """

    paths: Sequence[Path]
    layout: Path | None = None
    time_zone: str = ""
    decimal_comma: bool = False


def import_files(
    ledger: Ledger,
    order: Order,
    *,
    by: str,
    reason: str = "",
    accept: str = "",
    progress: Progress | None = None,
) -> Imported:
    """Read laboratory files into a ledger as one entry; everything is recorded or nothing.

    Parameters
    ----------
    ledger : Ledger
        Opened.
    order : Order
        Files and how to read them.
    by, reason : str
        Who records this, and why.
    accept : str
        Why what is questioned is right all the same; the entry keeps it.
    progress : callable, optional
        See `Progress`.

    Raises
    ------
    FileRefused
        With every bad cell of all files.
    AlreadyRecorded
        If a file was read in before, byte for byte.
    Questioned
        If something is implausible and `accept` is empty.
    FileMissing, ValueRefused
        If a file is not there, is no table, or does not have the columns of its layout.
    """
    layout = _layout(order)
    layout_digest = _digest(order.layout) if order.layout else ""
    before = [_state(path) for path in order.paths]
    records = [_record(path, layout_digest) for path in order.paths]
    _refuse_repeated(records)
    names = ", ".join(dict.fromkeys(path.name for path in order.paths))

    def job(writing: Writing) -> Imported:
        run = _Run(writing, order, layout, progress or _silent)
        run.read(records)
        _refuse_changed(order.paths, before)
        run.receiving.finish(names, accept=accept)
        if not run.receiving.count:
            raise ValueRefused("laboratory file", names, "it holds no results; nothing was recorded")
        return Imported(tuple(run.files), run.receiving.first_number, run.receiving.count, run.skipped)

    action = "import results, decimal comma" if order.decimal_comma else "import results"
    return ledger.write(job, by=by, action=action, reason=reason)


def explain_files(ledger: Ledger, order: Order) -> tuple[Explanation, ...]:
    """Return how each column of the files is understood; nothing is recorded.

    Raises
    ------
    FileMissing, ValueRefused
        As `import_files`. Bad cells are not raised but counted and shown.
    """
    layout = _layout(order)
    with ledger.reading() as reading:
        return tuple(
            explain_file(path, layout, time_zone=_zone(reading, path, layout, order.time_zone))
            for path in order.paths
        )


def _layout(order: Order) -> Layout:
    layout = Layout.read(order.layout) if order.layout else PLAIN
    return replace(layout, decimal=",") if order.decimal_comma else layout


@dataclass
class _Run:
    """One attempt to read all files into an entry."""

    writing: Writing
    order: Order
    layout: Layout
    progress: Progress
    files: list[tuple[str, str]] = field(default_factory=list)
    skipped: int = 0

    def __post_init__(self) -> None:
        self.receiving = Receiving(self.writing)

    def read(self, records: Sequence[File]) -> None:
        readers = [self._reader(path) for path in self.order.paths]
        for record, reader in zip(records, readers, strict=True):
            code = self._record(record)
            for batch in batches(self._chunks(reader)):
                self.receiving.take(batch, file=code, prefix=self._prefix(reader))
        suspects = self.receiving.suspects()
        for reader, batch in self._again(readers) if suspects else ():
            self.receiving.take_again(batch, suspects, prefix=self._prefix(reader))

    def _reader(self, path: Path) -> ResultReader:
        zone = _zone(self.writing, path, self.layout, self.order.time_zone)
        return ResultReader(path, self.layout, time_zone=zone)

    def _record(self, record: File) -> str:
        if found := self.writing.values("file", sha256=record.sha256):
            known = found[0]
            remedy = f"it was read in as {known.code} ({known.name}); nothing was recorded"
            raise AlreadyRecorded(f"file {record.name}", remedy)
        code = self.writing.record(record)
        self.files.append((code, record.name))
        return code

    def _chunks(self, reader: ResultReader) -> Iterator[ResultChunk]:
        for chunk in chunks_ahead(reader):
            self.skipped += chunk.skipped
            self.progress(reader.table.path.name, chunk.share)
            yield chunk

    def _again(self, readers: Sequence[ResultReader]) -> Iterator[tuple[ResultReader, Batch]]:
        for reader in readers:
            for batch in batches(reader.chunks()):
                yield reader, batch

    def _prefix(self, reader: ResultReader) -> str:
        return f"{reader.table.path.name}: " if len(self.order.paths) > 1 else ""


def _silent(_name: str, _share: float) -> None:
    """Show no progress."""


def _zone(reading: Reading, path: Path, layout: Layout, given: str) -> str:
    """Return the zone of local times: the one given, or that of the site of the first known sample."""
    if layout.time_zone or given:
        return layout.time_zone or given
    for chunk in ResultReader(path, layout, time_zone="UTC").chunks():
        wanted = tuple(dict.fromkeys(chunk.columns["sample"]))
        known = {sample.code: sample for sample in reading.values("sample", key=wanted)}
        for code in wanted:
            if code in known and (site := site_of(reading, known[code])):
                return str(reading.value("site", site).time_zone)
        break
    return "UTC"


def _refuse_repeated(records: Sequence[File]) -> None:
    names: dict[str, str] = {}
    for record in records:
        if record.sha256 in names:
            same = f"it is {names[record.sha256]} once more, byte for byte; leave one of them out"
            raise ValueRefused("laboratory file", record.name, same)
        names[record.sha256] = record.name


def _state(path: Path) -> tuple[int, int, int] | None:
    """Return what changes with a file; nothing if it is not there."""
    try:
        found = path.stat()
    except OSError:
        return None
    return found.st_ino, found.st_size, found.st_mtime_ns


def _refuse_changed(paths: Sequence[Path], before: Sequence[object]) -> None:
    """Refuse a file that was written to meanwhile: its digest would not be that of what was read."""
    for path, state in zip(paths, before, strict=True):
        if _state(path) != state:
            remedy = "it changed while it was read; wait until it is whole, and import it again"
            raise ValueRefused("laboratory file", path.name, remedy)


def _record(path: Path, layout_digest: str) -> File:
    if not os.path.isfile(path):
        what = "what is there is no file; " if os.path.exists(path) else ""
        raise FileMissing(path, f"{what}name the laboratory's file")
    return File(name=path.name, sha256=_digest(path), size=path.stat().st_size, layout=layout_digest)


def _digest(path: Path) -> str:
    digest = hashlib.sha256()
    try:
        with path.open("rb") as file:
            while piece := file.read(_PIECE):
                digest.update(piece)
    except FileNotFoundError as error:
        raise FileMissing(path, "name a file that is there") from error
    except OSError as error:
        raise StorageFailed(path, error.strerror or "cannot be read") from error
    return digest.hexdigest()
