"""The load of a manifest: parties and lines completed from the records, and what is doubtful in them."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import replace
from fractions import Fraction
from math import floor

from effluent.calc.number import decimal_text
from effluent.calc.units import KINDS, canonical, convert, kind_of
from effluent.domain import CompanyRole, Container, Manifest, ManifestLine, Quantity, Site
from effluent.errors import StateRefused, ValueRefused
from effluent.reference.code import container_code, unit_code
from effluent.services.container import contents_of
from effluent.services.shipment import drafts_with, shipped_containers
from effluent.store.reading import Reading

__all__ = ["MOST_CODES", "doubts", "litres", "prepared", "proposed"]

MOST_CODES = 6
_TOO_MUCH = 10**7  # of any unit; no vehicle carries it
# 40 CFR 262.21(f)(2): nine digits and the three letters of the registered printer.
_TRACKING_NUMBER = re.compile(r"[0-9]{9}[A-Z]{3}")
_UNITED_STATES = {"us", "usa", "united states", "united states of america"}
# Wash water weighs about as much as water; common practice, no source.
_AS_WATER = Quantity("1", "kg/L")


def proposed(unit: str = "L") -> Quantity:
    """Return the quantity that asks for a proposal in a unit: what the container holds, on record."""
    return Quantity("", unit)


def prepared(reading: Reading, manifest: Manifest) -> Manifest:
    """Return the manifest with what was not said taken from the records.

    Raises
    ------
    RecordMissing, StateRefused, ValueRefused, UnitUnknown
        If it contradicts the records or the form.
    """
    site: Site = reading.value("site", manifest.site)
    _check_parties(reading, manifest)
    _check_tracking_number(manifest.tracking_number, site)
    _check_once("container", [line.container for line in manifest.lines])
    shipped = shipped_containers(reading)
    for line in manifest.lines:
        if line.container in shipped:
            raise StateRefused(
                f"container {line.container}", "shipped", "it stands on another manifest; void that one first"
            )
    return replace(
        manifest,
        emergency_contact=manifest.emergency_contact or site.emergency_contact,
        emergency_phone=manifest.emergency_phone or site.emergency_phone,
        lines=tuple(_prepared_line(reading, line, site) for line in manifest.lines),
    )


def doubts(reading: Reading, manifest: Manifest) -> tuple[str, ...]:
    """Return what is implausible in the lines of a prepared manifest, one sentence each."""
    elsewhere = drafts_with(reading, [line.container for line in manifest.lines], other_than=manifest.code)
    standing = [
        f"container {container} also stands on draft {', '.join(codes)}"
        for container, codes in elsewhere.items()
    ]
    return (*standing, *(doubt for line in manifest.lines for doubt in _doubts(reading, line)))


def _check_parties(reading: Reading, manifest: Manifest) -> None:
    _check_once("carrier", manifest.carriers)
    for code in manifest.carriers:
        _check_role(reading, code, CompanyRole.CARRIER)
    _check_role(reading, manifest.facility, CompanyRole.FACILITY)


def _check_role(reading: Reading, code: str, wanted: CompanyRole) -> None:
    role = reading.value("company", code).role
    if role is not wanted:
        raise ValueRefused(wanted.value, code, f"company {code} is on record as a {role.value}")


def _check_once(noun: str, codes: Sequence[str]) -> None:
    for code in codes:
        if codes.count(code) > 1:
            raise ValueRefused(noun, code, "name it once")


def _check_tracking_number(number: str, site: Site) -> None:
    if not number or site.shipping_paper_country.strip().casefold() not in _UNITED_STATES:
        return
    if not _TRACKING_NUMBER.fullmatch(number):
        remedy = "copy nine digits and three capital letters from the official form, or leave it out"
        raise ValueRefused("official tracking number", number, remedy)


def _prepared_line(reading: Reading, line: ManifestLine, site: Site) -> ManifestLine:
    container: Container = reading.value("container", line.container)
    if container.site != site.code:
        remedy = f"it stands at {container.site}, the manifest is for {site.code}"
        raise ValueRefused("container", container.code, remedy)
    _check_material(container)
    if not line.description.strip():
        raise ValueRefused("description", line.description, "describe the waste as the place's rules require")
    return replace(
        line,
        description=" ".join(line.description.split()),
        waste_codes=_waste_codes(line.waste_codes),
        quantity=_quantity(reading, line),
    )


def _check_material(container: Container) -> None:
    try:
        container_code(container.kind, container.material)
    except ValueRefused as refused:
        change = f"effluent container amend {container.code} --material … --reason …"
        what, material = f"material of {container.kind} {container.code}", container.material
        raise ValueRefused(
            what, material, f"steel, plastic, fibre or wood is needed; say it with: {change}"
        ) from refused


def _waste_codes(written: str) -> str:
    codes = list(dict.fromkeys(written.replace(",", " ").split()))
    if len(codes) > MOST_CODES:
        raise ValueRefused("waste codes", written, f"a line takes up to {MOST_CODES}; keep the most telling")
    return " ".join(codes)


def _quantity(reading: Reading, line: ManifestLine) -> Quantity:
    unit_code(line.quantity.unit)
    kind_of(line.quantity.unit)
    if not line.quantity.text:
        return _proposal(reading, line)
    amount = line.quantity.magnitude
    if amount.denominator != 1 or not 0 < amount < _TOO_MUCH or line.quantity.spread:
        remedy = "the form takes whole units above zero, as in '190 L'; round to the nearest one"
        raise ValueRefused(f"quantity of container {line.container}", str(line.quantity), remedy)
    return Quantity(str(amount.numerator), line.quantity.unit)


def _proposal(reading: Reading, line: ManifestLine) -> Quantity:
    unit = line.quantity.unit
    what = f"quantity of container {line.container}"
    if kind_of(unit) == "mass":
        raise ValueRefused(what, unit, "the ledger knows its volume only; weigh it and give the quantity")
    level = contents_of(reading, line.container).level_l
    whole = _nearest_whole(convert(level, "L", unit))
    if not whole:
        remedy = f"it holds {litres(level)} on record; record what went in, or give the quantity"
        raise ValueRefused(what, f"{whole} {unit}", remedy)
    return Quantity(str(whole), unit)


def _nearest_whole(amount: Fraction) -> int:
    return floor(amount + Fraction(1, 2))


def _doubts(reading: Reading, line: ManifestLine) -> Iterator[str]:
    contents = contents_of(reading, line.container)
    unit = line.quantity.unit
    amount = line.quantity.magnitude
    held = convert(contents.level_l, "L", unit, density=_AS_WATER)
    said = f"container {line.container}: {line.quantity}"
    if abs(amount - held) > max(held / 10, Fraction(1, 2)):
        as_water = ", taken at 1 kg/L" if kind_of(unit) == "mass" else ""
        yield f"{said} is more than 10 % off the {litres(contents.level_l)} on record{as_water}"
    nominal = convert(
        canonical(contents.container.capacity, "volume"), KINDS["volume"], unit, density=_AS_WATER
    )
    if _nearest_whole(nominal) == amount != _nearest_whole(held):
        yield f"{said} is its nominal capacity, which is no estimate of what it holds"


def litres(volume: Fraction) -> str:
    """Return a volume as a paper says it: litres with one decimal, rounded half to even."""
    return f"{decimal_text(round(volume, 1))} L"
