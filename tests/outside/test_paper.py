"""The manifest paper against published arithmetic and independent readers.

Page arithmetic: the uniform hazardous waste manifest, EPA form 8700-22, has four waste lines (item 9b,
field text of the form); its continuation 8700-22A has ten (value from memory).
QR code: ISO/IEC 18004, layout and tables of version 8 at level M (from memory).
PDF structure: qpdf, a reader independent of the library that wrote the file.
"""

import io
import re
from itertools import zip_longest

import pdfplumber
import pikepdf
import pypdf
import pytest

from effluent.paper.manifest import render
from tests.unit.paper.sheets import DIGEST, LEDGER, sheet


@pytest.mark.parametrize("paper", ["A4", "Letter"])
@pytest.mark.parametrize(
    ("lines", "pages"), [(1, 1), (4, 1), (5, 2), (14, 2), (15, 3), (24, 3), (25, 4), (44, 5)]
)
def test_waste_lines_take_the_pages_of_the_published_arithmetic(lines, pages, paper):
    with pdfplumber.open(io.BytesIO(render(sheet(lines), paper=paper))) as document:
        assert len(document.pages) == pages
        assert f"Page {pages} of {pages}" in document.pages[-1].extract_text()


@pytest.mark.parametrize("paper", ["A4", "Letter"])
@pytest.mark.parametrize("rows", [0, 60])
@pytest.mark.parametrize("state", ["draft", "issued", "void"])
def test_qpdf_finds_no_fault(tmp_path, rows, paper, state):
    path = tmp_path / "manifest.pdf"
    path.write_bytes(render(sheet(15, rows, rows, state=state, special_handling="漢 ≥ 5"), paper=paper))
    assert qpdf_check(path) == (0, False)


def test_qpdf_finds_the_fault_of_a_cut_file(tmp_path):
    path = tmp_path / "manifest.pdf"
    path.write_bytes(render(sheet(15))[:-2000])
    assert qpdf_check(path) != (0, False)


def qpdf_check(path):
    """Run what the command ``qpdf --check`` runs, out of the library that pikepdf carries."""
    job = pikepdf.Job(["qpdf", "--check", str(path)])
    try:
        job.run()
    except pikepdf.PdfError:
        return 2, True
    return job.exit_code, job.has_warnings


def test_two_readers_read_the_same_letters():
    file = render(sheet(6, 5, 5, state="draft"))
    with pdfplumber.open(io.BytesIO(file)) as document:
        one = [sorted("".join(page.extract_text().split())) for page in document.pages]
    two = [sorted("".join(page.extract_text().split())) for page in pypdf.PdfReader(io.BytesIO(file)).pages]
    assert one == two


def test_all_fonts_are_embedded_subsets():
    page = pypdf.PdfReader(io.BytesIO(render(sheet(special_handling="漢 ≥ 5")))).pages[0]
    content = page.get_contents().get_data().decode("latin-1")
    used = set(re.findall(r"/(F\S+) \S+ Tf", content))
    fonts = {name[1:]: font.get_object() for name, font in page["/Resources"]["/Font"].items()}
    assert len(used) == 4
    assert all("/FontFile2" in fonts[name]["/FontDescriptor"] for name in used)


def test_qr_code_of_every_page_reads_back_as_the_head_of_the_ledger():
    for page in pypdf.PdfReader(io.BytesIO(render(sheet(5, 5)))).pages:
        (form,) = page["/Resources"]["/XObject"].values()
        assert read_code(modules(form.get_object().get_data().decode("ascii"))) == (
            f"effluent ledger {LEDGER} entry 4711 sha256 {DIGEST}"
        )


SIDE = 49  # version 8
CENTRES = (6, 24, 42)
BLOCKS = (38, 38, 39, 39)  # data codewords of each block, level M
FORMAT_MASK = 0b101010000010010
MASKS = (
    lambda i, j: (i + j) % 2,
    lambda i, j: i % 2,
    lambda i, j: j % 3,
    lambda i, j: (i + j) % 3,
    lambda i, j: (i // 2 + j // 3) % 2,
    lambda i, j: i * j % 2 + i * j % 3,
    lambda i, j: (i * j % 2 + i * j % 3) % 2,
    lambda i, j: ((i + j) % 2 + i * j % 3) % 2,
)


def modules(drawing):
    """Return the dark modules from the rectangles that the file draws, rows from the top."""
    rectangles = re.findall(r"(\d+) (\d+) (\d+) 1 re", drawing)
    return {(SIDE - 1 - int(y), int(x) + n) for x, y, width in rectangles for n in range(int(width))}


def fixed(i, j):
    """Tell whether a module belongs to the finder, timing, alignment, format or version pattern."""
    finder = (i < 9 and j < 9) or (i < 9 and j > SIDE - 9) or (i > SIDE - 9 and j < 9)
    version = (i < 6 and j > SIDE - 12) or (j < 6 and i > SIDE - 12)
    corners = {(6, 6), (6, 42), (42, 6)}
    centres = [(a, b) for a in CENTRES for b in CENTRES if (a, b) not in corners]
    aligned = any(abs(i - a) < 3 and abs(j - b) < 3 for a, b in centres)
    return finder or version or aligned or 6 in (i, j)


def read_code(dark):
    """Read a version 8-M byte-mode symbol that has no damage."""
    places = [(8, j) for j in (0, 1, 2, 3, 4, 5, 7, 8)] + [(i, 8) for i in (7, 5, 4, 3, 2, 1, 0)]
    format_bits = int("".join("01"[place in dark] for place in places), 2) ^ FORMAT_MASK
    assert format_bits >> 13 == 0, "level M"
    mask = MASKS[format_bits >> 10 & 7]
    bits = "".join("01"[(place in dark) ^ (mask(*place) == 0)] for place in path())
    stream = [int(bits[n : n + 8], 2) for n in range(0, len(bits) - 7, 8)]
    data = "".join(f"{word:08b}" for word in in_order(stream))
    assert data[:4] == "0100", "byte mode"
    length = int(data[4:12], 2)
    return bytes(int(data[n : n + 8], 2) for n in range(12, 12 + 8 * length, 8)).decode()


def path():
    """Return the data modules in reading order: pairs of columns from the right, up and down in turn."""
    columns = [*range(SIDE - 1, 6, -2), 5, 3, 1]
    for turn, right in enumerate(columns):
        rows = range(SIDE) if turn % 2 else range(SIDE - 1, -1, -1)
        yield from ((i, j) for i in rows for j in (right, right - 1) if not fixed(i, j))


def in_order(stream):
    """Put the interleaved data codewords of the blocks one after the other."""
    words = iter(stream)
    table = [[next(words) for size in BLOCKS if row < size] for row in range(max(BLOCKS))]
    table[-1] = [None, None, *table[-1]]
    return [word for block in zip_longest(*table) for word in block if word is not None]
