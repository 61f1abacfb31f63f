from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from datetime import date

import click
import pytest
from click.testing import CliRunner, Result

from effluent.cli.field import build, changes, fields, fields_as_options
from effluent.domain import (
    Cleaner,
    Company,
    Container,
    ContainerKind,
    Engine,
    Limit,
    Manifest,
    Movement,
    Person,
    Point,
    Quantity,
    Sample,
    Site,
    Wash,
)
from effluent.domain.field import about


@dataclass(frozen=True, kw_only=True)
class Crate:
    code: str = about("number painted on it", default="")
    kind: ContainerKind = about("what it is")
    capacity: Quantity = about("nominal capacity")
    fill_fraction: Quantity = about("working fill", default=Quantity("95", "%"))
    built_on: date | None = about("day it was built", default=None)
    seals: tuple[str, ...] = about("seal numbers", default=())
    pieces: int | None = about("number of pieces", default=None)
    remarks: str = about("remarks", default="")


@click.command()
@fields_as_options(Crate)
def add(**given: object) -> None:
    click.echo(repr(build(Crate, given)))


@click.command()
@fields_as_options(Crate, skip={"pieces"}, amend=True)
def amend(**given: object) -> None:
    click.echo(repr(changes(Crate, given)))


def run(command: click.Command, *arguments: str) -> Result:
    return CliRunner().invoke(command, arguments)


def complaint(ran: Result) -> str:
    assert ran.exit_code == 2
    return ran.output.splitlines()[-1].removeprefix("Error: ")


def test_given_options_make_the_record() -> None:
    ran = run(
        add, "--kind", "dr", "--capacity", "208 L", "--seal", "A", "--seal", "B", "--pieces", "2", "D-1"
    )
    expected = Crate(
        code="D-1", kind=ContainerKind.DRUM, capacity=Quantity("208", "L"), seals=("A", "B"), pieces=2
    )
    assert ran.output.strip() == repr(expected)


def test_code_with_a_default_may_be_left_out() -> None:
    ran = run(add, "--kind", "drum", "--capacity", "1 L", "--built-on", "2020-01-31")
    expected = Crate(kind=ContainerKind.DRUM, capacity=Quantity("1", "L"), built_on=date(2020, 1, 31))
    assert ran.output.strip() == repr(expected)


def test_negative_number_is_a_value() -> None:
    assert "Quantity(text='-12', unit='degC'" in run(add, "--kind", "tank", "--capacity", "-12 degC").output


def test_code_like_an_option_follows_two_hyphens() -> None:
    assert "code='-5'" in run(add, "--kind", "tank", "--capacity", "1 L", "--", "-5").output


def test_required_field_is_a_required_option() -> None:
    assert complaint(run(add, "--kind", "drum")) == "Missing option '--capacity'."


def test_refused_value_names_its_option() -> None:
    assert complaint(run(add, "--kind", "drum", "--capacity", "much")) == (
        "Invalid value for '--capacity': quantity 'much' is not accepted: "
        "write a number with a decimal point and a unit, as in '12.5 L', '60 ± 1 L' or '60 L ± 2 %'"
    )


def test_help_says_meaning_choices_and_default() -> None:
    assert [line.strip() for line in run(add, "--help").output.splitlines()[3:]] == [
        "--kind [drum|tote|bowser|tank]  What it is.  [required]",
        "--capacity QUANTITY             Nominal capacity.  [required]",
        "--fill-fraction QUANTITY        Working fill (without it: 95 %).",
        "--built-on DATE                 Day it was built.",
        "--seal TEXT                     Seal numbers.",
        "--pieces NUMBER                 Number of pieces.",
        "--remarks TEXT                  Remarks.",
        "--help                          Show this message and exit.",
    ]


def test_amendment_holds_what_was_given_and_cleared() -> None:
    ran = run(amend, "D-1", "--kind", "tote", "--clear", "remarks", "--clear", "fill-fraction")
    expected = {"kind": ContainerKind.TOTE, "fill_fraction": Quantity("95", "%"), "remarks": ""}
    assert ran.output.strip() == repr(expected)


@pytest.mark.parametrize(
    ("arguments", "text"),
    [
        ([], "Missing argument 'CODE'."),
        (["D"], "nothing to amend; name at least one field with its new value, or --clear one"),
        (
            ["D", "--remarks", "x", "--clear", "remarks"],
            "--remarks is both given and to be cleared; write one of them",
        ),
        (["D", "--pieces", "1"], "No such option '--pieces'."),
    ],
)
def test_empty_or_contradictory_amendment_is_refused(arguments: list[str], text: str) -> None:
    assert complaint(run(amend, *arguments)) == text


def test_required_field_cannot_be_cleared() -> None:
    assert complaint(run(amend, "D", "--clear", "kind")).startswith(
        "Invalid value for '--clear': 'kind' is not"
    )


@pytest.mark.parametrize(
    "record", [Cleaner, Company, Container, Engine, Limit, Movement, Person, Point, Sample, Site, Wash]
)
def test_every_record_can_be_typed(record: type) -> None:
    names = [field.name for field in dataclasses.fields(record)]
    assert [field.name for field in fields(record)] == names
    assert all(field.meaning for field in fields(record))


def test_field_that_cannot_be_typed_is_an_error() -> None:
    with pytest.raises(TypeError, match="cannot be typed on a command line"):
        fields(Manifest)
    assert fields(Manifest, skip={"lines"})
