from __future__ import annotations

import os
from pathlib import Path

import pytest

from effluent.errors import FileMissing, FileRefused, Questioned, ValueRefused
from effluent.services import delivery, receiving
from effluent.services.importing import Order, explain_files, import_files
from effluent.services.result import enter, listing
from tests.world import add_limit, add_result, add_sample, add_wash, world

HEAD = "sample,analyte,fraction,value,unit"


def lab_file(folder: Path, rows: list[str], heading: str = HEAD) -> Path:
    path = folder / "lab.csv"
    path.write_text("\n".join([heading, *rows, ""]), encoding="utf-8")
    return path


def test_chunks_are_joined_until_there_are_enough(
    ledger_place: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(delivery, "_ENOUGH", 3000)
    with world(ledger_place) as book:
        samples = [add_sample(book) for _ in range(2)]
        rows = [f"{sample},Zn,total,1,mg/L" for sample in samples for _ in range(2000)]
        numbered = [f"{row},{number % 999 + 1},{number}" for number, row in enumerate(rows)]
        path = lab_file(tmp_path, numbered, f"{HEAD},replicate,report")
        with pytest.raises(FileRefused) as caught:
            import_files(book, Order(paths=[path]), by="RS")
    assert len(caught.value.rows) == 4000 - 2 * 999
    assert caught.value.rows[0].row == 1001
    assert "the same result stands in row 2" in caught.value.rows[0].reason


def test_more_errors_than_anyone_reads_are_counted(
    ledger_place: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(receiving, "_MOST_ERRORS", 2)
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"X-{number},Zn,total,1,mg/L" for number in range(5)])
        with pytest.raises(FileRefused, match="and 3 more; mend these first"):
            import_files(book, Order(paths=[path]), by="RS")


def test_near_samples_are_looked_for_a_few_times_only(
    ledger_place: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(receiving, "_MOST_LOOKED_FOR", 1)
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"{code},Zn,total,1,mg/L" for code in ("S-1", "S-1", "S-2")])
        with pytest.raises(FileRefused) as caught:
            import_files(book, Order(paths=[path]), by="RS")
    first, again, other = (row.reason for row in caught.value.rows if row.column == "sample")
    assert first == again == "no such sample in this ledger; record it with: effluent sample take"
    assert other == "no such sample"


def test_many_rows_with_one_question_are_asked_about_once(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_limit(book, "SEW", "zinc", "0.1 mg/L")
        rows = [f"{add_sample(book)},Zn,total,<1,mg/L" for _ in range(7)]
        with pytest.raises(Questioned) as caught:
            import_files(book, Order(paths=[lab_file(tmp_path, rows)]), by="RS")
    (question,) = caught.value.questions
    assert question.startswith(
        "row 2, row 3, row 4, row 5, row 6 and 2 more: the reporting limit zinc 1 mg/L"
    )


def test_caught_water_of_a_site_has_one_history(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        add_result(book, add_sample(book, wash=add_wash(book)), "zinc", "0.1", "mg/L")
        rows = [f"{add_sample(book)},Zn,total,100,mg/L", f"{add_sample(book, point='SEW')},Zn,total,100,mg/L"]
        with pytest.raises(Questioned) as caught:
            import_files(book, Order(paths=[lab_file(tmp_path, rows)]), by="RS")
    assert [question[:6] for question in caught.value.questions] == ["row 2:"]


def test_a_mapping_file_is_part_of_the_record(ledger_place: str, tmp_path: Path) -> None:
    mapping = tmp_path / "lab.toml"
    mapping.write_text(
        'time_zone = "UTC"\n[columns]\nsample = "No"\nvalue = "Found"\n'
        '[constants]\nanalyte = "zinc"\nfraction = "total"\nunit = "mg/L"\n[skip]\nKind = ["QC"]\n',
        encoding="utf-8",
    )
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"{add_sample(book)},1,", "blank,0,QC"], "No,Found,Kind")
        order = Order(paths=[path], layout=mapping)
        assert explain_files(book, order)[0].time_zone == "UTC"
        assert import_files(book, order, by="RS").skipped == 1
        with book.reading() as view:
            assert len(view.value("file", "F-0001").layout) == 64


def test_a_file_that_is_not_there_is_named(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book, pytest.raises(FileMissing, match=r"none\.csv"):
        import_files(book, Order(paths=[tmp_path / "none.csv"]), by="RS")


def test_a_folder_is_not_the_laboratory_s_file(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book, pytest.raises(FileMissing, match="what is there is no file"):
        import_files(book, Order(paths=[tmp_path]), by="RS")


def test_a_file_named_twice_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"{add_sample(book)},Zn,total,1,mg/L"])
        copy = tmp_path / "copy.csv"
        copy.write_bytes(path.read_bytes())
        with pytest.raises(ValueRefused, match=f"copy.csv.*it is {path.name} once more"):
            import_files(book, Order(paths=[path, copy]), by="RS")


def test_a_file_that_changes_while_it_is_read_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"{add_sample(book)},Zn,total,1,mg/L"])
        head = book.head()

        def touch(_name: str, _share: float) -> None:
            os.utime(path, (1, 1))

        with pytest.raises(ValueRefused, match="it changed while it was read"):
            import_files(book, Order(paths=[path]), by="RS", progress=touch)
        assert book.head() == head


def test_an_unknown_sample_by_hand_is_refused_whatever_its_zone(ledger_place: str) -> None:
    with world(ledger_place) as book:
        cells = {"sample": "S-9", "analyte": "pH", "value": "7", "unit": "", "reissue_of": "R1"}
        with pytest.raises(ValueError, match="no such sample"):
            enter(book, cells, by="RS")
        assert listing(book) == ()


def test_a_file_without_results_is_refused(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        before = book.head()
        with pytest.raises(ValueRefused, match="it holds no results"):
            import_files(book, Order(paths=[lab_file(tmp_path, [])]), by="RS")
        assert book.head() == before


def test_decimal_comma_is_declared_with_the_order(ledger_place: str, tmp_path: Path) -> None:
    with world(ledger_place) as book:
        path = lab_file(tmp_path, [f"{add_sample(book)};Zn;total;1.234,5;ug/L"], HEAD.replace(",", ";"))
        with pytest.raises(FileRefused, match="1 bad cell"):
            import_files(book, Order(paths=[path]), by="RS")
        order = Order(paths=[path], decimal_comma=True)
        assert explain_files(book, order)[0].result_count == 1
        import_files(book, order, by="RS")
        assert listing(book)[0].result.number == "1234.5"
        assert book.head().action == "import results, decimal comma"
