"""The manifest paper, read back with independent readers."""

import os
import subprocess
import sys
from dataclasses import replace
from datetime import datetime
from io import BytesIO

import pdfplumber
import pypdf
import pytest

from effluent.errors import NotPrintable, ValueRefused
from effluent.paper.manifest import render
from effluent.settings import CAUTION
from tests.unit.paper.sheets import CARRIER, DIGEST, GENERATOR, LEDGER, line, pages, reading, sheet

PAPERS = ("A4", "Letter")
PURPOSE = "Working document: data for completing the official form. Not an official manifest."


@pytest.mark.parametrize(("paper", "points"), [("A4", (595.28, 841.89)), ("Letter", (612, 792))])
def test_paper_has_the_size_asked_for(paper, points):
    box = pypdf.PdfReader(BytesIO(render(sheet(), paper=paper))).pages[0].mediabox
    assert (float(box.width), float(box.height)) == pytest.approx(points, abs=0.01)


def test_unknown_paper_is_refused():
    with pytest.raises(ValueRefused, match="A4, Letter"):
        render(sheet(), paper="A3")


@pytest.mark.parametrize("paper", PAPERS)
def test_every_page_says_what_it_is_and_witnesses_the_ledger(paper):
    texts = pages(render(sheet(16, 30, 40), paper=paper))
    for number, text in enumerate(texts, 1):
        assert f"{PURPOSE} Items: EPA forms 8700-22 and 8700-22A." in text
        assert f"Page {number} of {len(texts)}" in text
        assert "Manifest M-0007" in text
        assert f"Ledger {LEDGER}, entry 4711" in text
        assert f"sha256 {DIGEST}" in text
        assert CAUTION in text


@pytest.mark.parametrize(("state", "word"), [("draft", "DRAFT"), ("void", "VOID"), ("issued", "ISSUED")])
def test_every_page_says_its_state_in_words(state, word):
    assert all(word in text for text in pages(render(sheet(5, 3, state=state))))


def test_state_note_is_printed():
    assert (
        "Voided: drum exchanged."
        in pages(render(sheet(state="void", state_note="Voided: drum exchanged.")))[0]
    )


def test_tracking_number_is_never_made_up():
    text = pages(render(sheet(5)))
    assert all("leave blank; copy from the pre-printed form" in page for page in text)


def test_tracking_number_is_printed_as_typed():
    assert "000000000INV" in pages(render(sheet(tracking_number="000000000INV")))[0]


def test_first_page_names_the_items_of_the_official_form():
    text = pages(render(sheet()))[0]
    for item in (1, 3, 4, 5, 6, 7, 8, "9b", 10, 11, 12, 13, 14, 15, 16, 17, 18, 19, 20):
        assert f"item {item})" in text


def test_continuation_names_the_items_of_the_official_continuation():
    text = pages(render(sheet(5, carriers=(CARRIER,) * 4)))[1]
    for item in (21, 23, 24, 25, 26, "27b", 28, 29, 30, 31, 33, 34):
        assert f"item {item})" in text


def test_third_carrier_gets_a_continuation_with_space_to_sign():
    carriers = (CARRIER, CARRIER, replace(CARRIER, name="Third Invented Haulage"))
    text = pages(render(sheet(carriers=carriers)))[1]
    assert "Carrier 3 (item 25) Third Invented Haulage" in text
    assert "Carrier 3 (item 33)" in text


def test_tall_row_moves_whole_to_the_next_page():
    tall = tuple(replace(line(n), description=f"row{n} " + "invented " * 260) for n in (1, 2))
    texts = pages(render(replace(sheet(carriers=()), lines=tall)))
    assert [text.count("Waste lines 1 to 2") for text in texts][:2] == [1, 1]
    assert "row2" not in texts[0]


def test_draft_without_carriers_says_so():
    assert "Carrier 1 (item 6) not named yet" in pages(render(sheet(state="draft", carriers=())))[0]


def test_draft_without_lines_says_so():
    assert "No waste lines" in pages(render(sheet(0, state="draft")))[0]


def test_first_page_counts_the_rows_of_the_annexes():
    text = pages(render(sheet(1, 3)))[0]
    assert "A, laboratory summary, rows: 3" in text
    assert "B, origin of the water, rows: none" in text


def test_operator_of_any_script_is_the_author():
    operator = "虚构航空 Łódź (x) \\ & Søn"
    file = render(sheet(generator=replace(GENERATOR, operator=operator)))
    assert pypdf.PdfReader(BytesIO(file)).metadata.author == operator


def test_safety_cautions_and_the_sites_own_are_printed():
    text = pages(render(sheet(cautions=("Invented site rule: two persons lift.",))))[0]
    assert "Invented site rule: two persons lift." in text
    assert "cadmium" in text
    assert "These are common precautions; the safety data sheet and local rules govern." in text


def test_metadata_comes_from_the_sheet():
    reader = pypdf.PdfReader(BytesIO(render(sheet())))
    meta = reader.metadata
    assert meta is not None
    assert meta.title == "Manifest M-0007, ISSUED"
    assert (meta.author, meta.creator, meta.subject) == ("Invented Air Services", "effluent", PURPOSE)
    assert meta.creation_date == sheet().created_at
    assert reader.trailer["/Root"]["/Lang"] == "en"


def test_environment_clock_does_not_change_the_bytes(monkeypatch):
    file = render(sheet())
    monkeypatch.setenv("SOURCE_DATE_EPOCH", "1")
    assert render(sheet()) == file


def test_instant_without_a_zone_is_refused():
    with pytest.raises(ValueRefused, match="zone"):
        render(sheet(created_at=datetime(2031, 3, 20, 14, 5)))  # noqa: DTZ001


def test_same_sheet_gives_same_bytes_in_any_process():
    program = (
        "import hashlib; from effluent.paper.manifest import render;"
        "from tests.unit.paper.sheets import sheet;"
        "print(hashlib.sha256(render(sheet(6, 8, 9, special_handling='漢 ≥ 5'))).hexdigest())"
    )
    digests = {_output(program, seed) for seed in ("0", "1", "4242")}
    assert len(digests) == 1


def _output(program: str, seed: str) -> str:
    environment = {**os.environ, "PYTHONHASHSEED": seed, "PYTHONPATH": os.pathsep.join(sys.path)}
    done = subprocess.run(
        [sys.executable, "-c", program], env=environment, capture_output=True, text=True, check=True
    )
    return done.stdout


def test_markup_in_names_is_printed_as_it_stands():
    name = """Invented <b>Haul</b> & "Sons" &amp; O'Nobody </para> %s {0} \\ (x"""
    assert name in pages(render(sheet(special_handling=name)))[0]


@pytest.mark.parametrize(
    "name",
    [
        "Łódź Ünï",
        "Ελλάς Πλύση",
        "Москва Ёж",
        "Việt Nam Đà Nẵng",
        "İğdır Şişli",
        "虚构航空ひこうき",
        "≥ 5 °C − 3",
    ],
)
def test_names_of_many_scripts_read_back(name):
    assert name in pages(render(sheet(special_handling=name)))[0]


def test_right_to_left_name_is_refused():
    with pytest.raises(NotPrintable):
        render(sheet(special_handling="ערד"))


@pytest.mark.parametrize("paper", PAPERS)
@pytest.mark.parametrize("letter", ["X", "虚"])
def test_three_hundred_letters_without_a_space_are_never_cut(paper, letter):
    party = replace(CARRIER, name=letter * 300, address=letter * 300, identification=letter * 300)
    file = render(sheet(2, carriers=(party,), facility=party), paper=paper)
    assert "".join(pages(file)).count(letter) == 6 * 300


@pytest.mark.parametrize("paper", PAPERS)
def test_text_stays_inside_the_margins(paper):
    party = replace(CARRIER, name="X" * 300, address="Invented long name " * 16, phone="9" * 300)
    with pdfplumber.open(BytesIO(render(sheet(3, carriers=(party, party)), paper=paper))) as document:
        for page in document.pages:
            assert min(char["x0"] for char in page.chars) >= 36
            assert max(char["x1"] for char in page.chars) <= page.width - 36
            assert min(char["top"] for char in page.chars) >= 30
            assert max(char["bottom"] for char in page.chars) <= page.height - 30


@pytest.mark.parametrize("paper", PAPERS)
def test_text_longer_than_a_page_flows_on(paper):
    words = " ".join(f"w{n}" for n in range(4000))
    lines = (replace(line(1), description=words),)
    text = " ".join(pages(render(replace(sheet(carriers=()), lines=lines), paper=paper)))
    assert [word for word in text.split() if word[0] == "w" and word[1:].isdigit()] == words.split()


@pytest.mark.parametrize("paper", PAPERS)
def test_forty_containers_and_sixty_readings_are_all_printed(paper):
    numbers = tuple(f"DRUM-{n:04d}" for n in range(40))
    lines = (replace(line(1), containers=numbers, number=40),)
    file = render(replace(sheet(1, 60, 40), lines=lines), paper=paper)
    text = " ".join(pages(file))
    assert all(number in text for number in numbers)
    assert all(reading(n).sample in text for n in range(1, 61))
    assert all(f"ESN-{700000 + n}" in text for n in range(1, 41))


def test_annex_heading_and_columns_come_again_on_each_page():
    annex = [text for text in pages(render(sheet(1, 60))) if "S-2031-" in text]
    assert len(annex) > 1
    assert all("Annex A. Laboratory summary" in text and "Verdict Notes" in text for text in annex)


@pytest.mark.parametrize("rows", range(12, 20))
def test_annex_heading_never_stands_alone(rows):
    for text in pages(render(sheet(1, rows, 3))):
        assert ("Annex B." in text) == ("ESN-7" in text)


def test_laboratory_row_shows_result_limit_source_verdict_and_notes():
    text = pages(render(sheet(1, 1)))[1]
    for part in ("0.0123 mg/L J", "total recoverable", "permit IS-17", "within", "second person"):
        assert part in text


def test_laboratory_row_shows_when_the_sample_was_drawn_and_who_analysed_it_when():
    text = pages(render(sheet(1, 1)))[1]
    assert "drawn 2031-03-05" in text
    assert all(part in text for part in ("Invented", "Laboratory,", "analysed", "2031-03-08"))


def test_manifest_number_that_fills_the_head_is_refused():
    with pytest.raises(ValueRefused, match="manifest number"):
        render(sheet(code="M" * 4000))
