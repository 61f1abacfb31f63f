"""The manifest commands on a real ledger: each says what it recorded, and what is still to do."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from datetime import datetime
from pathlib import Path

import pypdf
import pytest

import effluent.wiring
from effluent.__main__ import run
from effluent.errors import StorageFailed
from effluent.services.ledger import open_ledger
from effluent.store.ledger import Ledger
from tests.shipping import add_drums, add_parties, fill, ready
from tests.world import NOW, world

Command = Callable[..., tuple[int, str, str]]
DRAFT = ("draft", "--site", "LIS", "--facility", "WORKS", "--carrier", "HAUL")
PHONE = ("--emergency-contact", "Invented Desk", "--emergency-phone", "+00 555 0111")


@pytest.fixture
def book(tmp_path: Path) -> Iterator[Ledger]:
    with world(str(tmp_path / "a.ledger")) as book:
        add_parties(book)
        yield book


@pytest.fixture
def manifest(book: Ledger, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> Command:
    """Run one manifest command at the ledger's own hour; return status, output and complaint."""
    monkeypatch.setenv("EFFLUENT_LEDGER", book.place)
    monkeypatch.setenv("EFFLUENT_BY", "AM")

    def at_noon(place: str, *, clock: Callable[[], datetime] = lambda: NOW) -> Ledger:
        return open_ledger(place, clock=clock)

    monkeypatch.setattr(effluent.wiring, "open_ledger", at_noon)

    def command(*arguments: str) -> tuple[int, str, str]:
        status = run(["manifest", *arguments])
        said = capsys.readouterr()
        return status, said.out, said.err

    return command


def test_draft_takes_one_description_for_several_containers(book: Ledger, manifest: Command) -> None:
    ready(book, "D-1", "D-2")
    lines = ("--container", "D-1", "--container", "D-2", "--description", "Wash water")
    status, out, _ = manifest(*DRAFT, *PHONE, *lines, "--waste-code", "D006", "--waste-code", "D008")
    assert status == 0
    assert out.splitlines() == [
        "manifest M-0001 is drafted",
        "container  quantity  waste codes  description",
        "---------  --------  -----------  -----------",
        "D-1        150 L     D006 D008    Wash water",
        "D-2        150 L     D006 D008    Wash water",
    ]


def test_draft_says_what_is_missing_and_what_is_to_be_accepted(book: Ledger, manifest: Command) -> None:
    add_drums(book, "D-1")
    fill(book, "D-1")
    _, out, _ = manifest(*DRAFT, "--container", "D-1", "--description", "Wash water")
    assert out.splitlines()[-3:] == [
        "missing before it can be issued:",
        "  - no emergency telephone is named, neither here nor at site LIS",
        "  - container D-1: no sample was taken",
    ]
    ready(book, "D-2", cadmium="0.2")
    _, out, _ = manifest(*DRAFT, *PHONE, "--container", "D-2", "--description", "Wash water")
    assert out.splitlines()[-2] == "to be accepted when it is issued:"
    assert "cadmium total over" in out.splitlines()[-1]


def test_unit_asks_for_the_proposal_in_it(book: Ledger, manifest: Command) -> None:
    ready(book, "D-1")
    _, out, _ = manifest(*DRAFT, *PHONE, "--container", "D-1", "--description", "x", "--unit", "gal")
    assert "40 gal" in out


def test_line_options_that_contradict_each_other_are_refused(manifest: Command) -> None:
    described, first, second = ("--description", "x"), ("--container", "D-1"), ("--container", "D-2")
    amount = ("--quantity", "150 L")
    cases = {
        "no --container is named": [described, ("--waste-code", "D006"), amount],
        "no --description says what the containers hold": [first],
        "--quantity is for one --container": [
            (*first, *second, *described, *amount),
            (*first, *described, *amount, "--unit", "gal"),
        ],
    }
    for complaint, wrong in cases.items():
        for arguments in wrong:
            status, _, error = manifest(*DRAFT, *arguments)
            assert (status, complaint in error) == (2, True)


def test_line_and_remove_change_a_draft(book: Ledger, manifest: Command) -> None:
    ready(book, "D-1", "D-2")
    manifest(*DRAFT, *PHONE)
    _, out, _ = manifest("line", "M-0001", "--container", "D-1", "--description", "one")
    assert out.splitlines()[0] == "manifest M-0001 is amended"
    _, out, _ = manifest(
        "line", "M-0001", "--container", "D-2", "--description", "two", "--quantity", "149 L"
    )
    assert [row.split() for row in out.splitlines()[3:]] == [
        ["D-1", "150", "L", "one"],
        ["D-2", "149", "L", "two"],
    ]
    _, out, _ = manifest("remove", "M-0001", "--container", "D-1", "--reason", "not going")
    assert "D-1" not in out
    assert manifest("line", "M-0001")[0] == 2


def test_amend_changes_the_parties(book: Ledger, manifest: Command) -> None:
    manifest(*DRAFT, *PHONE)
    status, out, _ = manifest(
        "amend", "M-0001", "--carrier", "SEA", "--clear", "special-handling", "--reason", "r"
    )
    assert (status, out.splitlines()[0]) == (0, "manifest M-0001 is amended")
    answer = json.loads(manifest("show", "M-0001", "--json")[1])
    assert answer["record"]["carriers"] == ["SEA"]


def test_way_of_a_manifest_from_issue_to_the_signed_copy(
    book: Ledger, manifest: Command, tmp_path: Path
) -> None:
    ready(book, "D-1")
    manifest(*DRAFT, *PHONE, "--container", "D-1", "--description", "Wash water")
    paper = str(tmp_path / "paper.pdf")
    assert manifest("issue", "M-0001", "--on", "2026-05-20", "--pdf", paper, "--paper", "letter") == (
        0,
        "manifest M-0001 is issued; its containers take no more water\n",
        f"the paper is in {paper}\n",
    )
    assert pypdf.PdfReader(paper).pages[0].mediabox.width == 612
    _, out, _ = manifest("list")
    assert out.splitlines()[2].split() == ["M-0001", "issued", "LIS", "WORKS", "1", "2026-05-20", "12"]
    assert "accepted the load on 2026-05-21" in manifest("accepted", "M-0001", "--on", "2026-05-21")[1]
    signed = ("--signed-by", "K. Invented", "--copy", paper)
    assert "is back since 2026-05-30" in manifest("returned", "M-0001", "--on", "2026-05-30", *signed)[1]
    void = ("void", "M-0001", "--reason", "wrong works")
    assert "are they back on the site?" in manifest(*void)[2]
    assert "is void" in manifest(*void, "--accept", "brought back")[1]


def test_issue_with_a_broken_chain_is_refused_with_its_links(book: Ledger, manifest: Command) -> None:
    manifest(*DRAFT)
    status, _, error = manifest("issue", "M-0001")
    assert status == 4
    assert error.splitlines() == [
        "E303: issuing manifest M-0001 is refused, the chain is broken:",
        "  - no container is named",
        "  - no emergency telephone is named, neither here nor at site LIS",
    ]


def test_file_in_the_way_stops_a_command_before_it_records(
    book: Ledger, manifest: Command, tmp_path: Path
) -> None:
    entries = book.head().sequence
    target = tmp_path / "paper.pdf"
    target.touch()
    status, _, error = manifest(*DRAFT, "--pdf", str(target))
    assert (status, error.startswith("E302")) == (4, True)
    assert book.head().sequence == entries


def test_show_tells_the_versions(book: Ledger, manifest: Command) -> None:
    ready(book, "D-1")
    manifest(*DRAFT, *PHONE, "--container", "D-1", "--description", "Wash water", "--reason", "May pick-up")
    _, out, _ = manifest("show", "M-0001")
    assert "emergency phone:   +00 555 0111" in out
    assert out.splitlines()[-3].split()[-5:] == ["UTC", "AM", "draft", "May", "pick-up"]


def test_show_as_json_keeps_the_answer_pure(book: Ledger, manifest: Command, tmp_path: Path) -> None:
    add_drums(book, "D-1")
    fill(book, "D-1")
    manifest(*DRAFT, *PHONE, "--container", "D-1", "--description", "Wash water")
    _, out, error = manifest("show", "M-0001", "--json", "--pdf", str(tmp_path / "p.pdf"))
    answer = json.loads(out)
    assert list(answer) == ["noun", "as_of", "record", "missing", "doubts", "versions", "caution"]
    assert answer["missing"] == ["container D-1: no sample was taken"]
    assert "the paper is in" in error


def test_list_as_json_and_of_nothing(book: Ledger, manifest: Command) -> None:
    assert manifest("list")[1].startswith("no manifest is recorded\n")
    manifest(*DRAFT)
    (only,) = json.loads(manifest("list", "--json")[1])["manifests"]
    assert (only["days_out"], only["record"]["code"]) == (None, "M-0001")


def test_bad_input_ends_in_a_complaint(manifest: Command) -> None:
    cases = {
        2: (
            "void M-9",
            "returned M-9 --on 2026-05-30",
            "returned M-9 --on May --signed-by K",
            "draft --site LIS",
            "show M-9 --paper A3",
        ),
        3: ("show M-9", "issue M-9", "void M-9 --reason r", "draft --site X --facility WORKS"),
    }
    for expected, lines in cases.items():
        for line in lines:
            status, _, error = manifest(*line.split())
            assert status == expected
            assert 0 < len(error.splitlines()) <= 4


def test_name_that_no_file_can_have_is_refused_before_anything_is_recorded(
    book: Ledger, manifest: Command, tmp_path: Path
) -> None:
    ready(book, "D-1")
    head, wanted = book.head(), str(tmp_path / ("x" * 300))
    line = ("--container", "D-1", "--description", "Wash water")
    status, out, err = manifest(*DRAFT, *PHONE, *line, "--pdf", wanted)
    assert (status, out, book.head()) == (5, "", head)
    assert err.endswith("(File name too long); nothing was recorded\n")


def test_paper_that_fails_leaves_the_draft_on_record_and_says_so(
    book: Ledger, manifest: Command, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(*_: object, **__: object) -> None:
        raise StorageFailed("paper.pdf", "disk full")

    ready(book, "D-1")
    monkeypatch.setattr("effluent.services.sheet.pdf", full)
    line = ("--container", "D-1", "--description", "Wash water")
    status, _, err = manifest(*DRAFT, *PHONE, *line, "--pdf", str(tmp_path / "paper.pdf"))
    assert status == 5
    assert "on record; print it with: effluent manifest show M-0001 --pdf FILE" in err
