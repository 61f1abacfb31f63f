from __future__ import annotations

from collections.abc import Callable
from datetime import UTC, date, datetime, timedelta, timezone
from pathlib import Path

import click
import pytest

from effluent.cli import value
from effluent.domain import CleanerType, PointKind, Quantity, RunningMode

HOSTILE = ["\x00", "a\x1b[2Jb", "two\nlines", "\udc80", "\u202eabc", "x" * 10_000_000]


def local(*parts: int) -> datetime:
    return datetime(*parts, tzinfo=UTC).replace(tzinfo=None)


@pytest.mark.parametrize("read", [value.line, value.quantity, value.instant, value.day, value.count])
@pytest.mark.parametrize("written", [*HOSTILE, "", "   "], ids=range(len(HOSTILE) + 2))
def test_hostile_text_is_refused_in_one_paragraph(read: Callable[[str], object], written: str) -> None:
    with pytest.raises(click.BadParameter) as caught:
        read(written)
    assert "\n" not in caught.value.message
    assert caught.value.message.isprintable()
    assert len(caught.value.message) < 1000


def test_line_is_stripped_and_keeps_wide_characters() -> None:
    assert value.line("  東京 🛫 Ünal ") == "東京 🛫 Ünal"


def test_line_of_the_longest_length_is_taken() -> None:
    assert value.line("x" * 2000) == "x" * 2000


def test_file_is_a_path_whose_name_can_be_recorded() -> None:
    assert value.file(" lab 1/été.csv ") == Path("lab 1/été.csv")
    with pytest.raises(click.BadParameter, match="unreadable"):
        value.file("lab\udce9.csv")


def test_line_or_nothing_takes_nothing() -> None:
    assert value.line_or_nothing(" ") == ""


def test_refused_line_says_what_it_holds() -> None:
    with pytest.raises(click.BadParameter) as caught:
        value.line("a\tb")
    assert caught.value.message == (
        "'a\\tb' holds control or unreadable characters; write one line of plain text"
    )


def test_quantity_keeps_what_was_written() -> None:
    assert value.quantity(" -12.50 degC ") == Quantity("-12.50", "degC")
    assert value.quantity("60 ± 1 L") == Quantity("60", "L", "1")


def test_quantity_without_a_number_is_refused() -> None:
    with pytest.raises(click.BadParameter, match="quantity 'a lot' is not accepted: write a number"):
        value.quantity("a lot")


@pytest.mark.parametrize(
    ("written", "moment"),
    [
        ("2026-03-01T14:30", local(2026, 3, 1, 14, 30)),
        ("2026-03-01 14:30:05", local(2026, 3, 1, 14, 30, 5)),
        ("2026-03-01T14:30Z", datetime(2026, 3, 1, 14, 30, tzinfo=UTC)),
        ("2026-03-01 14:30+02:00", datetime(2026, 3, 1, 14, 30, tzinfo=timezone(timedelta(hours=2)))),
    ],
)
def test_instant_keeps_its_offset_or_none(written: str, moment: datetime) -> None:
    read = value.instant(written)
    assert (read, read.tzinfo) == (moment, moment.tzinfo)


@pytest.mark.parametrize(
    "written",
    ["2026-02-30T10:00", "2026-03-01", "20260301T1430", "0001-01-01T00:00+23:59", "01.03.2026 14:30"],
)
def test_instant_of_another_form_is_refused(written: str) -> None:
    with pytest.raises(click.BadParameter, match="is not a date and time; write 2026-03-01T14:30 "):
        value.instant(written)


def test_day_is_year_month_day() -> None:
    assert value.day("2024-02-29") == date(2024, 2, 29)


@pytest.mark.parametrize("written", ["2025-02-29", "29.02.2024", "2024-060", "٢٠٢٤-٠٢-٢٩", "9999-01-01"])
def test_day_of_another_form_is_refused(written: str) -> None:
    with pytest.raises(click.BadParameter, match="is not a date; write year, month and day"):
        value.day(written)


def test_last_day_before_the_first_is_refused() -> None:
    first, last = date(2026, 3, 1), date(2026, 3, 2)
    for since, until in ((None, first), (first, None), (first, first), (first, last)):
        value.in_order(since, until)
    with pytest.raises(click.UsageError, match="2026-03-01 lies before --since 2026-03-02"):
        value.in_order(last, first)


def test_count_is_whole() -> None:
    assert value.count("0") == 0
    assert value.count("007") == 7


@pytest.mark.parametrize("written", ["-1", "1.0", "1_000", "٣", "1e3", "9" * 10])
def test_count_of_another_form_is_refused(written: str) -> None:
    with pytest.raises(click.BadParameter, match="is not a whole number; write digits only"):
        value.count(written)


@pytest.mark.parametrize(
    ("written", "member"),
    [
        ("sewer connection", PointKind.SEWER),
        ("SEWER", PointKind.SEWER),
        ("storm-drain", PointKind.STORM_DRAIN),
        ("surface  water", PointKind.SURFACE_WATER),
        ("h", PointKind.HAUL_ONLY),
    ],
)
def test_word_takes_a_beginning_that_only_one_has(written: str, member: PointKind) -> None:
    assert value.word(PointKind)(written) is member


def test_word_takes_hyphens_as_they_are_written() -> None:
    assert value.word(CleanerType)("solvent-based") is CleanerType.SOLVENT
    assert value.word(RunningMode)("motor") is RunningMode.MOTORING


def test_word_that_could_be_several_names_them() -> None:
    with pytest.raises(click.BadParameter) as caught:
        value.word(PointKind)("s")
    assert caught.value.message == (
        "'s' could be sewer connection or storm drain or surface water; "
        "write one of: sewer connection, storm drain, surface water, haul only"
    )


@pytest.mark.parametrize("written", ["", "river", "-", *HOSTILE], ids=range(3 + len(HOSTILE)))
def test_word_of_no_member_is_refused(written: str) -> None:
    with pytest.raises(click.BadParameter):
        value.word(PointKind)(written)
