"""The commands of containers and of movements, on a real ledger."""

from __future__ import annotations

import json
from collections.abc import Callable

import pytest

from effluent.settings import CAUTION

Typed = Callable[..., tuple[int, list[str]]]
WASH = (
    *("wash", "record", "--kind", "desal", "--mode", "motoring", "--engine", "E-100", "--site", "LIS"),
    *("--performed-at", "2026-05-02T12:00", "--performed-by", "AM", "--rinse-water", "200 L"),
    *("--caught", "150 ± 2 L", "--caught-by", "meter", "--into", "D-1"),
)
POUR = ("container", "transfer", "D-1", "T-1", "--volume", "120 L", "--at", "2026-05-02T13:00")
LEAVE = (
    *("container", "withdraw", "T-1", "--volume", "20 L", "--at", "2026-05-03T08:00"),
    *(
        "--destination",
        "separator",
        "--measured-by",
        "meter",
        "--remarks",
        "approved by RS",
        "--moved-by",
        "RS",
    ),
)


def test_contents_tell_level_origins_and_movements(typed: Typed) -> None:
    typed(*WASH)
    assert typed(*POUR) == (0, ["movement V-0002 is recorded: 120 L from D-1 into T-1"])
    assert typed(*LEAVE) == (0, ["movement V-0003 is recorded: 20 L from T-1 to separator"])
    assert typed("container", "contents", "T-1") == (
        0,
        [
            "container T-1: 100.0 L, room for 850.0 L",
            "",
            "wash    engine  kind               cleaner type  holds L",
            "------  ------  -----------------  ------------  -------",
            "W-0001  E-100   desalination wash  no cleaner    100.0",
            "",
            "movement  kind        at                              from  into  volume  wash  destination",
            "--------  ----------  ------------------------------  ----  ----  ------  ----  -----------",
            "V-0002    transfer    2026-05-02 13:00 Europe/Lisbon  D-1   T-1   120 L",
            "V-0003    withdrawal  2026-05-03 08:00 Europe/Lisbon  T-1         20 L          separator",
            "",
            CAUTION,
        ],
    )


def test_empty_container_holds_nothing(typed: Typed) -> None:
    assert typed("container", "contents", "D-1")[1] == [
        "container D-1: 0.0 L, room for 197.6 L",
        "it holds nothing",
        "",
        CAUTION,
    ]


def test_contents_as_json_are_exact_and_answer_as_of(typed: Typed) -> None:
    typed(*WASH)
    entry = typed("ledger", "history")[1][-3].split()[0]
    typed(*POUR)
    answer = json.loads("\n".join(typed("container", "contents", "D-1", "--json", "--as-of", entry)[1]))
    assert (answer["level_l"], answer["working_capacity_l"]) == ("150", "197.6")
    assert answer["origins"] == [
        {"wash": "W-0001", "engine": "E-100", "cleaner_type": None, "volume_l": "150"}
    ]
    assert answer["movements"][0]["moved_at"] == "2026-05-02T12:00:00+01:00"


@pytest.mark.parametrize(
    ("arguments", "status", "complaint"),
    [
        (("transfer", "D-1", "D-1", "--volume", "1 L"), 2, "into the container it left"),
        (("transfer", "D-1", "X-1", "--volume", "1 L"), 2, "it stands at CHI, D-1 at LIS"),
        (("transfer", "D-1", "D-9", "--volume", "1 L"), 3, "no container 'D-9'"),
        (("transfer", "D-1", "D-2", "--volume", "1 kg"), 2, "effluent convert 1 kg L"),
        (("transfer", "D-1", "D-2", "--volume", "0 L"), 2, "nothing would move"),
        (("transfer", "D-1", "D-2", "--volume", "151 L"), 4, "1.0 L below empty: more would leave"),
        (("withdraw", "D-1", "--volume", "1 L", "--destination", " "), 2, "it is empty; write some text"),
    ],
)
def test_wrong_movement_is_refused_in_one_paragraph(
    typed: Typed, arguments: tuple[str, ...], status: int, complaint: str
) -> None:
    typed(*WASH)
    found, lines = typed("container", *arguments, "--at", "2026-05-03T12:00")
    assert found == status
    assert complaint in lines[-1]
    assert len(typed("movement", "list")[1]) == len(["head", "rule", "V-0001", "", "caution"])


def test_movement_is_listed_shown_and_voided(typed: Typed) -> None:
    typed(*WASH)
    typed(*POUR)
    assert typed("movement", "list")[1][3] == (
        "V-0002  transfer  2026-05-02 13:00 Europe/Lisbon  D-1     T-1     120 L"
    )
    assert typed("movement", "void", "V-0002", "--reason", "not done") == (0, ["movement V-0002 is void"])
    assert typed("movement", "show", "V-0002")[1][0] == "movement V-0002 (void)"
    assert "amend wash W-0001 instead" in typed("movement", "void", "V-0001", "--reason", "x")[1][0]


def test_container_is_amended_only_to_what_fits(typed: Typed) -> None:
    typed(*WASH)
    assert typed("container", "amend", "D-1", "--material", "steel", "--reason", "seen") == (
        0,
        ["container D-1 is amended: material"],
    )
    status, lines = typed("container", "amend", "D-1", "--fill-fraction", "50 %", "--reason", "x")
    assert (status, lines) == (
        4,
        [
            "E304: container D-1: at 2026-05-02 12:00 Europe/Lisbon it would hold 150.0 L, above its working "
            "capacity of 104.0 L; use another container, or split the water between several"
        ],
    )


def test_unused_container_is_voided_and_used_one_is_not(typed: Typed) -> None:
    typed(*WASH)
    assert typed("container", "void", "D-2", "--reason", "sold") == (0, ["container D-2 is void"])
    status, lines = typed("container", "void", "D-1", "--reason", "sold")
    assert (status, lines) == (
        4,
        ["E305: container D-1 is referred to by movement V-0001: void or amend that first"],
    )
