"""The parts of a manifest paper, in the order they are printed.

Item numbers are those of the uniform hazardous waste manifest (EPA form 8700-22, items 1 to 20, and
its continuation 8700-22A, items 21 to 36); the arrangement is our own.
"""

from __future__ import annotations

from collections.abc import Sequence
from math import ceil

from reportlab.platypus import CondPageBreak, KeepTogether, PageBreak, Spacer
from reportlab.platypus.flowables import Flowable

from effluent.paper.block import NOTE, SMALL, STRONG, Row, field, grid, listing, words
from effluent.paper.sheet import LaboratoryRow, ManifestSheet, OriginRow, Party, SheetLine

__all__ = ["CAUTIONS", "FIRST_PAGE_LINES", "SHEET_LINES", "continuation_count", "story"]

FIRST_PAGE_LINES = 4
SHEET_LINES = 10
_FIRST_PAGE_CARRIERS = 2
_SHEET_CARRIERS = 2

# Common practice, no source.
CAUTIONS = (
    "Used wash water may hold cadmium and other metals, cleaner, oil and fuel residues.",
    "Wear the protective equipment that the cleaner's safety data sheet names; keep off skin, eyes and "
    "clothing; do not eat, drink or smoke while handling.",
    "Keep containers closed, upright and labelled; never let the water reach a drain or the ground.",
    "On a spill or leak: stay clear, stop the source only if that is safe, contain it and call the "
    "emergency telephone above.",
    "These are common precautions; the safety data sheet and local rules govern.",
)

_COPY = "leave blank; copy from the pre-printed form"


def continuation_count(lines: int, carriers: int = 0) -> int:
    """Return how many continuation sheets the lines and carriers need beyond the first page.

    The first page takes four waste lines and two carriers, each continuation ten lines and two
    carriers. Text of unusual length may run a sheet over more than one page.
    """
    by_line = ceil(max(0, lines - FIRST_PAGE_LINES) / SHEET_LINES)
    by_carrier = ceil(max(0, carriers - _FIRST_PAGE_CARRIERS) / _SHEET_CARRIERS)
    return max(by_line, by_carrier)


def story(sheet: ManifestSheet, width: float) -> list[Flowable]:
    """Return the whole paper as flowables for a column of `width` points."""
    flow = _first_page(sheet, width)
    for number in range(continuation_count(len(sheet.lines), len(sheet.carriers))):
        flow += [PageBreak(), *_continuation(sheet, width, number)]
    return flow + _annexes(sheet, width)


def _first_page(sheet: ManifestSheet, width: float) -> list[Flowable]:
    carriers = sheet.carriers[:_FIRST_PAGE_CARRIERS]
    return [
        *_facts(sheet, width),
        _generator(sheet, width),
        _parties(sheet, carriers, width),
        _lines(sheet.lines[:FIRST_PAGE_LINES], 1, width, first_page=True),
        _handling(sheet, width),
        *_cautions(sheet),
        *_signatures(_first_signers(carriers), width),
    ]


def _facts(sheet: ManifestSheet, width: float) -> list[Flowable]:
    cells = [
        field("Manifest number of this ledger (not an official number)", sheet.code),
        field("State", sheet.state),
        field("Issued on", sheet.issued_on),
        field("Official tracking number (item 4)", sheet.tracking_number or _COPY),
    ]
    note = [words(sheet.state_note, STRONG), Spacer(0, 4)] if sheet.state_note else []
    return [grid([cells], _shares(width, 36, 13, 16, 35)), *note]


def _generator(sheet: ManifestSheet, width: float) -> Flowable:
    who = sheet.generator
    emergency = [text for text in (who.emergency_contact, who.emergency_phone) if text] or [""]
    cells = [
        [
            field("Generator: operator (item 5)", who.operator),
            field("Site the containers leave (item 5)", who.site),
            field("Identification number (item 1)", who.identification),
        ],
        [
            field("Address (item 5)", who.address),
            field("Emergency contact and telephone (item 3)", *emergency),
            field("Telephone (item 5)", who.phone),
        ],
    ]
    return grid(cells, _shares(width, 42, 33, 25))


def _parties(sheet: ManifestSheet, carriers: Sequence[Party], width: float) -> Flowable:
    named = carriers or (Party(name="not named yet"),)
    rows = [_party(f"Carrier {n} (item {5 + n})", party) for n, party in enumerate(named, 1)]
    rows.append(_party("Receiving facility (item 8)", sheet.facility))
    return _party_listing("Carriers and receiving facility", rows, width)


def _party(role: str, party: Party) -> Row:
    texts = (party.name, party.address, party.phone, party.identification)
    cells: Row = [[words(text)] for text in texts]
    return [[words(role, SMALL)], *cells]


def _party_listing(title: str, rows: Sequence[Row], width: float) -> Flowable:
    columns = ("Role", "Name", "Address", "Telephone", "Identification number")
    return listing(title, columns, rows, _shares(width, 18, 25, 25, 15, 17))


def _lines(lines: Sequence[SheetLine], start: int, width: float, *, first_page: bool) -> Flowable:
    items = ("9b", "10", "11", "12", "13") if first_page else ("27b", "28", "29", "30", "31")
    names = ("Description, and the containers", "Containers", "Quantity", "Unit", "Waste codes")
    columns = ["Line", *(f"{name} (item {item})" for name, item in zip(names, items, strict=True))]
    rows = [_line(number, line) for number, line in enumerate(lines, start)]
    title = f"Waste lines {start} to {start + len(lines) - 1}" if rows else "No waste lines"
    return listing(title, columns, rows, _shares(width, 5, 41, 16, 12, 11, 15))


def _line(number: int, line: SheetLine) -> Row:
    containers = f"Containers: {', '.join(line.containers)}" if line.containers else "Containers: not named"
    return [
        [words(str(number))],
        [words(line.description), words(containers, SMALL)],
        [
            words(f"{line.number} \N{MULTIPLICATION SIGN} {line.container_code}"),
            words(line.container_word, SMALL),
        ],
        [words(str(line.quantity))],
        [words(line.unit_code), words(line.unit_word, SMALL)],
        [words(", ".join(line.waste_codes))],
    ]


def _handling(sheet: ManifestSheet, width: float) -> Flowable:
    annexes = (
        f"A, laboratory summary, rows: {len(sheet.laboratory) or 'none'}",
        f"B, origin of the water, rows: {len(sheet.origins) or 'none'}",
    )
    cells = [
        field("Special handling and further information (item 14)", sheet.special_handling),
        field("Annexes", *annexes),
    ]
    return grid([cells], _shares(width, 68, 32))


def _cautions(sheet: ManifestSheet) -> list[Flowable]:
    texts = (*sheet.cautions, *CAUTIONS)
    bullets: list[Flowable] = [words(f"\N{BULLET} {text}", SMALL) for text in texts]
    return [KeepTogether([words("Cautions", STRONG), *bullets, Spacer(0, 5)])]


def _first_signers(carriers: Sequence[Party]) -> list[str]:
    named = [f"Carrier {n} (item 17)" for n, _ in enumerate(carriers or ("",), 1)]
    return ["Generator or offeror (item 15)", *named, "Receiving facility (item 20)"]


def _signatures(roles: Sequence[str], width: float) -> list[Flowable]:
    columns = ("Role", "Printed name", "Signature", "Date")
    rows: list[Row] = [[[words(role, SMALL), Spacer(0, 11)], [], [], []] for role in roles]
    note = (
        "Left blank here. Certifications, international shipments (item 16), discrepancies (item 18) and "
        "management method codes (item 19) are completed on the official form by those who answer for them."
    )
    table = listing(
        "Signatures, by hand when the containers change hands",
        columns,
        rows,
        _shares(width, 24, 27, 33, 16),
        note=note,
        ruled=True,
    )
    return [CondPageBreak(44 + 24 * len(roles)), table]


def _continuation(sheet: ManifestSheet, width: float, number: int) -> list[Flowable]:
    start = FIRST_PAGE_LINES + SHEET_LINES * number
    first_carrier = _FIRST_PAGE_CARRIERS + _SHEET_CARRIERS * number
    lines = sheet.lines[start : start + SHEET_LINES]
    carriers = list(enumerate(sheet.carriers, 1))[first_carrier : first_carrier + _SHEET_CARRIERS]
    cells = [
        field("Generator (item 24)", sheet.generator.operator),
        field("Identification number (item 21)", sheet.generator.identification),
        field("Official tracking number (item 23)", sheet.tracking_number or _COPY),
    ]
    flow: list[Flowable] = [words(f"Continuation {number + 1}", STRONG), Spacer(0, 3)]
    flow.append(grid([cells], _shares(width, 42, 25, 33)))
    if lines:
        flow.append(_lines(lines, start + 1, width, first_page=False))
    return flow + _more_carriers(carriers, width)


def _more_carriers(carriers: Sequence[tuple[int, Party]], width: float) -> list[Flowable]:
    if not carriers:
        return []
    rows = [_party(f"Carrier {n} (item {26 - n % 2})", party) for n, party in carriers]
    signers = [f"Carrier {n} (item {34 - n % 2})" for n, _ in carriers]
    return [_party_listing("Further carriers", rows, width), *_signatures(signers, width)]


def _annexes(sheet: ManifestSheet, width: float) -> list[Flowable]:
    flow: list[Flowable] = []
    if sheet.laboratory:
        flow.append(_laboratory(sheet.laboratory, width))
    if sheet.origins:
        flow += [CondPageBreak(110), _origins(sheet.origins, width)]
    return [PageBreak(), *flow] if flow else []


def _laboratory(rows: Sequence[LaboratoryRow], width: float) -> Flowable:
    columns = (
        "Container",
        "Sample",
        "Analyte and fraction",
        "Result as reported, laboratory",
        "Limit, authority and document",
        "Verdict",
        "Notes",
    )
    note = (
        "Verdict words: within; near (within, but above the site's own action level); over; "
        "undetermined (cannot be shown either way)."
    )
    cells = [_reading(row) for row in rows]
    widths = _shares(width, 10, 13, 12, 21, 22, 12, 10)
    return listing("Annex A. Laboratory summary", columns, cells, widths, note=note)


def _reading(row: LaboratoryRow) -> Row:
    notes: list[Flowable] = [words(note, SMALL) for note in row.notes] or [words("", SMALL)]
    return [
        [words(row.container, SMALL)],
        [words(row.sample, SMALL), words(row.drawn, NOTE)],
        [words(row.analyte, SMALL), words(row.fraction, NOTE)],
        [words(row.result, SMALL), words(row.analysed, NOTE)],
        [words(row.limit, SMALL), words(row.source, NOTE)],
        [words(row.verdict, STRONG)],
        notes,
    ]


def _origins(rows: Sequence[OriginRow], width: float) -> Flowable:
    columns = ("Container", "Wash", "Date", "Engine serial number", "Kind of wash", "Cleaner type", "Volume")
    cells = [_origin(row) for row in rows]
    title = "Annex B. Where the water in each container came from"
    return listing(title, columns, cells, _shares(width, 14, 12, 12, 16, 19, 17, 10))


def _origin(row: OriginRow) -> Row:
    texts = (row.container, row.wash, row.washed_on, row.engine, row.kind, row.cleaner, row.volume)
    return [[words(text, SMALL)] for text in texts]


def _shares(width: float, *percent: int) -> list[float]:
    return [width * share / 100 for share in percent]
