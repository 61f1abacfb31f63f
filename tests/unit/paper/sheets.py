"""Sheets for the paper tests; every place, operator, company and number in them is invented."""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime
from io import BytesIO

import pypdf

from effluent.paper.sheet import Generator, LaboratoryRow, ManifestSheet, OriginRow, Party, SheetLine

DIGEST = "3f9a" * 16
LEDGER = "7d0c5a1e-4b1f-4f1a-9a55-2f6f0e8b9c11"

CARRIER = Party(
    name="Invented Haulage of Nowhere",
    address="4 Example Quay, 10002 Nowhere",
    phone="+00 555 0142",
    identification="INV000000142",
)
FACILITY = Party(
    name="Invented Treatment Works",
    address="Example Basin 9, 10009 Nowhere",
    phone="+00 555 0190",
    identification="INV000000190",
)
GENERATOR = Generator(
    operator="Invented Air Services",
    site="Nowhere Line Station",
    address="Hangar 3, Example Field, 10001 Nowhere",
    phone="+00 555 0100",
    identification="INV000000100",
    emergency_contact="Invented Duty Desk, contract 0000",
    emergency_phone="+00 555 0111",
)


def line(number: int) -> SheetLine:
    return SheetLine(
        description=f"NA3082, Hazardous waste, liquid, n.o.s. (D006), 9, PG III (invented line {number})",
        number=2,
        container_code="DM",
        container_word="metal drum",
        quantity=380,
        unit_code="L",
        unit_word="litre",
        waste_codes=("D006", "D008"),
        containers=(f"DR-{number:03d}-A", f"DR-{number:03d}-B"),
    )


def reading(number: int) -> LaboratoryRow:
    return LaboratoryRow(
        container=f"DR-{number:03d}-A",
        sample=f"S-2031-{number:04d}",
        drawn="drawn 2031-03-05",
        analyte="Cadmium",
        fraction="total recoverable",
        result="0.0123 mg/L J",
        analysed="Invented Laboratory, analysed 2031-03-08",
        limit="at most 0.11 mg/L, daily maximum",
        source="Invented Sewer Authority, permit IS-17, table 2",
        verdict="within",
        notes=("limit not verified by a second person",),
    )


def origin(number: int) -> OriginRow:
    return OriginRow(
        container=f"DR-{number:03d}-A",
        wash=f"W-{number:04d}",
        washed_on="2031-03-04",
        engine=f"ESN-{700000 + number}",
        kind="performance recovery wash",
        cleaner="aqueous-based",
        volume="118 L",
    )


def sheet(lines: int = 1, laboratory: int = 0, origins: int = 0, **changes: object) -> ManifestSheet:
    plain = ManifestSheet(
        code="M-0007",
        state="issued",
        issued_on="2031-03-20",
        generator=GENERATOR,
        carriers=(CARRIER, replace(CARRIER, name="Second Invented Haulage")),
        facility=FACILITY,
        lines=tuple(line(n) for n in range(1, lines + 1)),
        laboratory=tuple(reading(n) for n in range(1, laboratory + 1)),
        origins=tuple(origin(n) for n in range(1, origins + 1)),
        special_handling="Keep from freezing. Specific gravity 1.0.",
        ledger_id=LEDGER,
        entry=4711,
        digest=DIGEST,
        created_at=datetime(2031, 3, 20, 14, 5, 6, tzinfo=UTC),
    )
    return replace(plain, **changes)  # type: ignore[arg-type]


def pages(file: bytes) -> list[str]:
    """Read the text of each page with white space made single."""
    return [" ".join(page.extract_text().split()) for page in pypdf.PdfReader(BytesIO(file)).pages]
