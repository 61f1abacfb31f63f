"""Results told apart: the same again, a laboratory duplicate, a re-issue of an earlier report."""

from __future__ import annotations

from collections.abc import Container, Iterator
from itertools import compress
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from effluent.errors import RowError
from effluent.services.delivery import Batch
from effluent.store.writing import Writing

__all__ = ["Repeats"]

_KEY = ("sample", "analyte", "fraction", "replicate")
_TWICE = (
    "leave it out; if the laboratory ran the sample twice, give the second replicate 2; if it issued the "
    "result anew, name the earlier report in reissue_of"
)

Key = tuple[Any, ...]


class _Standing(NamedTuple):
    """A result on record."""

    number: int
    report: str


class Repeats:
    """Finds results that are on record already, and those that stand in the files more than once.

    Of the files only a hash of each result is kept; results with the same hash are compared in full when
    the files are read again.
    """

    def __init__(self, writing: Writing) -> None:
        self._writing = writing
        self._hashes: list[NDArray[np.int64]] = []
        self._first: dict[Key, str] = {}

    def on_record(self, batch: Batch, known: Container[str]) -> tuple[list[int | None], list[RowError]]:
        """Return which result each one of known samples supersedes, and what is refused as on record."""
        keys = _keys(batch)
        self._hashes.append(np.fromiter(map(hash, _good(keys, batch)), dtype=np.int64))
        standing = self._standing(batch)
        supersedes: list[int | None] = [None] * len(keys)
        if not standing and not any(batch.columns["reissue_of"]):
            return supersedes, []
        errors = []
        for at, (key, earlier) in enumerate(zip(keys, batch.columns["reissue_of"], strict=True)):
            found = standing.get(key)
            if at in batch.bad or key[0] not in known or (found is None and not earlier):
                continue
            if found is not None and found.report == earlier != "":
                supersedes[at] = found.number
            elif reason := self._refusal(key[0], found, earlier):
                errors.append(batch.error(at, "reissue_of" if earlier else "analyte", reason))
        return supersedes, errors

    def suspects(self) -> frozenset[int]:
        """Return the hashes that were met more than once."""
        hashes = np.sort(np.concatenate(self._hashes)) if self._hashes else np.empty(0, dtype=np.int64)
        return frozenset(hashes[1:][hashes[1:] == hashes[:-1]].tolist())

    def within(self, batch: Batch, suspects: frozenset[int], prefix: str) -> Iterator[RowError]:
        """Yield an error for each result among the suspects that stood in the files before."""
        for at, key in enumerate(_keys(batch)):
            if at in batch.bad or hash(key) not in suspects:
                continue
            if key in self._first:
                yield batch.error(at, "analyte", f"the same result stands in {self._first[key]}; {_TWICE}")
            else:
                self._first[key] = f"{prefix}row {batch.columns['file_row'][at]}"

    def _standing(self, batch: Batch) -> dict[Key, _Standing]:
        """Return the results of the batch's samples that stood before this entry."""
        names = ("entry", *_KEY, "row", "report")
        found = self._writing.result_columns(names, samples=dict.fromkeys(batch.columns["sample"]))
        now = self._writing.as_of
        return {
            (sample.partition("/")[2], *rest): _Standing(number, report)
            for entry, sample, *rest, number, report in zip(*found.values(), strict=True)
            if entry < now
        }

    def _refusal(self, sample: str, found: _Standing | None, earlier: str) -> str:
        """Return why a result is refused; nothing if it adds to a report that is being issued anew."""
        if found is None:
            known = self._writing.results(samples=[sample], superseded=True)
            if any(result.report == earlier for result in known):
                return ""
            return f"no result of sample {sample} from that report is on record; import that report first"
        of = f" of report {found.report}" if found.report else " of no named report"
        if not earlier:
            return f"it is on record as result {found.number}{of}; {_TWICE}"
        return f"on record is result {found.number}{of}; name that report, or void that result first"


def _keys(batch: Batch) -> list[Key]:
    return list(zip(*(batch.columns[name] for name in _KEY), strict=True))


def _good(keys: list[Key], batch: Batch) -> Iterator[Key]:
    if not batch.bad:
        return iter(keys)
    return compress(keys, (at not in batch.bad for at in range(len(keys))))
