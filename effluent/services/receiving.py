"""Results on their way into a ledger: checked against what is on record, then added batch by batch."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from effluent.errors import FileRefused, RowError
from effluent.services.bottle import Bottles
from effluent.services.delivery import Batch
from effluent.services.doubt import Doubts
from effluent.services.question import answer
from effluent.services.repeat import Repeats
from effluent.store.writing import Writing

__all__ = ["Receiving"]

_MOST_ERRORS, _MOST_LOOKED_FOR = 10_000, 100


class Receiving:
    """One import, or one result by hand, inside one entry that is being written.

    Nothing is refused before `finish`, so that everything wrong is named at once; results are added only
    as long as nothing is wrong.
    """

    def __init__(self, writing: Writing) -> None:
        self._writing = writing
        self._bottles = Bottles(writing)
        self._doubts = Doubts(writing, self._bottles)
        self._repeats = Repeats(writing)
        self._errors: list[RowError] = []
        self._not_kept = 0
        self._missed: dict[str, str] = {}
        self.first_number = 0
        self.count = 0

    def take(self, batch: Batch, *, file: str | None = None, prefix: str = "") -> None:
        """Check a batch and add it.

        Parameters
        ----------
        file : str, optional
            Code of the file it came from.
        prefix : str
            Names the file in what is said of its rows, if there are several.
        """
        self._bottles.learn(batch.columns["sample"])
        supersedes, repeated = self._repeats.on_record(batch, self._bottles)
        found = [*batch.errors, *self._wrong_samples(batch), *repeated]
        self._keep(sorted(found, key=lambda error: error.row), prefix)
        if not self._errors:
            columns = batch.columns
            labels = [f"{prefix}row {row}" for row in columns["file_row"]] if file else ["the result"]
            self._doubts.look_at(columns, labels)
            self._add(columns, supersedes, file)

    def suspects(self) -> frozenset[int]:
        """Return the hashes of results that seem to stand in the files more than once."""
        return self._repeats.suspects()

    def take_again(self, batch: Batch, suspects: frozenset[int], *, prefix: str = "") -> None:
        """Name the results among the suspects that do stand in the files more than once."""
        self._keep(self._repeats.within(batch, suspects, prefix), prefix)

    def finish(self, name: str, *, accept: str) -> None:
        """Refuse everything if anything was wrong, or is questioned and not accepted.

        Raises
        ------
        FileRefused, Questioned
        """
        if not self._errors:
            answer(self._writing, self._doubts.questions(), accept=accept)
            return
        raise FileRefused(name, tuple(self._errors), self._not_kept)

    def _keep(self, errors: Iterable[RowError], prefix: str) -> None:
        for error in errors:
            if len(self._errors) < _MOST_ERRORS:
                self._errors.append(error._replace(column=prefix + error.column))
            else:
                self._not_kept += 1

    def _wrong_samples(self, batch: Batch) -> Iterator[RowError]:
        """Yield what is wrong with samples: not in the ledger, or analysed before they were drawn."""
        bottles, columns = self._bottles, batch.columns
        for at, (sample, analysed_at) in enumerate(
            zip(columns["sample"], columns["analysed_at"], strict=True)
        ):
            bottle = bottles.get(sample)
            if bottle is None:
                if sample:
                    yield batch.error(at, "sample", self._missing(sample))
            elif analysed_at is not None and analysed_at < bottle.drawn_at:
                drawn = f"{bottle.drawn_at[:16].replace('T', ' ')} UTC"
                reason = f"analysed before the sample was drawn ({drawn}); compare both dates and time zones"
                yield batch.error(at, "analysed_at", reason)

    def _missing(self, sample: str) -> str:
        if sample not in self._missed:
            if len(self._missed) == _MOST_LOOKED_FOR:
                return "no such sample"
            near = self._writing.near_codes("sample", sample)
            advice = f"did you mean {' or '.join(near)}?" if near else "record it with: effluent sample take"
            self._missed[sample] = f"no such sample in this ledger; {advice}"
        return self._missed[sample]

    def _add(self, columns: Mapping[str, list[Any]], supersedes: list[int | None], file: str | None) -> None:
        count = len(supersedes)
        rows = [None] * count if file is None else columns["file_row"]
        whole = {**columns, "supersedes": supersedes, "file": [file] * count, "file_row": rows}
        number = self._writing.add_result_columns(whole)
        self.first_number = self.first_number or number
        self.count += count
