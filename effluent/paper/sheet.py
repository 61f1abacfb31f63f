"""What a manifest paper says, already worded; nothing here reads a ledger or draws."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

__all__ = ["Generator", "LaboratoryRow", "ManifestSheet", "OriginRow", "Party", "SheetLine"]


@dataclass(frozen=True, kw_only=True)
class Generator:
    """Whose water it is, and who answers in an emergency."""

    operator: str
    site: str
    address: str
    phone: str = ""
    identification: str = ""
    emergency_contact: str = ""
    emergency_phone: str = ""


@dataclass(frozen=True, kw_only=True)
class Party:
    """A carrier or the receiving facility."""

    name: str
    address: str = ""
    phone: str = ""
    identification: str = ""


@dataclass(frozen=True, kw_only=True)
class SheetLine:
    """One waste line: `number` containers of one type, `quantity` whole units in all."""

    description: str
    number: int
    container_code: str
    container_word: str
    quantity: int
    unit_code: str
    unit_word: str
    waste_codes: tuple[str, ...] = ()
    containers: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class LaboratoryRow:
    """One reading against one limit.

    Attributes
    ----------
    result : str
        As reported, with its unit.
    drawn, analysed : str
        When the sample was drawn; who analysed it and when. Blank where nothing is recorded.
    """

    container: str
    sample: str
    analyte: str
    fraction: str
    result: str
    limit: str
    source: str
    verdict: str
    drawn: str = ""
    analysed: str = ""
    notes: tuple[str, ...] = ()


@dataclass(frozen=True, kw_only=True)
class OriginRow:
    """One wash whose water is in one container."""

    container: str
    wash: str
    washed_on: str
    engine: str
    kind: str
    cleaner: str
    volume: str


@dataclass(frozen=True, kw_only=True)
class ManifestSheet:
    """Everything one manifest paper says.

    Attributes
    ----------
    code : str
        Manifest number of the ledger, never an official one.
    state : str
        ``draft``, ``issued``, ``returned`` or ``void``.
    tracking_number : str
        As typed from the pre-printed official form; blank when none was typed.
    entry, digest : int, str
        The ledger's head when the paper was made.
    created_at : datetime
        Instant of the ledger entry behind the paper (aware, UTC), never the clock.
    state_note : str
        A sentence on the state, such as why the manifest was voided.
    language : str
        BCP 47 tag of the paper's text.
    """

    code: str
    state: str
    generator: Generator
    facility: Party
    ledger_id: str
    entry: int
    digest: str
    created_at: datetime
    carriers: tuple[Party, ...] = ()
    lines: tuple[SheetLine, ...] = ()
    laboratory: tuple[LaboratoryRow, ...] = ()
    origins: tuple[OriginRow, ...] = ()
    special_handling: str = ""
    cautions: tuple[str, ...] = ()
    issued_on: str = ""
    state_note: str = ""
    tracking_number: str = ""
    language: str = "en"
