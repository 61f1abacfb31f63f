from __future__ import annotations

from datetime import UTC, date, datetime
from pathlib import Path

import pytest

from effluent.domain import Fraction, Qualifier
from effluent.errors import AlreadyRecorded, FileRefused, Questioned, RecordMissing, ValueRefused
from effluent.services.importing import Order, explain_files
from effluent.services.result import enter, import_files, listing, void
from effluent.services.wanted import Wanted
from effluent.store.ledger import Ledger
from tests.world import NOON, add_limit, add_result, add_sample, world

HEAD = "sample,analyte,fraction,value,unit,reporting_limit,analysed_at,report,replicate,reissue_of"


def lab_file(folder: Path, *rows: str, name: str = "lab.csv") -> Path:
    path = folder / name
    path.write_text("\n".join([HEAD, *rows]) + "\n", encoding="utf-8")
    return path


def read_in(book: Ledger, *paths: Path, accept: str = "") -> int:
    return import_files(book, Order(paths=paths), by="RS", accept=accept).result_count


def refused(book: Ledger, *paths: Path) -> list[tuple[int, str, str]]:
    before = book.head()
    with pytest.raises(FileRefused) as caught:
        read_in(book, *paths)
    assert book.head() == before
    return [(row.row, row.column, row.reason) for row in caught.value.rows]


def test_a_file_is_one_entry_with_its_rows(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        sample, before = add_sample(book), book.head().sequence
        rows = (f"{sample},Cd,total,<5,ug/L,5,2026-03-03 10:00,R1,,", f"{sample},pH,,7.1,,,,R1,,")
        assert read_in(book, lab_file(tmp_path, *rows)) == 2
        assert book.head().sequence == before + 1
        cadmium, ph = (each.result for each in listing(book))
    assert (cadmium.analyte, cadmium.qualifier, cadmium.value) == ("cadmium", Qualifier.BELOW, 0.005)
    assert cadmium.analysed_at == datetime(2026, 3, 3, 10, tzinfo=UTC)
    assert (cadmium.file, cadmium.file_row, ph.file_row, ph.text) == ("F-0001", 2, 3, "7.1")


def test_every_bad_row_of_every_file_is_named(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book)
        first = lab_file(tmp_path, "S-9,Cd,total,1,mg/L,,,,,", f"{sample},unobtainium,total,1,mg/L,,,,,")
        second = lab_file(tmp_path, f"{sample},Zn,total,1,mg/L,,2026-03-02 11:59,,,", name="other.csv")
        found = refused(book, first, second)
    assert [(row, column) for row, column, _ in found] == [
        (2, "lab.csv: sample"),
        (3, "lab.csv: analyte"),
        (2, "other.csv: analysed_at"),
    ]
    assert found[0][2] == "no such sample in this ledger; record it with: effluent sample take"


def test_a_composite_is_drawn_when_it_ends(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book, ended_at=NOON.replace(day=3))
        found = refused(book, lab_file(tmp_path, f"{sample},Zn,total,1,mg/L,,2026-03-03 11:00,,,"))
    assert "before the sample was drawn (2026-03-03 12:00 UTC)" in found[0][2]


def test_the_same_file_is_recognised(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        path = lab_file(tmp_path, f"{add_sample(book)},Zn,total,1,mg/L,,,,,")
        read_in(book, path)
        with pytest.raises(AlreadyRecorded, match="F-0001"):
            read_in(book, path)


def test_the_same_result_again_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        number = add_result(book, sample := add_sample(book), "zinc", "1", "mg/L", report="R1")
        found = refused(book, lab_file(tmp_path, f"{sample},Zn,total,1,mg/L,,,R2,,"))
    assert found[0][2].startswith(f"it is on record as result {number} of report R1; leave it out")


def test_a_result_twice_in_the_files_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        row = f"{add_sample(book)},Zn,total,1,mg/L,,,,,"
        first, second = lab_file(tmp_path, row), lab_file(tmp_path, row, row + " ", name="b.csv")
        found = refused(book, first, second)
    assert [row for row, _, _ in found] == [2, 3]
    assert all("the same result stands in lab.csv: row 2" in reason for _, _, reason in found)


def test_a_laboratory_duplicate_is_kept_beside(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_result(book, sample := add_sample(book), "zinc", "1", "mg/L")
        read_in(book, lab_file(tmp_path, f"{sample},Zn,total,1.1,mg/L,,,,2,"))
        assert [each.result.replicate for each in listing(book)] == [1, 2]


def test_a_reissue_supersedes_the_earlier_report(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        number = add_result(book, sample := add_sample(book), "zinc", "1", "mg/L", report="R1")
        rows = (f"{sample},Zn,total,2,mg/L,,,R2,,R1", f"{sample},Cu,total,2,mg/L,,,R2,,R1")
        read_in(book, lab_file(tmp_path, *rows))
        found = [each.result for each in listing(book)]
    assert [(each.analyte, each.supersedes) for each in found] == [("zinc", number), ("copper", None)]


def test_a_reissue_of_another_report_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_result(book, sample := add_sample(book), "zinc", "1", "mg/L", report="R1")
        found = refused(book, lab_file(tmp_path, f"{sample},Zn,total,2,mg/L,,,R2,,R9"))
    assert found[0][1] == "reissue_of"
    assert "of report R1; name that report" in found[0][2]


def test_a_reissue_of_a_report_that_is_not_there_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        found = refused(book, lab_file(tmp_path, f"{add_sample(book)},Zn,total,2,mg/L,,,R2,,R1"))
    assert "import that report first" in found[0][2]


def test_a_thousand_times_the_history_is_questioned(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book), "zinc", "0.12", "mg/L")
        path = lab_file(tmp_path, f"{add_sample(book)},Zn,total,120,mg/L,,,,,")
        with pytest.raises(Questioned, match="row 2: zinc 120 mg/L is a thousand times"):
            read_in(book, path)
        assert read_in(book, path, accept="neat concentrate") == 1
        assert "neat concentrate" in book.head().reason


def test_the_history_of_another_place_does_not_count(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book, point="SEW"), "zinc", "0.12", "mg/L")
        assert read_in(book, lab_file(tmp_path, f"{add_sample(book)},Zn,total,120,mg/L,,,,,")) == 1


@pytest.mark.parametrize("cells", ["ND,mg/L,0.2", "<200,ug/L,"])
def test_a_reporting_limit_above_the_limit_is_questioned(
    ledger_place: str, tmp_path: Path, cells: str
) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L")
        path = lab_file(tmp_path, f"{add_sample(book)},Cd,total,{cells},,,,")
        with pytest.raises(Questioned, match=r"row 2: .* above the limit L-0001 \(0.11 mg/L at SEW\)"):
            read_in(book, path)


def test_a_limit_that_was_retired_questions_nothing(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "cadmium", "0.11 mg/L", effective_to=date(2026, 3, 1))
        assert read_in(book, lab_file(tmp_path, f"{add_sample(book)},Cd,total,<1,mg/L,,,,,")) == 1


def test_local_times_are_those_of_the_first_samples_site(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book, started_at=datetime(2026, 7, 1, 9, tzinfo=UTC))
        path = lab_file(tmp_path, f"{sample},Zn,total,1,mg/L,,2026-07-02 10:00,,,")
        assert explain_files(book, Order(paths=[path]))[0].time_zone == "Europe/Lisbon"
        read_in(book, path)
        assert listing(book)[0].result.analysed_at == datetime(2026, 7, 2, 9, tzinfo=UTC)


def test_progress_ends_at_the_whole_file(ledger_place: str, tmp_path: Path) -> None:
    seen: list[tuple[str, float]] = []
    with world(ledger_place) as book:
        path = lab_file(tmp_path, f"{add_sample(book)},Zn,total,1,mg/L,,,,,")
        import_files(book, Order(paths=[path]), by="RS", progress=lambda *each: seen.append(each))
    assert seen[-1] == ("lab.csv", 1.0)


def test_one_result_by_hand(ledger_place: str) -> None:
    with world(ledger_place) as book:
        sample = add_sample(book)
        cells = {"sample": sample, "analyte": "Cd", "fraction": "total", "value": "0.005 U", "unit": "mg/l"}
        number = enter(book, cells, by="RS")
        result = listing(book, Wanted(sample=sample), analyte="cadmium")[0].result
    assert (result.row, result.text, result.qualifier, result.fraction) == (
        number,
        "0.005 U",
        Qualifier.BELOW,
        Fraction.TOTAL,
    )
    assert (result.file, result.file_row) == (None, None)


def test_a_bad_cell_by_hand_is_one_sentence(ledger_place: str) -> None:
    with world(ledger_place) as book:
        cells = {
            "sample": add_sample(book),
            "analyte": "Cd",
            "fraction": "total",
            "value": "1",
            "unit": "s.u.",
        }
        with pytest.raises(ValueRefused, match=r"unit 's\.u\.' is not accepted"):
            enter(book, cells, by="RS")
        with pytest.raises(FileRefused, match="the result: 2 bad cells"):
            enter(book, {**cells, "value": "x"}, by="RS")


def test_a_voided_result_is_not_listed(ledger_place: str) -> None:
    with world(ledger_place) as book:
        number = add_result(book, add_sample(book), "zinc", "1", "mg/L")
        before = str(book.head().sequence)
        void(book, number, by="RS", reason="wrong bottle")
        assert (len(listing(book)), len(listing(book, as_of=before))) == (0, 1)
        with pytest.raises(RecordMissing):
            void(book, number, by="RS", reason="again")


def test_a_result_past_its_holding_time_is_marked(ledger_place: str) -> None:
    """40 CFR 136.3 Table II: metals but boron, chromium VI and mercury, 6 months."""
    with world(ledger_place) as book:
        sample = add_sample(book, started_at=datetime(2025, 3, 2, 12, tzinfo=UTC))
        for day in (2, 3):
            at = datetime(2025, 9, day, 10, tzinfo=UTC)
            add_result(book, sample, "zinc", "1", "mg/L", analysed_at=at, replicate=day)
        assert [each.late for each in listing(book)] == [False, True]
