"""The commands of samples, on a real ledger."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from effluent.settings import CAUTION

Typed = Callable[..., tuple[int, list[str]]]
GRAB = ("sample", "take", "--point", "SEW", "--method", "grab", "--taken-by", "RS")


def test_sample_is_taken_listed_and_voided(typed: Typed) -> None:
    assert typed(*GRAB, "--started-at", "2026-05-02T12:00") == (0, ["sample S-0001 is recorded"])
    assert typed("sample", "list")[1] == [
        "code    container  wash  point  method  started at                      taken by",
        "------  ---------  ----  -----  ------  ------------------------------  --------",
        "S-0001                   SEW    grab    2026-05-02 12:00 Europe/Lisbon  RS",
        "",
        CAUTION,
    ]
    assert typed("sample", "void", "S-0001", "--reason", "bottle broke") == (0, ["sample S-0001 is void"])
    assert typed("sample", "list")[1][0] == "no sample is recorded"


@pytest.mark.parametrize(
    ("arguments", "status", "complaint"),
    [
        (("--started-at", "2999-06-02T12:00"), 2, "it lies in the future"),
        (("--started-at", "2026-03-29T01:30"), 2, "the clocks of Europe/Lisbon skipped it that day"),
        (("--started-at", "2026-05-02T12:00", "--wash", "W-1"), 2, "exactly one container, wash or"),
        (("--started-at", "2026-05-02T12:00", "--ended-at", "2026-05-02T13:00"), 2, "was it a composite?"),
        (("--started-at", "2026-05-02T12:00", "--fraction", "total d"), 2, "write one of: total"),
        (("--started-at", "2026-05-02T12:00", "--laboratory", "LAB"), 3, "no company 'LAB'"),
        ((), 2, "Missing option '--started-at'"),
    ],
)
def test_wrong_sample_is_refused_in_one_paragraph(
    typed: Typed, arguments: tuple[str, ...], status: int, complaint: str
) -> None:
    found, lines = typed(*GRAB, *arguments)
    assert found == status
    assert complaint in lines[-1]
    assert typed("sample", "list")[1][0] == "no sample is recorded"


def test_container_without_water_gives_no_sample(typed: Typed) -> None:
    grab = ("sample", "take", "--container", "D-1", "--method", "grab", "--taken-by", "RS")
    assert typed(*grab, "--started-at", "2026-05-02T12:00") == (
        4,
        [
            "E303: the sample is refused, the chain is broken:",
            "  - container D-1 had received nothing by then",
        ],
    )
