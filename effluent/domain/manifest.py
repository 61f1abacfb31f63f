"""The working document with which a contractor moves containers."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from enum import StrEnum

from effluent.domain.field import about
from effluent.domain.quantity import Quantity

__all__ = ["Manifest", "ManifestLine", "ManifestState"]


class ManifestState(StrEnum):
    """How far the paper has come."""

    DRAFT = "draft"
    ISSUED = "issued"
    RETURNED = "returned"
    VOID = "void"


@dataclass(frozen=True, kw_only=True)
class ManifestLine:
    """One container on a manifest; equal descriptions print as one line."""

    container: str = about("container", refers="container")
    description: str = about("description as the place's rules require")
    quantity: Quantity = about("whole number and unit, as in '190 L'")
    waste_codes: str = about("waste codes, separated by spaces", default="")


@dataclass(frozen=True, kw_only=True)
class Manifest:
    """A disposal manifest from draft to signed copy."""

    code: str = about("manifest number of this ledger, never an official one", default="")
    site: str = about("site the containers leave", refers="site")
    state: ManifestState = about("how far it has come", default=ManifestState.DRAFT)
    carriers: tuple[str, ...] = about("carrier, once for each in order", refers="company", default=())
    facility: str = about("receiving facility", refers="company")
    emergency_contact: str = about("who answers in an emergency; left out, the site's", default="")
    emergency_phone: str = about("telephone that answers day and night; left out, the site's", default="")
    tracking_number: str = about("number pre-printed on the official form, if one is used", default="")
    special_handling: str = about("special handling and further information", default="")
    lines: tuple[ManifestLine, ...] = about("containers and descriptions", default=())
    issued_on: date | None = about("day it was issued", default=None)
    accepted_on: date | None = about("day the first carrier accepted the load", default=None)
    returned_on: date | None = about("day the signed copy came back", default=None)
    signed_by: str = about("name on the signed copy", default="")
    signed_copy: str = about("SHA-256 of the scanned signed copy", default="")
