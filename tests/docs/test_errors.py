"""Each error says exactly this, survives a pickle, and has its heading in docs/errors.md."""

from __future__ import annotations

import pickle
import re

import pytest

from effluent import errors
from effluent.errors import EffluentError, RowError
from tests.docs.source import ROOT

SAID: list[tuple[EffluentError, str]] = [
    (
        errors.ValueRefused("pH", "15", "give a value from 0 to 14"),
        "pH '15' is not accepted: give a value from 0 to 14",
    ),
    (errors.UnitUnknown("furlong", "try mg/L"), "unit 'furlong' is not known: try mg/L"),
    (
        errors.UnitMismatch("mg/L", "kg", "give the volume"),
        "'mg/L' cannot be converted to 'kg': give the volume",
    ),
    (
        errors.FileRefused("may.csv", (RowError(7, "unit", "mgl", "no such unit"),)),
        "may.csv: 1 bad cell; nothing was recorded\n  row 7, unit 'mgl': no such unit",
    ),
    (
        errors.FileRefused(
            "may.csv", (RowError(7, "unit", "", "missing"), RowError(9, "value", "x", "no number"))
        ),
        "may.csv: 2 bad cells; nothing was recorded\n"
        "  row 7, unit '': missing\n"
        "  row 9, value 'x': no number",
    ),
    (
        errors.Questioned(("more was caught than put in",), "give a reason"),
        "questioned, nothing was recorded:\n  - more was caught than put in\ngive a reason",
    ),
    (
        errors.NotComputed("the monthly average", "check it by hand"),
        "the monthly average is not computed by this version: check it by hand",
    ),
    (
        errors.NotPrintable("☃", "Drum ☃"),
        "the character '☃' in 'Drum ☃' cannot be printed with the fonts on board; spell it otherwise",
    ),
    (
        errors.RecordMissing("container", "D-9", "see container list"),
        "no container 'D-9' in this ledger: see container list",
    ),
    (errors.FileMissing("may.csv", "check the path"), "may.csv is not there: check the path"),
    (errors.AlreadyRecorded("site 'NORTH'", "amend it"), "site 'NORTH' is already on record: amend it"),
    (
        errors.WouldOverwrite("m.pdf"),
        "m.pdf exists and is never overwritten; name another place or move it away first",
    ),
    (
        errors.ChainBroken("manifest M-1", ("drum D-1 has no sample", "drum D-2 has no verdict")),
        "manifest M-1 is refused, the chain is broken:\n"
        "  - drum D-1 has no sample\n"
        "  - drum D-2 has no verdict",
    ),
    (errors.VolumeRefused("D-1", "3 L do not fit"), "container D-1: 3 L do not fit"),
    (errors.StateRefused("manifest M-1", "issued", "void it"), "manifest M-1 is issued: void it"),
    (errors.NotALedger("a.txt", "name a ledger"), "a.txt is not an effluent ledger: name a ledger"),
    (
        errors.SchemaOlder("a", "1", "2"),
        "a has the older schema 1, this version needs 2; run: effluent ledger upgrade --ledger a "
        "(it makes a backup first)",
    ),
    (
        errors.SchemaNewer("a", "9"),
        "a has the schema 9, which this version does not know; install a newer effluent",
    ),
    (
        errors.LedgerBusy("a"),
        "a is being written by another process; nothing was recorded, try again in a moment",
    ),
    (
        errors.LedgerDamaged("a", "page 3"),
        "a is damaged (page 3); keep the file, and restore the last backup: effluent ledger restore",
    ),
    (errors.StorageFailed("a", "disk full"), "a cannot be written (disk full); nothing was recorded"),
    (errors.StorageFailed("a", "disk full", "M-1 stands"), "a cannot be written (disk full); M-1 stands"),
    (
        errors.ServerMissing("db.example:5432", "no answer"),
        "db.example:5432 cannot be reached (no answer)",
    ),
]
FAMILIES = {"1": (2, 400), "2": (3, 404), "3": (4, 409), "4": (5, 503)}
PARTS = ("**When**", "**What to do**", "**Exit status**")


def named(error: Exception) -> str:
    return type(error).__name__


def coded() -> dict[str, type[EffluentError]]:
    """Each class of the tree that has a code of its own, by that code."""
    classes = [value for name in errors.__all__ if isinstance(value := getattr(errors, name), type)]
    leaves = [c for c in classes if issubclass(c, EffluentError) and "code" in vars(c)]
    return {c.code: c for c in leaves if c is not EffluentError}


def documented() -> dict[str, str]:
    """The text below each heading of docs/errors.md, by its code and name."""
    page = (ROOT / "docs" / "errors.md").read_text(encoding="utf-8")
    _, *parts = re.split(r"^### ", page, flags=re.MULTILINE)
    return {part.splitlines()[0]: part for part in parts}


@pytest.mark.parametrize(("error", "text"), SAID, ids=lambda v: named(v) if isinstance(v, Exception) else "")
def test_text_says_what_where_and_what_to_do(error: EffluentError, text: str) -> None:
    assert str(error) == text


@pytest.mark.parametrize("error", [error for error, _ in SAID], ids=named)
def test_error_survives_a_pickle(error: EffluentError) -> None:
    again = pickle.loads(pickle.dumps(error))
    assert (type(again), again.args, str(again)) == (type(error), error.args, str(error))


def test_every_code_has_its_text_checked() -> None:
    assert {type(error) for error, _ in SAID} == set(coded().values())


def test_codes_are_used_once() -> None:
    classes = [value for value in vars(errors).values() if isinstance(value, type)]
    own = [c for c in classes if issubclass(c, EffluentError) and "code" in vars(c)]
    assert len({c.code for c in own}) == len(own)


@pytest.mark.parametrize("code", coded())
def test_statuses_follow_from_the_family(code: str) -> None:
    error = coded()[code]
    assert (error.exit_status, error.http_status) == FAMILIES[code[1]]


def test_page_and_tree_name_the_same_errors() -> None:
    assert list(documented()) == sorted(f"{code} {error.__name__}" for code, error in coded().items())


@pytest.mark.parametrize("code", coded())
def test_page_says_when_what_to_do_and_the_exit_status(code: str) -> None:
    text = documented()[f"{code} {coded()[code].__name__}"]
    assert [part for part in PARTS if part not in text] == []
    assert f"**Exit status** {coded()[code].exit_status}" in text


def test_tree_is_drawn_as_it_is() -> None:
    drawn = re.findall(r"(\w+) +(E\d\d\d)\b", errors.__doc__ or "")
    assert {code: name for name, code in drawn} == {code: error.__name__ for code, error in coded().items()}
