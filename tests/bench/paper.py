"""The manifest paper, from the start of a process to the finished file.

The floor prints the same words in tables of as many cells, with the library's own font and nothing else: no
embedded font, no code, no second pass for page numbers.
"""

from __future__ import annotations

import json
import pickle
import sys
from io import BytesIO
from pathlib import Path
from typing import Any

from tests.bench.race import Race, Side, work


@work("a one-page manifest", budget=1.5)
def print_manifest(folder: Path, rows: int) -> Race:
    """One paper in a process of its own; the number of rows does not matter."""
    from tests.unit.paper.sheets import sheet

    (folder / "sheet").write_bytes(pickle.dumps(sheet(4)))
    (folder / "words").write_text(json.dumps(words()), encoding="utf-8")
    command = [sys.executable, "-m", "tests.bench.paper"]
    return Race(
        floor=Side([*command, "floor", str(folder / "words")]),
        ours=Side([*command, "ours", str(folder / "sheet")]),
    )


def ours(place: str) -> bytes:
    """A paper of four lines that fits one page."""
    from effluent.paper.manifest import render

    return render(pickle.loads(Path(place).read_bytes()))


def bare(place: str) -> bytes:
    """The words of that paper in paragraphs and plain tables."""
    from reportlab.lib.pagesizes import A4
    from reportlab.lib.styles import getSampleStyleSheet
    from reportlab.platypus import Paragraph, SimpleDocTemplate, Table

    style = getSampleStyleSheet()["Normal"].clone("small", fontSize=7.5, leading=8.5)
    buffer = BytesIO()
    document = SimpleDocTemplate(
        buffer, pagesize=A4, leftMargin=24, rightMargin=24, topMargin=24, bottomMargin=24
    )
    document.build(
        [
            Table([[[Paragraph(part, style) for part in cell] for cell in row] for row in block])
            if isinstance(block, list)
            else Paragraph(block, style)
            for block in json.loads(Path(place).read_text(encoding="utf-8"))
        ]
    )
    return buffer.getvalue()


def words() -> list[Any]:
    """Paragraphs, and tables as rows of cells, each a few paragraphs."""
    from effluent.paper.section import CAUTIONS
    from effluent.settings import CAUTION
    from tests.unit.paper.sheets import sheet

    paper = sheet(4)
    who = paper.generator
    parties = [*paper.carriers, paper.facility]
    lines = [
        [
            (str(number),),
            (line.description, f"Containers: {', '.join(line.containers)}"),
            (f"{line.number} x {line.container_code}", line.container_word),
            (str(line.quantity),),
            (line.unit_code, line.unit_word),
            (", ".join(line.waste_codes),),
        ]
        for number, line in enumerate(paper.lines, 1)
    ]
    return [
        "Waste shipment data sheet",
        "Working document: data for completing the official form. Not an official manifest. "
        "Items: EPA forms 8700-22 and 8700-22A.",
        f"Manifest {paper.code}",
        [
            [
                ("Manifest number of this ledger (not an official number)", paper.code),
                ("State", paper.state),
                ("Issued on", paper.issued_on),
                ("Official tracking number (item 4)", "leave blank; copy from the pre-printed form"),
            ]
        ],
        [
            [
                ("Generator: operator (item 5)", who.operator),
                ("Site the containers leave (item 5)", who.site),
                ("Identification number (item 1)", who.identification),
            ],
            [
                ("Address (item 5)", who.address),
                ("Emergency contact and telephone (item 3)", who.emergency_contact, who.emergency_phone),
                ("Telephone (item 5)", who.phone),
            ],
        ],
        "Carriers and receiving facility",
        [
            heads("Role", "Name", "Address", "Telephone", "Identification number"),
            *(
                [("Party (item 6)",), (p.name,), (p.address,), (p.phone,), (p.identification,)]
                for p in parties
            ),
        ],
        "Waste lines 1 to 4",
        [
            heads(
                "Line",
                "Description, and the containers (item 9b)",
                "Containers (item 10)",
                "Quantity (item 11)",
                "Unit (item 12)",
                "Waste codes (item 13)",
            ),
            *lines,
        ],
        [
            [
                ("Special handling and further information (item 14)", paper.special_handling),
                ("Annexes", "A, laboratory summary, rows: none", "B, origin of the water, rows: none"),
            ]
        ],
        "Cautions",
        *CAUTIONS,
        "Signatures, by hand when the containers change hands",
        "Left blank here. Certifications, international shipments (item 16), discrepancies (item 18) and "
        "management method codes (item 19) are completed on the official form by those who answer for them.",
        [
            heads("Role", "Printed name", "Signature", "Date"),
            *(
                [(role,), (" ",), (" ",), (" ",)]
                for role in ("Generator", "Carrier 1", "Carrier 2", "Facility")
            ),
        ],
        f"Ledger {paper.ledger_id}, entry {paper.entry}",
        f"sha256 {paper.digest}",
        "Prepared by effluent from the ledger entry recorded at 2031-03-20 14:05:06 UTC.",
        CAUTION,
    ]


def heads(*names: str) -> list[tuple[str, ...]]:
    return [(name,) for name in names]


if __name__ == "__main__":
    {"floor": bare, "ours": ours}[sys.argv[1]](sys.argv[2])
