"""The stage of the demo: its ledger, a clock that is set by hand, and a seeded chance."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, date, datetime, time, timedelta
from random import Random
from zoneinfo import ZoneInfo

from effluent.store.ledger import Ledger

__all__ = ["FIRST_DAY", "Clock", "Stage"]

FIRST_DAY = date(2023, 7, 3)
"""The Monday on which the two years begin."""


class Clock:
    """Stands at an instant until it is set."""

    def __init__(self) -> None:
        self.at = datetime.combine(FIRST_DAY - timedelta(days=7), time(9), UTC)

    def __call__(self) -> datetime:
        """Return the instant."""
        return self.at

    def pass_minutes(self, minutes: int) -> None:
        """Let some time go by."""
        self.at += timedelta(minutes=minutes)


@dataclass(frozen=True)
class Stage:
    """What every act of the demo needs."""

    book: Ledger
    clock: Clock
    chance: Random

    def set_clock(self, day: date, clock_time: time, zone: str) -> datetime:
        """Set the clock to a local time and return that time without its zone, as people write it."""
        local = datetime.combine(day, clock_time)
        self.clock.at = local.replace(tzinfo=ZoneInfo(zone)).astimezone(UTC)
        return local

    def pick(self, span: tuple[float, float]) -> float:
        """Return a number between two."""
        low, high = span
        return low + (high - low) * self.chance.random()
