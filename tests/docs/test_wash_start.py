"""Logging a wash, a container or a sample waits for no slow library that it does not need."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.docs.test_start import loaded
from tests.washing import add_station, rinse
from tests.world import world

RUN = "import sys; from effluent.__main__ import run; status = run(sys.argv[1:]); assert status == 0, status"
SLOW = {"numpy", "pandas", "pint", "reportlab"}
WASH = (
    *("wash", "record", "--kind", "desalination wash", "--mode", "motoring", "--engine", "E-100"),
    *("--site", "LIS", "--performed-at", "2026-03-03T12:00", "--performed-by", "AM", "--rinse-water", "60 L"),
    *("--caught", "48 L ± 2 %", "--caught-by", "meter", "--into", "D-1", "--water-reading", "8 uS/cm"),
)
CONTAINER = ("container", "add", "D-9", "--kind", "drum", "--site", "LIS", "--capacity", "208 L")
TRANSFER = ("container", "transfer", "D-1", "D-2", "--volume", "5 L", "--at", "2026-03-04T12:00")
SAMPLE = (
    *("sample", "take", "--container", "D-1", "--method", "grab", "--started-at", "2026-03-04T12:00"),
    *("--taken-by", "RS"),
)


@pytest.mark.parametrize("command", [WASH, CONTAINER, TRANSFER, SAMPLE], ids=lambda each: " ".join(each[:2]))
def test_logging_loads_nothing_slow(command: tuple[str, ...], tmp_path: Path) -> None:
    place = str(tmp_path / "ledger")
    with world(place) as book:
        add_station(book)
        rinse(book, "48 L", "D-1")
    modules = loaded(RUN, *command, "--ledger", place, "--by", "AM")
    assert {name.partition(".")[0] for name in modules} & SLOW == set()
