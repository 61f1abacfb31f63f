from __future__ import annotations

import json

import click
import pytest
from click.testing import CliRunner, Result

from effluent.cli import option
from effluent.domain import (
    Cleaner,
    Company,
    Container,
    Engine,
    Limit,
    Movement,
    Person,
    Point,
    Sample,
    Site,
    Wash,
)


@click.command()
@option.accept
@option.reason_required
@option.writes
def write(**given: object) -> None:
    click.echo(json.dumps(given))


@click.command()
@option.reason
@option.reads
def read(**given: object) -> None:
    click.echo(json.dumps(given))


def run(command: click.Command, *arguments: str, **variables: str) -> Result:
    return CliRunner().invoke(command, arguments, env=variables)


def test_options_reach_the_command() -> None:
    ran = run(write, "--ledger", " a.db ", "--by", "AM", "--reason", "typo", "--accept", "rain")
    assert json.loads(ran.output) == {"ledger": "a.db", "by": "AM", "reason": "typo", "accept": "rain"}


def test_environment_names_ledger_and_person() -> None:
    ran = run(write, "--reason", "typo", EFFLUENT_LEDGER="b.db", EFFLUENT_BY="AM")
    assert json.loads(ran.output) == {"ledger": "b.db", "by": "AM", "reason": "typo", "accept": None}


def test_reads_take_a_moment_and_json() -> None:
    ran = run(read, "--ledger", "a", "--as-of", "12", "--json")
    assert json.loads(ran.output) == {"ledger": "a", "as_of": "12", "as_json": True, "reason": None}


@pytest.mark.parametrize(
    ("arguments", "complaint"),
    [
        (
            ["--by", "AM", "--reason", "r"],
            "no ledger is named: give --ledger or set the environment variable EFFLUENT_LEDGER",
        ),
        (
            ["--ledger", "a", "--reason", "r"],
            "it is not said who records this: give --by or set the environment variable EFFLUENT_BY",
        ),
        (["--ledger", "a", "--by", "b"], "Missing option '--reason'."),
        (["--ledger", " ", "--by", "b"], "Invalid value for '--ledger': it is empty; write some text"),
    ],
)
def test_missing_option_is_a_usage_error(arguments: list[str], complaint: str) -> None:
    ran = run(write, *arguments)
    assert ran.exit_code == 2
    assert ran.output.splitlines()[-1] == f"Error: {complaint}"


def test_help_needs_no_ledger() -> None:
    assert run(write, "--help").exit_code == 0


@pytest.mark.parametrize(
    "record", [Cleaner, Company, Container, Engine, Limit, Movement, Person, Point, Sample, Site, Wash]
)
def test_no_field_has_the_name_of_a_shared_option(record: type) -> None:
    shared = {"ledger", "by", "reason", "accept", "as_of", "as_json", "json", "clear"}
    assert shared.isdisjoint(record.__dataclass_fields__)
