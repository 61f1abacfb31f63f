"""What is doubtful about results as they come in: wrong units, reporting limits that prove nothing."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from datetime import date, datetime
from math import inf
from typing import Any
from zoneinfo import ZoneInfo

from effluent.calc.plausible import FAR, history_question, is_far, medians, reporting_question
from effluent.calc.rule import in_force, limit_unit, written_cut
from effluent.domain import Bound, Limit
from effluent.services.bottle import Bottle, Bottles
from effluent.store.reading import Reading

__all__ = ["Doubts"]

Columns = Mapping[str, Sequence[Any]]

_LATEST = 200  # samples of a place whose results are its history
_ROWS_NAMED, _MOST_QUESTIONS = 5, 50


class Doubts:
    """Questions about results, gathered over a whole import and grouped by what they ask."""

    def __init__(self, reading: Reading, bottles: Bottles) -> None:
        self._reading = reading
        self._bottles = bottles
        self._histories: dict[str, dict[tuple[str, str], float]] = {}
        self._far: dict[str, float] = {}
        self._limits = _Limits(reading)
        self._asked: dict[tuple[str, ...], _Asked] = {}

    def look_at(self, columns: Columns, labels: Sequence[str]) -> None:
        """Look at results of known samples; `labels` name each as in ``row 12``."""
        places = [self._bottles[sample].place for sample in columns["sample"]]
        for place in dict.fromkeys(places):
            self._learn(place)
        self._ask_history(columns, labels, places)
        self._ask_reporting(columns, labels)

    def questions(self) -> tuple[str, ...]:
        """Return one sentence for each thing asked."""
        asked = [str(each) for each in self._asked.values()]
        more = [f"and {len(asked) - _MOST_QUESTIONS} more questions"] if len(asked) > _MOST_QUESTIONS else []
        return (*asked[:_MOST_QUESTIONS], *more)

    def _learn(self, place: str) -> None:
        """Find the median of each analyte in the latest results of a place."""
        if place in self._histories:
            return
        self._histories[place] = found = self._history(place)
        for (analyte, _), median in found.items():
            if median > 0:
                self._far[analyte] = min(self._far.get(analyte, inf), FAR * median)

    def _history(self, place: str) -> dict[tuple[str, str], float]:
        noun, _, code = place.partition("/")
        samples = self._reading.latest_samples(**{noun: code}, most=_LATEST) if code else ()
        names = ("entry", "analyte", "canonical_unit", "value")
        found = self._reading.result_columns(names, samples=samples)
        return medians(
            ((analyte, unit), value)
            for entry, analyte, unit, value in zip(*found.values(), strict=True)
            if entry < self._reading.as_of
        )

    def _ask_history(self, columns: Columns, labels: Sequence[str], places: Sequence[str]) -> None:
        far = self._far
        for at, (analyte, value) in enumerate(zip(columns["analyte"], columns["value"], strict=True)):
            if analyte not in far or value < far[analyte]:
                continue
            unit = columns["canonical_unit"][at]
            median = self._histories[places[at]].get((analyte, unit))
            if median is not None and is_far(value, median):
                reading = f"{analyte} {columns['text'][at]} {columns['unit'][at]}".rstrip()
                question = history_question(reading, median, unit=unit)
                self._ask((places[at], analyte, unit), question, labels[at])

    def _ask_reporting(self, columns: Columns, labels: Sequence[str]) -> None:
        names = ("analyte", "fraction", "canonical_unit", "qualifier", "value", "reporting_value")
        lowest = self._limits.lowest
        if not lowest:
            return
        for at, (analyte, fraction, unit, qualifier, value, reporting) in enumerate(
            zip(*(columns[name] for name in names), strict=True)
        ):
            least = lowest.get((analyte, fraction, unit))
            if least is None:
                continue
            bound = value if reporting is None and qualifier == "<" else reporting
            if bound is not None and bound > least:
                self._ask_limit(columns, at, bound=bound, label=labels[at])

    def _ask_limit(self, columns: Columns, at: int, *, bound: float, label: str) -> None:
        key = tuple(columns[name][at] for name in ("analyte", "fraction", "canonical_unit"))
        limit = self._limits.strictest(key, self._bottles[columns["sample"][at]])
        if limit is not None and bound > written_cut(limit).double:
            reported = columns["reporting_limit"][at] or columns["number"][at]
            shown = f"{columns['analyte'][at]} {reported} {columns['unit'][at]}".rstrip()
            question = reporting_question(shown, f"{limit.code} ({limit.value} at {limit.point})")
            self._ask((limit.code, reported), question, label)

    def _ask(self, key: tuple[str, ...], question: str, label: str) -> None:
        self._asked.setdefault(key, _Asked(question)).add(label)


class _Asked:
    """A question and the results it is about; the first few are named."""

    def __init__(self, question: str) -> None:
        self._question = question
        self._named: list[str] = []
        self._count = 0

    def add(self, label: str) -> None:
        self._count += 1
        if len(self._named) < _ROWS_NAMED:
            self._named.append(label)

    def __str__(self) -> str:
        more = self._count - len(self._named)
        return f"{', '.join(self._named)}{f' and {more} more' if more else ''}: {self._question}"


class _Limits:
    """The maximum limits of the ledger by analyte, fraction and canonical unit."""

    def __init__(self, reading: Reading) -> None:
        self._reading = reading
        self._by_key: dict[tuple[str, ...], list[Limit]] = {}
        for limit in reading.values("limit"):
            if limit.bound is Bound.MAXIMUM:
                key = (limit.analyte, str(limit.fraction), limit_unit(limit.value))
                self._by_key.setdefault(key, []).append(limit)
        self.lowest = {
            key: min(written_cut(limit).double for limit in limits) for key, limits in self._by_key.items()
        }
        points = reading.values("point")
        zones = {f"site/{site.code}": ZoneInfo(site.time_zone) for site in reading.values("site")}
        self._points = {f"point/{point.code}": {point.code} for point in points}
        self._zones = zones | {f"point/{point.code}": zones[f"site/{point.site}"] for point in points}
        for point in points:
            self._points.setdefault(f"site/{point.site}", set()).add(point.code)

    def strictest(self, key: tuple[str, ...], bottle: Bottle) -> Limit | None:
        """Return the lowest limit in force for a sample on its day, if there is one."""
        found = list(self._in_force(key, bottle))
        return min(found, key=lambda limit: written_cut(limit).value) if found else None

    def _in_force(self, key: tuple[str, ...], bottle: Bottle) -> Iterator[Limit]:
        day, points = self._day(bottle), self._points.get(bottle.place, set())
        for limit in self._by_key.get(key, ()):
            if limit.point in points and in_force(limit, day):
                yield limit

    def _day(self, bottle: Bottle) -> date:
        instant = datetime.fromisoformat(bottle.started_at)
        return instant.astimezone(self._zones.get(bottle.place)).date()
