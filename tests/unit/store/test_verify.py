from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from effluent.services.ledger import prove
from effluent.store.ledger import Ledger
from effluent.store.verify import Finding, verify
from tests.conftest import SERVER, fresh_database
from tests.fault.book import NUMBER, filled_ledger, forge, guard, unguarded
from tests.fault.tampering import TAMPERINGS


@pytest.fixture(scope="module", params=["sqlite", "postgresql"] if SERVER else ["sqlite"])
def ledger(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Ledger]:
    """One ledger for all; what a test does to it is rolled back."""
    if request.param == "sqlite":
        yield filled_ledger(str(tmp_path_factory.mktemp("verify") / "ledger.effluent"))
        return
    with fresh_database() as place:
        yield filled_ledger(place)


def findings(ledger: Ledger, *statements: str) -> list[str]:
    """What is found after somebody ran these statements."""
    with unguarded(ledger) as (connection, run):
        for statement in statements:
            run(statement)
        guard(connection)
        return [str(finding) for finding in verify(connection)]


def test_intact_ledger_holds(ledger: Ledger) -> None:
    assert prove(ledger) == (NUMBER, 7, ledger.head().digest, ())


@pytest.mark.parametrize("name", TAMPERINGS)
def test_tampering_is_named_on_the_first_entry_concerned(ledger: Ledger, name: str) -> None:
    statements, first = TAMPERINGS[name]
    found = findings(ledger, *statements)
    assert found[0] == first
    assert "unguarded" not in str(found)


def test_one_changed_row_is_one_finding(ledger: Ledger) -> None:
    assert findings(ledger, "UPDATE site SET name = 'x'") == ["entry 2: changed row: site row 1"]


def test_several_faults_are_listed_in_the_order_of_the_entries(ledger: Ledger) -> None:
    assert findings(
        ledger,
        "UPDATE result SET text = 'x' WHERE \"row\" = 4",
        "DELETE FROM company",
        "UPDATE site SET name = 'x'",
    ) == [
        "entry 2: changed row: site row 1",
        "entry 3: missing row: company row 1",
        "entry 7: changed row: result row 4",
    ]


def test_rows_of_a_missing_entry_are_not_blamed_on_others(ledger: Ledger) -> None:
    found = findings(ledger, "DELETE FROM entry WHERE sequence = 5")
    assert found == [
        "entry 5: missing entry: after the gap comes entry 6",
        "entry 5: missing entry: result rows 1 to 3 name it",
    ]


def test_gap_of_many_entries_is_found_at_once(ledger: Ledger) -> None:
    found = findings(ledger, "UPDATE entry SET sequence = 1000000000000 WHERE sequence = 7")
    assert found[0] == "entry 7: missing entry: after the gap comes entry 1000000000000"


def test_recomputed_tail_is_caught_by_a_printed_witness(ledger_place: str) -> None:
    ledger = filled_ledger(ledger_place)
    page = ledger.head()
    forge(ledger, "UPDATE result SET text = '0.01' WHERE \"row\" = 2")
    assert prove(ledger).findings == ()
    found = prove(ledger, witness=f"{page.sequence}:{page.digest}").findings
    assert found == (Finding(7, "changed entry", "its digest is not the one on the page"),)


def test_forged_contents_that_no_table_holds_are_found(ledger: Ledger) -> None:
    assert "ledger: missing table: nosuch" in findings(
        ledger, """UPDATE entry SET contents = '[["nosuch",1,1,3,"x"]]' WHERE sequence = 2"""
    )


@pytest.mark.parametrize(
    ("contents", "detail"),
    [
        ("nothing", "what it says it brought cannot be read"),
        ('[["site",1,0,12,"x"]]', "what it says it brought cannot be read"),
        ('[["site", 1,1,12,"x"]]', "what it says it brought cannot be read"),
        ('[["site",7,1,12,"x"]]', "site rows should start at 1"),
        ('[["site",-7,1,12,"x"]]', "site rows should start at 1"),
    ],
)
def test_contents_that_make_no_sense_are_found(ledger: Ledger, contents: str, detail: str) -> None:
    assert f"entry 2: changed entry: {detail}" in findings(
        ledger, f"UPDATE entry SET contents = '{contents}' WHERE sequence = 2"
    )


def test_removed_triggers_are_named(ledger: Ledger) -> None:
    server = "://" in ledger.place
    name = "tr_wash_change" if server else "tr_wash_update"
    with unguarded(ledger) as (connection, run):
        guard(connection)
        run(f"DROP TRIGGER {name}{' ON wash' if server else ''}")
        assert [str(finding) for finding in verify(connection)] == [
            f"ledger: unguarded: triggers that refuse changes are gone: {name}"
        ]


def test_trigger_that_does_nothing_is_no_guard(tmp_path: Path) -> None:
    ledger = filled_ledger(str(tmp_path / "ledger.effluent"))
    with unguarded(ledger) as (connection, run):
        guard(connection)
        run("DROP TRIGGER tr_wash_update")
        run("CREATE TRIGGER tr_wash_update BEFORE UPDATE ON wash BEGIN SELECT 1; END")
        assert [finding.kind for finding in verify(connection)] == ["unguarded"]


def test_missing_table_is_named(ledger: Ledger) -> None:
    with unguarded(ledger) as (connection, run):
        guard(connection)
        run("DROP TABLE result_void")
        assert [str(finding) for finding in verify(connection)] == ["ledger: missing table: result_void"]
        assert verify(connection, older=True) == ()


def test_tables_of_others_are_left_alone(ledger: Ledger) -> None:
    assert findings(ledger, "CREATE TABLE note (text TEXT)") == []


def test_column_that_a_later_version_adds_changes_no_digest(ledger: Ledger) -> None:
    assert findings(ledger, "ALTER TABLE site ADD COLUMN later TEXT", "UPDATE site SET later = 'x'") == []


def test_rows_that_are_no_text_or_number_are_changed_rows(ledger: Ledger) -> None:
    if "://" in ledger.place:
        statements = ["UPDATE result SET value = 'Infinity' WHERE \"row\" = 4"]
    else:
        statements = ['UPDATE result SET value = 9e999 WHERE "row" = 4']
    assert findings(ledger, *statements) == ["entry 7: changed row: result row 4"]
