"""What an invented wash of the demo puts in and catches."""

from __future__ import annotations

from typing import Any

from effluent.domain import MeasuredBy, Quantity, WashKind
from effluent.services.demo.scenario import Habit
from effluent.services.demo.stage import Stage

__all__ = ["desalination", "grit", "recovery"]


def desalination(stage: Stage, habit: Habit, *, air: int) -> dict[str, Any]:
    """Return the fields of a desalination wash at an outside air temperature in degrees Celsius."""
    rinse = round(stage.pick(habit.rinse))
    cold = {"additive": "propylene glycol", "additive_volume": _litres(rinse // 10)} if air <= 1 else {}
    return {
        "kind": WashKind.DESALINATION,
        "rinse_water": _litres(rinse),
        "rinses": 1,
        "water_reading": Quantity(f"{stage.pick((1.2, 9.0)):.1f}", "uS/cm"),
        "caught": _caught(stage, habit, rinse),
        "caught_by": MeasuredBy.METER,
        **cold,
    }


def recovery(stage: Stage, habit: Habit, *, lot: str) -> dict[str, Any]:
    """Return the fields of a performance recovery wash with the cleaner of that engine type."""
    rinse = round(stage.pick(habit.recovery_rinse))
    water = {"solution_water": _litres(habit.water)} if habit.water else {}
    return {
        "kind": WashKind.RECOVERY,
        "cleaner": habit.cleaner,
        "lot": lot,
        "concentrate": _litres(habit.concentrate),
        **water,
        "rinse_water": _litres(rinse),
        "soaks": 1,
        "rinses": 2,
        "caught": _caught(stage, habit, habit.concentrate + habit.water + rinse),
        "caught_by": MeasuredBy.LEVEL_STICK,
        "retained": _litres(1),
        "retained_basis": "estimate of the supervisor (invented)",
    }


def grit() -> dict[str, Any]:
    """Return the fields of an abrasive grit clean."""
    return {"kind": WashKind.GRIT, "grit": "crushed nut shell", "grit_mass": Quantity("1.5", "kg")}


def _caught(stage: Stage, habit: Habit, put_in: int) -> Quantity:
    return Quantity(str(round(put_in * stage.pick(habit.caught) / 100)), "L", "1")


def _litres(volume: int) -> Quantity:
    return Quantity(str(volume), "L")
