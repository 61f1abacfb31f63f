"""One invented station of the demo: it washes, fills, moves and samples through the real services."""

from __future__ import annotations

from dataclasses import dataclass, field
from datetime import date, datetime, time, timedelta
from typing import Any

from effluent.domain import (
    Container,
    ContainerKind,
    Engine,
    Method,
    Movement,
    MovementKind,
    Quantity,
    RunningMode,
    Sample,
    Wash,
)
from effluent.services import container, register, result, sample, wash
from effluent.services.demo import nozzle
from effluent.services.demo.scenario import habits
from effluent.services.demo.stage import FIRST_DAY, Stage

__all__ = ["Bottle", "Place", "Station"]

_DRUM_TAKES, _BOWSER_WAITS, _FULL_ENOUGH = 197, 350, 90
_RECOVERY_EVERY, _RECOVERY_AT = 5, 3
_OFFICER = "RS"


@dataclass(frozen=True)
class Place:
    """A station as it is set up; without a bowser its washes fill the tanks themselves."""

    site: str
    zone: str
    supervisor: str
    laboratory: str
    engines: tuple[Engine, ...]
    tanks: tuple[str, ...]
    bowser: str = ""
    has_winter: bool = False


@dataclass(frozen=True)
class Bottle:
    """A sample on its way to the laboratory; ``kind`` is ``water`` or ``drum``."""

    code: str
    kind: str
    source: str
    drawn_at: datetime


@dataclass
class Station:
    """What a station knows of itself while the two years pass.

    ``levels`` are whole litres; ``cleaners`` says which cleaner went into a drum.
    """

    stage: Stage
    place: Place
    levels: dict[str, int] = field(default_factory=dict)
    open_drums: dict[str, str] = field(default_factory=dict)
    closed_drums: list[str] = field(default_factory=list)
    cleaners: dict[str, str] = field(default_factory=dict)
    quarter: int = 0
    drum_count: int = 0

    @property
    def tank(self) -> str:
        """The tank or tote that takes rinse water this quarter."""
        return self.place.tanks[self.quarter % len(self.place.tanks)]

    def wash(self, week: int, *, accept: str = "", **given: Any) -> wash.Recorded:
        """Record the wash of a week; `given` overrides fields of it."""
        engine = self.place.engines[week % len(self.place.engines)]
        habit, day = habits()[engine.type_label], self._day(week, 1 + week % 2)
        air = round(self.stage.pick((-4, 6) if self._is_cold(day) else (8, 26)))
        if week % _RECOVERY_EVERY == _RECOVERY_AT:
            done = nozzle.recovery(self.stage, habit, lot=f"LOT-{habit.cleaner}-{1 + week // 26}")
        else:
            done = nozzle.desalination(self.stage, habit, air=air)
        logged = self._logged(engine, day, {"outside_air": Quantity(str(air), "degC"), **done, **given})
        litres = _whole_litres(logged.caught)
        target = self._drum(logged.cleaner, litres) if logged.cleaner else self.place.bowser or self.tank
        self.levels[target] = self.levels.get(target, 0) + litres
        by = self.place.supervisor
        return wash.record(self.stage.book, logged, {target: None}, by=by, accept=accept)

    def clean_with_grit(self, week: int) -> None:
        """Record an abrasive grit clean, which yields no liquid."""
        engine = self.place.engines[0]
        cleaned = self._logged(engine, self._day(week, 0), {"mode": RunningMode.IDLE, **nozzle.grit()})
        wash.record(self.stage.book, cleaned, {}, by=self.place.supervisor)

    def close_quarter(self, day: date, *, all_drums: bool) -> list[Bottle]:
        """Sample the quarter's tank and every drum that is full enough, and begin the next ones."""
        self.stage.set_clock(day, time(8), self.place.zone)
        self._empty_bowser()
        for cleaner, drum in list(self.open_drums.items()):
            if all_drums or self.levels[drum] >= _FULL_ENOUGH:
                self.closed_drums.append(self.open_drums.pop(cleaner))
        origins = [("water", self.tank), *(("drum", drum) for drum in self.closed_drums)]
        bottles = [self._sample(kind, source, day, n) for n, (kind, source) in enumerate(origins)]
        self.closed_drums = []
        self.quarter += 1
        return bottles

    def empty_full_bowser(self, week: int) -> None:
        """Transfer what the bowser holds on the morning after the wash, once it is worth it."""
        if self.levels.get(self.place.bowser, 0) >= _BOWSER_WAITS:
            self.stage.set_clock(self._day(week, 3), time(7), self.place.zone)
            self._empty_bowser()

    def draw_composite(self, point: str, day: date) -> Bottle:
        """Draw a composite sample at a discharge point during the morning of a release."""
        started_at = self.stage.set_clock(day, time(9), self.place.zone)
        self.stage.clock.pass_minutes(190)
        drawn = Sample(
            point=point,
            method=Method.COMPOSITE,
            started_at=started_at,
            ended_at=started_at + timedelta(hours=3),
            aliquots=6,
            **self._bottle(),
        )
        return Bottle(sample.take(self.stage.book, drawn, by=_OFFICER), "water", point, started_at)

    def release(self, tank: str, point: str, day: date) -> None:
        """Record that all water of a tank went to the sewer."""
        self.stage.set_clock(day, time(12, 30), self.place.zone)
        self._move(tank, destination=f"discharge point {point}, metered")

    def _logged(self, engine: Engine, day: date, fields: dict[str, Any]) -> Wash:
        performed_at = self.stage.set_clock(day, time(21, self.stage.chance.randrange(60)), self.place.zone)
        self.stage.clock.pass_minutes(40)
        standard = {"mode": RunningMode.MOTORING, "task": f"TASK-{day:%y%m%d}-{self.place.site}"}
        return Wash(
            engine=engine.code,
            site=self.place.site,
            performed_at=performed_at,
            performed_by=self.place.supervisor,
            **{**standard, **fields},
        )

    def _day(self, week: int, weekday: int) -> date:
        return FIRST_DAY + timedelta(weeks=week, days=weekday)

    def _is_cold(self, day: date) -> bool:
        return self.place.has_winter and day.month in (12, 1, 2)

    def _drum(self, cleaner: str, litres: int) -> str:
        """Return the drum of a cleaner that can take the water; a new one where there is none."""
        drum = self.open_drums.get(cleaner)
        if drum is not None and self.levels[drum] + litres <= _DRUM_TAKES:
            return drum
        if drum is not None:
            self.closed_drums.append(drum)
        self.drum_count += 1
        code = f"D-{self.place.site[0]}{self.drum_count:02}"
        size = Quantity("208", "L")
        new = Container(
            code=code, kind=ContainerKind.DRUM, site=self.place.site, capacity=size, material="steel"
        )
        self.open_drums[cleaner] = register.add(self.stage.book, new, by=self.place.supervisor)
        self.cleaners[code] = cleaner
        return code

    def _sample(self, kind: str, source: str, day: date, number: int) -> Bottle:
        drawn_at = self.stage.set_clock(day, time(9, 10 * number), self.place.zone)
        self.stage.clock.pass_minutes(8)
        drawn = Sample(container=source, method=Method.GRAB, started_at=drawn_at, **self._bottle())
        code = sample.take(self.stage.book, drawn, by=_OFFICER)
        if self.place.laboratory == "RIBEIRA":
            self._read_ph(code, drawn_at)
        return Bottle(code, kind, source, drawn_at)

    def _read_ph(self, code: str, drawn_at: datetime) -> None:
        """Enter a pH by hand: it keeps for a quarter of an hour only, so it is read beside the container."""
        cells = {
            "sample": code,
            "analyte": "pH",
            "value": f"{self.stage.pick((6.9, 8.6)):.1f}",
            "unit": "s.u.",
            "analysed_at": f"{drawn_at + timedelta(minutes=5):%Y-%m-%d %H:%M}",
            "test_method": "field meter",
        }
        result.enter(self.stage.book, cells, by=_OFFICER)

    def _bottle(self) -> dict[str, Any]:
        return {
            "taken_by": _OFFICER,
            "bottle": "1 L plastic",
            "preservation": "nitric acid to pH below 2, chilled",
            "laboratory": self.place.laboratory,
        }

    def _empty_bowser(self) -> None:
        if self.levels.get(self.place.bowser):
            self._move(self.place.bowser, target=self.tank)

    def _move(self, source: str, *, target: str | None = None, destination: str = "") -> None:
        """Move all that a container holds, a few minutes before the clock's time."""
        litres = self.levels.pop(source)
        moved = Movement(
            kind=MovementKind.TRANSFER if target else MovementKind.WITHDRAWAL,
            moved_at=self.stage.clock() - timedelta(minutes=5),
            moved_by=self.place.supervisor,
            volume=Quantity(str(litres), "L"),
            source=source,
            target=target,
            destination=destination,
        )
        container.move(self.stage.book, moved, by=self.place.supervisor)
        if target:
            self.levels[target] = self.levels.get(target, 0) + litres


def _whole_litres(caught: Quantity | None) -> int:
    return int(caught.magnitude) if caught else 0
