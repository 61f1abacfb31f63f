"""The demo: what its story says is what the ledger says, and its folder appears whole or not at all."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from pathlib import Path

import pytest

from effluent.domain import CleanerType, ManifestState, Outcome, WashKind
from effluent.errors import FileMissing, FileRefused, StorageFailed, WouldOverwrite
from effluent.services import demo, manifest, register
from effluent.services.check import Wanted, check
from effluent.services.demo.play import Facts
from effluent.services.importing import Order, import_files
from effluent.services.ledger import history, open_ledger, prove
from effluent.services.wash import balances
from effluent.store.ledger import Ledger
from tests.staged import staged


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return staged(tmp_path_factory)


@pytest.fixture
def book(folder: Path) -> Iterator[Ledger]:
    with open_ledger(str(folder / "demo.ledger")) as opened:
        yield opened


def test_ledger_verifies(book: Ledger) -> None:
    report = prove(book)
    assert report.findings == ()
    assert report.number == "demo-1"


def test_verdicts_are_those_of_the_story(book: Ledger, folder: Path) -> None:
    found = Counter(verdict.outcome for verdict in check(book).verdicts)
    assert (found[Outcome.NEAR], found[Outcome.OVER], found[Outcome.UNDETERMINED]) == (1, 1, 1)
    said = f"The verdicts: {found[Outcome.WITHIN]} within, 1 near, 1 over, 1 undetermined."
    assert said in (folder / "story.txt").read_text(encoding="utf-8")


def test_the_one_over_is_cadmium_in_a_drum(book: Ledger) -> None:
    [over] = [verdict for verdict in check(book).verdicts if verdict.outcome is Outcome.OVER]
    assert (over.limit.analyte, over.reason) == ("cadmium", "0.138 mg/l is above the limit 0.11 mg/L")


def test_the_one_undetermined_is_a_non_detect_that_proves_nothing(book: Ledger) -> None:
    [open_] = [verdict for verdict in check(book).verdicts if verdict.outcome is Outcome.UNDETERMINED]
    assert open_.limit.analyte == "silver"
    assert "proves nothing" in open_.reason


def test_tote_without_a_verdict_was_not_released(book: Ledger) -> None:
    [open_] = [verdict for verdict in check(book).verdicts if verdict.outcome is Outcome.UNDETERMINED]
    sample = register.show(book, "sample", open_.samples[0]).value
    later = [
        m
        for m in register.listing(book, "movement")
        if m.source == sample.container and m.moved_at > sample.started_at
    ]
    assert later == []


def test_every_kind_of_wash_and_cleaner_occurs(book: Ledger) -> None:
    washes = register.listing(book, "wash")
    assert len(washes) > 200
    assert {wash.kind for wash in washes} == set(WashKind)
    types = {cleaner.code: cleaner.type for cleaner in register.listing(book, "cleaner")}
    assert {types[wash.cleaner] for wash in washes if wash.cleaner} == set(CleanerType)


def test_mistake_was_flagged_and_amended(book: Ledger) -> None:
    [amended] = [entry for entry in history(book) if entry.action == "amend wash"]
    before = {b.wash.code: b for b in balances(book, as_of=str(amended.sequence - 1))}
    after = {b.wash.code: b for b in balances(book)}
    changed = [code for code in before if before[code].wash.caught != after[code].wash.caught]
    assert [str(before[code].flagged) for code in changed] == ["above"]
    assert [str(after[code].flagged) for code in changed] == ["within"]


def test_one_manifest_is_back_and_one_is_a_draft_that_lacks_nothing(book: Ledger) -> None:
    states = {each.manifest.code: each.manifest.state for each in manifest.listing(book)}
    assert states == {"M-0001": ManifestState.RETURNED, "M-0002": ManifestState.DRAFT}
    assert manifest.show(book, "M-0002").missing == ()


def test_one_limit_is_verified_by_nobody(book: Ledger) -> None:
    limits = register.listing(book, "limit")
    assert [limit.analyte for limit in limits if limit.verified_by is None] == ["copper"]
    assert any(limit.reference for limit in limits)
    noted = [v for v in check(book).verdicts if "limit not verified by a second person" in v.notes]
    assert noted


def test_spoiled_file_is_refused_and_changes_nothing(book: Ledger, folder: Path) -> None:
    laboratory, before = folder / "laboratory", book.head()
    [spoiled] = laboratory.glob("*-spoiled.csv")
    with pytest.raises(FileRefused) as refusal:
        import_files(book, Order(paths=[spoiled], layout=laboratory / "ribeira.toml"), by="RS")
    assert {row.row for row in refusal.value.rows} >= {3, 4, 5, 6, 7}
    assert book.head() == before
    assert spoiled.name not in [file.name for file in register.listing(book, "file")]


def test_laboratories_write_differently(folder: Path) -> None:
    long = next((folder / "laboratory").glob("ribeira-*.csv")).read_bytes()
    assert "Amostra;Parâmetro".encode("latin-1") in long
    with pytest.raises(UnicodeDecodeError):
        long.decode("utf-8")
    assert next((folder / "laboratory").glob("sandgate-*.xlsx")).read_bytes().startswith(b"PK")


def test_some_results_are_non_detects(book: Ledger) -> None:
    with book.reading() as reading:
        qualifiers = Counter(reading.result_columns(["qualifier"])["qualifier"])
    assert qualifiers["<"] >= 5


def test_entries_were_recorded_over_two_years(book: Ledger) -> None:
    instants = [entry.recorded_at for entry in history(book)]
    assert instants == sorted(instants)
    assert (instants[0][:7], instants[-1][:7]) == ("2023-06", "2025-07")


def test_samples_over_find_water_judged_at_both_stations(book: Ledger) -> None:
    for site in ("CVL", "SGP"):
        assert len(check(book, Wanted(site=site)).verdicts) > 50


def test_folder_that_holds_something_is_refused(tmp_path: Path) -> None:
    (tmp_path / "kept.txt").write_text("kept")
    with pytest.raises(WouldOverwrite):
        demo.make(str(tmp_path))
    assert [path.name for path in tmp_path.iterdir()] == ["kept.txt"]


def test_file_in_the_way_is_refused(tmp_path: Path) -> None:
    (tmp_path / "demo").write_text("kept")
    with pytest.raises(WouldOverwrite):
        demo.make(str(tmp_path / "demo"))


def test_missing_parent_is_named(tmp_path: Path) -> None:
    with pytest.raises(FileMissing, match="nowhere"):
        demo.make(str(tmp_path / "nowhere" / "demo"))


def test_failure_leaves_nothing_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(*_: object) -> Facts:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(demo, "perform", full)
    with pytest.raises(StorageFailed, match="No space left"):
        demo.make(str(tmp_path / "demo"))
    assert list(tmp_path.iterdir()) == []


def test_empty_folder_is_taken(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(demo, "perform", lambda *_: Facts())
    monkeypatch.setattr(demo, "tell", lambda *_, **__: "told")
    assert demo.make(str(tmp_path)).story == "told"
    assert (tmp_path / "story.txt").read_text() == "told"
