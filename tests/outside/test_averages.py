"""Published averages held through the whole use case: adopted, results read in, a verdict.

Sources, read on 2026-12-01 in the 2015 annual edition of the Code of Federal Regulations:

- 40 CFR 433.17(a): cadmium, monthly average not above 0.07 mg/L
- 40 CFR 413.14(c): cadmium, average of daily values for 4 consecutive monitoring days not above 0.7 mg/L

The results are invented, and their averages worked by hand.
"""

from __future__ import annotations

from datetime import date, timedelta
from pathlib import Path

import pytest

from effluent.domain import Outcome, Verdict
from effluent.services.check import check
from effluent.services.importing import Order, import_files
from effluent.services.limit import Adoption, adopt
from tests.world import NOON, add_sample, world

MONTH = "40CFR433.17/cadmium/month"
FOUR_DAY = "40CFR413.14c/cadmium/four-day"


def verdicts(place: str, folder: Path, key: str, cells: list[str]) -> tuple[Verdict, ...]:
    """Adopt a row for a point and read in one result for each week from 2 March 2026 on."""
    file = folder / "lab.csv"
    with world(place) as book:
        adoption = Adoption(
            key=key,
            point="SEW",
            effective_from=date(2026, 1, 1),
            acknowledge="a test of the boundary",
            changes={"authority": "Board (invented)"},
        )
        adopt(book, adoption, by="RS")
        weeks = [NOON + timedelta(weeks=week) for week in range(len(cells))]
        samples = [add_sample(book, point="SEW", started_at=day) for day in weeks]
        rows = [f"{sample},Cd,total,{cell}" for sample, cell in zip(samples, cells, strict=True)]
        file.write_text("\n".join(["sample,analyte,fraction,value,unit", *rows]) + "\n", encoding="utf-8")
        import_files(book, Order(paths=[file]), by="RS", accept="a test of the boundary")
        return check(book).verdicts


@pytest.mark.parametrize(
    ("cells", "outcome"),
    [
        (["0.05,mg/L", "70,ug/L", "0.09,mg/L"], Outcome.WITHIN),  # 0.07: not exceeded
        (["0.05,mg/L", "70.0001,ug/L", "0.09,mg/L"], Outcome.OVER),
        (["0.10,mg/L", "<0.02,mg/L"], Outcome.WITHIN),  # at most 0.06
        (["0.13,mg/L", "<0.02,mg/L"], Outcome.UNDETERMINED),  # 0.065 to 0.075
    ],
)
def test_a_monthly_average_of_metal_finishing(
    ledger_place: str, tmp_path: Path, cells: list[str], outcome: Outcome
) -> None:
    (found,) = verdicts(ledger_place, tmp_path, MONTH, cells)
    assert (found.outcome, found.day) == (outcome, date(2026, 3, 31))
    assert (found.limit.value.text, found.limit.value.unit, found.limit.reference) == ("0.07", "mg/L", MONTH)


def test_an_average_over_four_monitoring_days_of_electroplating(ledger_place: str, tmp_path: Path) -> None:
    """(0.1 + 0.5 + 1.2 + 1.0) / 4 = 0.7; (0.5 + 1.2 + 1.0 + 0.2) / 4 = 0.725."""
    cells = ["0.1,mg/L", "0.5,mg/L", "1.2,mg/L", "1.0,mg/L", "0.2,mg/L"]
    found = verdicts(ledger_place, tmp_path, FOUR_DAY, cells)
    assert [one.limit.value.text for one in found] == ["0.7", "0.7"]
    assert [one.outcome for one in found] == [Outcome.WITHIN, Outcome.OVER]
