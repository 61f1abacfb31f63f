"""Published limits held through the whole use case: adopted, a result read in, a verdict.

Each case stands at a boundary that the rule's own words decide. Sources, all read on 2026-12-01 in the 2015
annual edition of the Code of Federal Regulations:

- 40 CFR 433.17(a): cadmium, maximum for any 1 day 0.11 mg/L ("maximum": a reading of 0.11 does not exceed it)
- 40 CFR 261.24(a) and Table 1: a waste is toxic if its extract holds a contaminant "at a concentration equal
  to or greater than" the value of the table; cadmium (D006) 1.0 mg/L
- 40 CFR 403.5(b)(2): no discharge "with pH lower than 5.0"
- 40 CFR 403.5(b)(1): no waste stream "with a closed cup flashpoint of less than 140 degrees Fahrenheit or
  60 degrees Centigrade"
- 40 CFR 136.3 Table II: metals are kept 6 months at most, pH is analysed within 15 minutes
"""

from __future__ import annotations

from datetime import date
from pathlib import Path

import pytest

from effluent.domain import Outcome, Verdict
from effluent.services.check import check
from effluent.services.importing import Order, import_files
from effluent.services.limit import Adoption, adopt
from tests.world import add_sample, world

CADMIUM = "40CFR433.17/cadmium/daily"
TOXIC = "40CFR261.24/cadmium/instantaneous"
ACID = "40CFR403.5/ph/instantaneous"
FLASH = "40CFR403.5/flash-point/instantaneous"


def verdict(place: str, folder: Path, key: str, cells: str) -> Verdict:
    """Adopt a row for a point, read in one result of a sample drawn there, and give its only verdict."""
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
        heading = "sample,analyte,fraction,value,unit,analysed_at\n"
        file.write_text(f"{heading}{add_sample(book, point='SEW')},{cells}\n", encoding="utf-8")
        import_files(book, Order(paths=[file]), by="RS", accept="a test of the boundary")
        (found,) = check(book).verdicts
    return found


@pytest.mark.parametrize(
    ("key", "cells", "outcome"),
    [
        (CADMIUM, "Cd,total,0.11,mg/L,", Outcome.WITHIN),
        (CADMIUM, "Cadmium,total,110,ug/L,", Outcome.WITHIN),
        (CADMIUM, "7440-43-9,total,110.0000000000001,µg/L,", Outcome.OVER),
        (CADMIUM, "Cd,total,0.1101,mg/L,", Outcome.OVER),
        (CADMIUM, "Cd,total,<0.11,mg/L,", Outcome.WITHIN),
        (CADMIUM, "Cd,total,<0.2,mg/L,", Outcome.UNDETERMINED),
        (CADMIUM, "Cd,dissolved,0.05,mg/L,", Outcome.UNDETERMINED),
        (CADMIUM, "Cd,dissolved,0.12,mg/L,", Outcome.OVER),
        (TOXIC, "Cd,TCLP,1.0,mg/L,", Outcome.OVER),
        (TOXIC, "Cd,TCLP,1000,ug/L,", Outcome.OVER),
        (TOXIC, "Cd,TCLP,0.99,mg/L,", Outcome.WITHIN),
        (TOXIC, "Cd,total,0.5,mg/L,", Outcome.UNDETERMINED),
        (ACID, "pH,,5.0,,", Outcome.WITHIN),
        (ACID, "pH,,4.99,s.u.,", Outcome.OVER),
        (FLASH, "flash point,,60,°C,", Outcome.WITHIN),
        (FLASH, "flash point,,139.9,°F,", Outcome.OVER),
        (FLASH, "flash point,,>60,°C,", Outcome.WITHIN),
    ],
)
def test_the_words_of_the_rule_decide_at_its_boundary(
    ledger_place: str, tmp_path: Path, key: str, cells: str, outcome: Outcome
) -> None:
    assert verdict(ledger_place, tmp_path, key, cells).outcome == outcome


@pytest.mark.parametrize(
    ("cells", "late"),
    [
        ("Cd,total,0.1,mg/L,2026-09-02T11:00Z", False),
        ("Cd,total,0.1,mg/L,2026-09-02T11:01Z", True),
    ],
)
def test_a_metal_keeps_six_months(ledger_place: str, tmp_path: Path, cells: str, *, late: bool) -> None:
    """Six calendar months from noon in Lisbon end at noon there, in September an hour ahead of UTC."""
    notes = verdict(ledger_place, tmp_path, CADMIUM, cells).notes
    assert ("analysed outside its holding time" in notes) == late


def test_ph_is_a_matter_of_minutes(ledger_place: str, tmp_path: Path) -> None:
    found = verdict(ledger_place, tmp_path, ACID, "pH,,7,s.u.,2026-03-02T12:15Z")
    assert found.notes == ("limit not verified by a second person",)
