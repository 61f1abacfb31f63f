"""The commands of washes, on a real ledger."""

from __future__ import annotations

import json
from collections.abc import Callable

import pytest

from effluent.settings import CAUTION

Typed = Callable[..., tuple[int, list[str]]]
WASH = (
    *("wash", "record", "--kind", "desal", "--mode", "motoring", "--engine", "E-100", "--site", "LIS"),
    *("--performed-at", "2026-03-02T12:00", "--performed-by", "AM", "--rinse-water", "60 L ± 2 %"),
)
CAUGHT = ("--caught", "48 ± 2 L", "--caught-by", "level stick", "--into", "D-1")


def test_record_says_what_was_filled_and_what_is_unaccounted_for(typed: Typed) -> None:
    typed("site", "amend", "LIS", "--unaccounted-threshold", "20 %", "--reason", "set")
    assert typed(*WASH, *CAUGHT, "--retained", "2 L", "--retained-basis", "AM") == (
        0,
        [
            "wash W-0001 is recorded",
            "  48 ± 2 L into D-1 (movement V-0001)",
            "  unaccounted: 10.0 ± 2.3 L of 60.0 L put in (16.7 %)",
            "  against the site's threshold: cannot be told",
        ],
    )


def test_grit_clean_has_no_balance(typed: Typed) -> None:
    grit = ("wash", "record", "--kind", "abrasive", "--mode", "idle", *WASH[6:-2], "--grit", "nut shell")
    assert typed(*grit) == (0, ["wash W-0001 is recorded"])
    status, lines = typed("wash", "balance")
    assert (status, lines[2].split()[-3:]) == (0, ["nothing", "put", "in"])


def test_question_is_answered_with_accept(typed: Typed) -> None:
    rain = (*WASH, "--caught", "70 L", "--caught-by", "meter", "--into", "D-1")
    assert typed(*rain) == (
        2,
        [
            "E105: questioned, nothing was recorded:",
            "  - more was caught (70 L) than put in (60 L): rain, or water from another source?",
            "check the figures; if they are right all the same, repeat with --accept and the reason",
        ],
    )
    assert typed(*rain, "--accept", "rain")[0] == 0
    assert "accepted: rain (questioned: more was caught" in typed("ledger", "history")[1][-3]


@pytest.mark.parametrize(
    ("more", "status", "complaint"),
    [
        (("--into", "D-1=40 L", "--into", "D-1=8 L"), 2, "name each container once"),
        (("--into", "=8 L"), 2, "name each container once"),
        (("--into", "D-1=8"), 2, "unit '' is not known"),
        (("--into", "D-1=48 kg"), 2, "effluent convert 48 kg L"),
        (("--performed-at", "2999-03-02T12:00"), 2, "it lies in the future"),
        (("--into", "D-1=x"), 2, "write a number with a decimal point"),
        (("--into", "D-1", "--into", "D-2"), 2, "give the volume of each container"),
        (("--into", "X-1"), 2, "it stands at CHI, the wash was at LIS"),
        (("--into", "D-8"), 3, "no container 'D-8' in this ledger: did you mean"),
        (("--into", "D-1", "--remarks", "a\x1b[2Jb"), 2, r"a\x1b[2Jb' holds control"),
        (("--into", "D-1", "--rinses", "two"), 2, "write digits only"),
        (("--into", "D-1", "--task", "x" * 3000), 2, "3000 characters are too many"),
        (("--into", "D-1", "--performed-at", "yesterday"), 2, "write 2026-03-01T14:30"),
    ],
)
def test_wrong_words_are_refused_in_one_paragraph(
    typed: Typed, more: tuple[str, ...], status: int, complaint: str
) -> None:
    found, lines = typed(*WASH, "--caught", "48 L", "--caught-by", "meter", *more)
    assert found == status
    assert complaint in lines[-1]
    assert typed("wash", "list")[1][0] == "no wash is recorded"


def test_list_and_show_tell_local_times(typed: Typed) -> None:
    typed(*WASH, *CAUGHT)
    typed("wash", "amend", "W-0001", "--caught", "47 ± 2 L", "--reason", "misread")
    assert typed("wash", "list")[1] == [
        "code    kind               engine  site  performed at                    caught",
        "------  -----------------  ------  ----  ------------------------------  --------",
        "W-0001  desalination wash  E-100   LIS   2026-03-02 12:00 Europe/Lisbon  47 ± 2 L",
        "",
        CAUTION,
    ]
    shown = typed("wash", "show", "W-0001")[1]
    assert "performed at: 2026-03-02 12:00 Europe/Lisbon" in [" ".join(each.split()) for each in shown]
    assert shown[-3].endswith("AM  misread  caught: 48 ± 2 L -> 47 ± 2 L")


def test_amend_can_name_containers_alone(typed: Typed) -> None:
    typed(*WASH, *CAUGHT)
    assert typed("wash", "amend", "W-0001", "--into", "D-2", "--reason", "other drum")[1][:2] == [
        "wash W-0001 is amended",
        "  48 ± 2 L into D-2 (movement V-0002)",
    ]


def test_amend_of_nothing_is_refused(typed: Typed) -> None:
    typed(*WASH, *CAUGHT)
    assert "nothing to amend" in typed("wash", "amend", "W-0001", "--reason", "x")[1][-1]
    assert "nothing would change" in typed("wash", "amend", "W-0001", "--into", "D-1", "--reason", "x")[1][-1]


def test_void_takes_the_water_out(typed: Typed) -> None:
    typed(*WASH, *CAUGHT)
    assert typed("wash", "void", "W-0001", "--reason", "twice") == (
        0,
        ["wash W-0001 is void, and what it filled"],
    )
    assert typed("container", "contents", "D-1")[1][:2] == [
        "container D-1: 0.0 L, room for 197.6 L",
        "it holds nothing",
    ]
    assert typed("wash", "show", "W-0001")[1][0] == "wash W-0001 (void)"


def test_balance_goes_by_wash_and_by_month(typed: Typed) -> None:
    typed(*WASH, *CAUGHT)
    status, lines = typed(
        "wash", "balance", "--site", "LIS", "--since", "2026-03-02", "--until", "2026-03-02"
    )
    assert status == 0
    assert lines[2].split() == [
        *("W-0001", "LIS", "Turbofan", "A", "(invented)", "60.0", "48.0", "0.0", "12.0", "2.3", "20.0"),
        *("no", "threshold"),
    ]
    assert lines[6].split()[4:6] == ["2026-03", "60.0"]
    assert typed("wash", "balance", "--since", "2026-03-03")[1][0] == "no wash is recorded there"


def test_more_caught_than_put_in_is_never_within(typed: Typed) -> None:
    typed("site", "amend", "LIS", "--unaccounted-threshold", "20 %", "--reason", "set")
    lines = typed(*WASH, *CAUGHT, "--caught", "70 ± 2 L", "--accept", "rain")[1]
    assert "  against the site's threshold: more caught than put in" in lines
    assert typed("wash", "balance")[1][2].endswith("more caught than put in")
    [told] = json.loads("\n".join(typed("wash", "balance", "--json")[1]))["washes"]
    assert told["threshold"] == "more caught than put in"


def test_uncertainty_that_nobody_stated_is_not_called_zero(typed: Typed) -> None:
    lines = typed(*WASH[:-1], "60 L", *CAUGHT, "--caught", "48 L")[1]
    assert "  unaccounted: 12.0 L (uncertainty not stated) of 60.0 L put in (20.0 %)" in lines
    assert "not stated" in typed("wash", "balance")[1][2]
    [told] = json.loads("\n".join(typed("wash", "balance", "--json")[1]))["washes"]
    assert (told["unaccounted_l"], told["unaccounted_uncertainty_l"]) == ("12", None)


def test_balance_as_json_is_exact_and_answers_as_of(typed: Typed) -> None:
    typed(*WASH[:-1], "1 gal")
    entry = json.loads("\n".join(typed("wash", "show", "W-0001", "--json")[1]))["versions"][0]["entry"]
    typed(*WASH, *CAUGHT, "--accept", "another")
    answer = json.loads("\n".join(typed("wash", "balance", "--json", "--as-of", str(entry))[1]))
    assert [each["put_in_l"] for each in answer["washes"]] == ["3.785411784"]
    assert answer["totals"][0]["month"] == "2026-03"
