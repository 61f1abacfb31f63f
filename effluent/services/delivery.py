"""Results of a file, enough of them at a time to be worth a look at the ledger."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any, NamedTuple

from effluent.errors import RowError
from effluent.intake.result import ResultChunk

__all__ = ["Batch", "batches"]

_ENOUGH = 10_000


class Batch(NamedTuple):
    """Results of one file; ``bad`` has the places of those that cannot be read."""

    columns: dict[str, list[Any]]
    errors: list[RowError]
    bad: frozenset[int]
    headings: Mapping[str, str]

    def error(self, at: int, name: str, reason: str) -> RowError:
        """Return what is wrong with the cell of one of our columns."""
        value = self.columns[name][at]
        text = "" if value is None else str(value)
        if text and name == "analysed_at":
            text = f"{text[:16].replace('T', ' ')} UTC"
        return RowError(self.columns["file_row"][at], self.headings[name], text, reason)


def batches(chunks: Iterable[ResultChunk]) -> Iterator[Batch]:
    """Join chunks until there are enough results to be worth a look at the ledger."""
    held: Batch | None = None
    for chunk in chunks:
        if held is None:
            held = Batch(chunk.columns, chunk.errors, chunk.bad, chunk.headings)
        else:
            held = _joined(held, chunk)
        if len(held.columns["sample"]) >= _ENOUGH:
            yield held
            held = None
    if held is not None:
        yield held


def _joined(held: Batch, chunk: ResultChunk) -> Batch:
    size = len(held.columns["sample"])
    for name, column in held.columns.items():
        column.extend(chunk.columns[name])
    bad = held.bad | {size + at for at in chunk.bad}
    return Batch(held.columns, [*held.errors, *chunk.errors], bad, held.headings)
