"""The two years of the demo, week by week, by the real services and the real file intake."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field
from datetime import date, datetime, time, timedelta
from pathlib import Path
from typing import Any

from effluent.domain import Container, ContainerKind, Engine, Outcome, Quantity, Site
from effluent.services import limit, manifest, register, wash
from effluent.services.check import check
from effluent.services.demo.post import Post
from effluent.services.demo.scenario import adoptions, limits, standing
from effluent.services.demo.shipping import draft, ship
from effluent.services.demo.stage import FIRST_DAY, Stage
from effluent.services.demo.station import Bottle, Place, Station
from effluent.services.ledger import prove
from effluent.services.wanted import Wanted

__all__ = ["Facts", "perform"]

_WEEKS = 104
_ROUNDS = (12, 25, 38, 51, 64, 77, 90, 102)
_GRIT = (8, 60)
_RAIN, _MISREAD, _NEAR, _FAULTY, _OVER, _SHIPMENT, _UNVERIFIED, _UNDETERMINED = 21, 30, 51, 64, 77, 86, 88, 90
_NO_BOTTLE = Bottle("", "", "", datetime.combine(FIRST_DAY, time()))
_FIRST_PERSON, _OFFICER, _DEPUTY = "AM", "RS", "LK"


@dataclass
class Facts:
    """What the story tells of; numbers are those of the ledger. ``witness`` is an entry with its digest."""

    washes: int = 0
    first_day: date = FIRST_DAY
    last_day: date = FIRST_DAY + timedelta(weeks=_WEEKS, days=1)
    rain_wash: str = ""
    misread_wash: str = ""
    misread_entry: int = 0
    refused_file: str = ""
    refusal: str = ""
    near: Bottle = _NO_BOTTLE
    over: Bottle = _NO_BOTTLE
    undetermined: Bottle = _NO_BOTTLE
    late_limit: str = ""
    returned: str = ""
    draft: str = ""
    waiting_tank: str = ""
    files: list[str] = field(default_factory=list)
    papers: list[str] = field(default_factory=list)
    outcomes: Counter[Outcome] = field(default_factory=Counter)
    number: str = ""
    entries: int = 0
    digest: str = ""
    witness: tuple[int, str] = (0, "")


def perform(stage: Stage, folder: Path) -> Facts:
    """Let two years pass and return what the story tells of.

    Parameters
    ----------
    stage : Stage
        With a new ledger that holds its first person.
    folder : Path
        Has the folders ``laboratory`` and ``paper``.
    """
    years = _Years(stage, folder)
    years.begin()
    for week in range(_WEEKS):
        years.pass_week(week)
    years.end()
    return years.facts


class _Years:
    """What goes on at both stations."""

    def __init__(self, stage: Stage, folder: Path) -> None:
        self.stage = stage
        self.facts = Facts()
        self.post = Post(stage, folder / "laboratory")
        self.paper = folder / "paper"
        self.cabo = _station(stage, "CVL", supervisor="AM", laboratory="RIBEIRA")
        self.saltgrass = _station(stage, "SGP", supervisor="JB", laboratory="SANDGATE")
        self.sent: dict[str, list[Bottle]] = {}
        self.outlet: list[Bottle] = []
        self.stored: dict[str, list[str]] = {"CVL": [], "SGP": []}

    def begin(self) -> None:
        """Record what stands: people, places, engines, containers and limits, the latter verified."""
        for record in standing():
            if record.code != _FIRST_PERSON:
                register.add(self.stage.book, record, by=_FIRST_PERSON)
            self.stage.clock.pass_minutes(2)
        codes = [limit.enter(self.stage.book, each, by=_OFFICER) for each in limits("local")]
        codes += [limit.adopt(self.stage.book, each, by=_OFFICER) for each in adoptions()]
        self.stage.clock.pass_minutes(24 * 60)
        for code in codes:
            limit.verify(self.stage.book, code, by=_DEPUTY)

    def pass_week(self, week: int) -> None:
        """Wash at both stations, then do what that week brings."""
        friday = FIRST_DAY + timedelta(weeks=week, days=4)
        self._wash(week)
        if week in _ROUNDS:
            self._sample(week, friday)
        if week - 1 in _ROUNDS:
            self._receive(week - 1, friday)
        if week - 2 in _ROUNDS:
            self._release(friday)
        if week - 3 in _ROUNDS:
            self.post.deliver(self.cabo, self.outlet, friday)
        if week == _MISREAD:
            self._amend(friday)
        if week == _UNVERIFIED:
            self._enter_late_limit(friday)
        if week == _SHIPMENT:
            self.facts.returned = ship(self.cabo, self.stored["CVL"], friday, self.paper)

    def end(self) -> None:
        """Draft the last manifest and note how the ledger stands."""
        facts, book = self.facts, self.stage.book
        facts.draft = draft(self.saltgrass, self.stored["SGP"], facts.last_day, self.paper)
        facts.waiting_tank = self.sent["CVL"][0].source
        facts.files, facts.papers = self.post.files, sorted(path.name for path in self.paper.iterdir())
        facts.outcomes = Counter(verdict.outcome for verdict in check(book).verdicts)
        facts.witness = self._witness()
        report = prove(book)
        facts.number, facts.entries, facts.digest = report.number, report.entries, report.digest

    def _witness(self) -> tuple[int, str]:
        """Return the entry that the paper of the returned manifest prints."""
        entry = manifest.show(self.stage.book, self.facts.returned).versions[-1].entry
        return entry.sequence, entry.digest

    def _wash(self, week: int) -> None:
        if week in _GRIT:
            self.cabo.clean_with_grit(week)
            self.facts.washes += 1
        at_cabo = self.cabo.wash(week, **_SPECIAL.get(week, {}))
        self.saltgrass.wash(week)
        self.saltgrass.empty_full_bowser(week)
        self.facts.washes += 2
        if week == _RAIN:
            self.facts.rain_wash = at_cabo.code
        if week == _MISREAD:
            self.facts.misread_wash = at_cabo.code

    def _sample(self, week: int, day: date) -> None:
        for station in (self.cabo, self.saltgrass):
            bottles = station.close_quarter(day, all_drums=week in (_NEAR, _OVER, _ROUNDS[-1]))
            self.sent[station.place.site] = bottles
            self.stored[station.place.site] += [each.source for each in bottles if each.kind == "drum"]
        if week == _NEAR:
            self.facts.near = _first_drum(self.sent["CVL"])
            self.post.told[self.facts.near.code, "Zn"] = "1650.0"
        if week == _OVER:
            self.facts.over = _first_drum(self.sent["CVL"])
            self.post.told[self.facts.over.code, "Cadmium"] = "0.138"
        if week == _UNDETERMINED:
            self.facts.undetermined = self.sent["SGP"][0]
            self.post.told[self.facts.undetermined.code, "Silver total (ug/L)"] = "<500"

    def _receive(self, week: int, day: date) -> None:
        if week == _FAULTY:
            spoiled = self.post.deliver_spoiled(self.cabo, self.sent["CVL"], day)
            self.facts.refused_file, self.facts.refusal = spoiled
        for station in (self.cabo, self.saltgrass):
            self.post.deliver(station, self.sent[station.place.site], day)

    def _release(self, day: date) -> None:
        """Let the water of the quarter's tanks go where every limit is shown to hold; else it stays."""
        for station in (self.cabo, self.saltgrass):
            tank = self.sent[station.place.site][0]
            found = check(self.stage.book, Wanted(sample=tank.code)).verdicts
            if any(verdict.outcome in (Outcome.OVER, Outcome.UNDETERMINED) for verdict in found):
                continue
            point = f"{station.place.site}-SEW"
            if station is self.cabo:
                self.outlet = [station.draw_composite(point, day)]
            station.release(tank.source, point, day)

    def _amend(self, day: date) -> None:
        self.facts.misread_entry = self.stage.book.head().sequence
        self.stage.set_clock(day, time(16), self.cabo.place.zone)
        wash.amend(
            self.stage.book,
            self.facts.misread_wash,
            {"caught": Quantity("52", "L", "1")},
            by="AM",
            reason="digits swapped: the meter showed 52 L",
        )
        self.cabo.levels[self.cabo.tank] += 52 - 25

    def _enter_late_limit(self, day: date) -> None:
        self.stage.set_clock(day, time(15), self.cabo.place.zone)
        (late,) = limits("unverified")
        self.facts.late_limit = limit.enter(self.stage.book, late, by=_OFFICER)


_SPECIAL: dict[int, dict[str, Any]] = {
    _RAIN: {
        "rinse_water": Quantity("50", "L"),
        "caught": Quantity("57", "L", "1"),
        "weather": "heavy rain",
        "accept": "rain ran into the drip pan before it was covered",
    },
    _MISREAD: {"rinse_water": Quantity("66", "L"), "caught": Quantity("25", "L", "1")},
}


def _station(stage: Stage, code: str, *, supervisor: str, laboratory: str) -> Station:
    records = [record for record in standing() if getattr(record, "site", code) == code]
    site = next(record for record in records if isinstance(record, Site) and record.code == code)
    containers = [record for record in records if isinstance(record, Container)]
    return Station(
        stage,
        Place(
            site=code,
            zone=site.time_zone,
            supervisor=supervisor,
            laboratory=laboratory,
            engines=tuple(record for record in records if isinstance(record, Engine)),
            tanks=tuple(each.code for each in containers if each.kind is not ContainerKind.BOWSER),
            bowser="".join(each.code for each in containers if each.kind is ContainerKind.BOWSER),
            has_winter=code == "SGP",
        ),
    )


def _first_drum(bottles: list[Bottle]) -> Bottle:
    return next(bottle for bottle in bottles if bottle.kind == "drum")
