"""Standing records: adding, changing, voiding, showing and listing them."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from fractions import Fraction
from typing import Any, NamedTuple
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from effluent.calc.mixture import read_ratio
from effluent.calc.units import canonical, kind_of
from effluent.domain import Cleaner, CleanerForm, Container, Quantity, Site
from effluent.errors import StateRefused, UnitMismatch, UnitUnknown, ValueRefused
from effluent.services.locality import localised
from effluent.store.column import plain_fields
from effluent.store.ledger import Ledger
from effluent.store.noun import noun_of
from effluent.store.reading import Reading, Version
from effluent.store.writing import Writing

__all__ = [
    "Shown",
    "add",
    "amend",
    "change",
    "check",
    "check_quantities",
    "listing",
    "need_reason",
    "show",
    "void",
]


_ABSOLUTE_ZERO = Fraction("-273.15")  # degC
_LARGEST = 10**12


class Shown(NamedTuple):
    """A record as it stands, and how it came to be so."""

    value: Any
    versions: tuple[Version, ...]
    voided: bool


def add(ledger: Ledger, value: Any, *, by: str, reason: str = "") -> str:
    """Record something new and return its code."""
    check(value)
    action = f"add {noun_of(value).name}"
    return ledger.write(lambda writing: writing.record(value), by=by, action=action, reason=reason)


def amend(
    ledger: Ledger,
    noun: str,
    code: str,
    changes: Mapping[str, object],
    *,
    by: str,
    reason: str,
) -> str:
    """Record a new version of something; the old one stays readable.

    Raises
    ------
    ValueRefused
        If nothing changes or no reason is given.
    """
    need_reason(reason, "amend")

    def job(writing: Writing) -> str:
        return change(writing, noun, code, changes)

    return ledger.write(job, by=by, action=f"amend {noun}", reason=reason)


def change(writing: Writing, noun: str, code: str, changes: Mapping[str, object]) -> str:
    """Add a new version of something to an entry in the making.

    Raises
    ------
    ValueRefused
        If nothing changes.
    """
    old = writing.value(noun, code)
    new = replace(old, **changes)
    if new == old:
        raise ValueRefused(noun, code, "nothing would change; name what to change")
    check(new)
    return writing.amend(new)


def void(ledger: Ledger, noun: str, code: str, *, by: str, reason: str) -> None:
    """Record that something does not stand; it stays readable.

    Raises
    ------
    StateRefused
        If something refers to it, or a person has recorded anything.
    """
    need_reason(reason, "void")

    def job(writing: Writing) -> None:
        if noun == "person":
            _check_silent(writing, code)
        writing.void(noun, code)

    ledger.write(job, by=by, action=f"void {noun}", reason=reason)


def show(ledger: Ledger, noun: str, code: str, *, as_of: str | None = None) -> Shown:
    """Return a record with all its versions, voided or not; times are those of its site."""
    with ledger.reading(as_of) as reading:
        versions = reading.versions(noun, code)
        values = localised(reading, [version.value for version in versions])
    told = tuple(version._replace(value=value) for version, value in zip(versions, values, strict=True))
    return Shown(told[-1].value, told, told[-1].voided)


def listing(ledger: Ledger, noun: str, *, as_of: str | None = None) -> tuple[Any, ...]:
    """Return the records of a noun that stand; times are those of their sites."""
    with ledger.reading(as_of) as reading:
        return localised(reading, reading.values(noun))


def check(value: Any) -> None:
    """Refuse a value that contradicts itself.

    Raises
    ------
    ValueRefused, UnitUnknown, UnitMismatch
    """
    check_quantities(value)
    if isinstance(value, Site):
        _check_zone(value.time_zone)
    if isinstance(value, Cleaner):
        _check_ratio(value)
    if isinstance(value, Container):
        _check_capacity(value)


def check_quantities(value: Any) -> None:
    """Refuse quantities of the wrong kind or size, and volumes, masses and densities below zero."""
    for field in plain_fields(type(value)):
        quantity, measures = getattr(value, field.name), field.metadata.get("measures")
        if isinstance(quantity, Quantity) and measures:
            name = field.name.replace("_", " ")
            amount = _amount(name, quantity, measures)
            _check_size(name, quantity, amount)
            if amount < 0 and measures not in ("temperature", "limit"):
                raise ValueRefused(name, str(quantity), "it cannot be negative")
            if measures == "temperature" and amount < _ABSOLUTE_ZERO:
                raise ValueRefused(name, str(quantity), "it lies below absolute zero; check the unit")


def _amount(name: str, quantity: Quantity, measures: str) -> Fraction:
    """Return the amount in the canonical unit; what is wrong with the unit names the field."""
    try:
        if measures == "volume" and kind_of(quantity.unit) == "mass":
            remedy = (
                f"make a volume of it: effluent convert {quantity.text} {quantity.unit} L --density '1 kg/L'"
            )
            raise UnitMismatch(quantity.unit, "L", remedy)
        return canonical(quantity, measures)
    except (UnitUnknown, UnitMismatch) as error:
        raise type(error)(*error.args[:-1], f"{error.args[-1]} (in {name} {str(quantity)!r})") from error


def _check_size(name: str, quantity: Quantity, amount: Fraction) -> None:
    """Refuse what nobody can have measured, so that no arithmetic has to cope with it."""
    if max(abs(amount), quantity.spread_magnitude) > _LARGEST:
        raise ValueRefused(name, str(quantity), "nothing here is that large; check the number and the unit")


def _check_capacity(container: Container) -> None:
    if not canonical(container.capacity, "volume"):
        raise ValueRefused("capacity", str(container.capacity), "a container holds more than nothing")
    if not 0 < container.fill_fraction.magnitude <= 100:
        remedy = "use a share above 0 % and up to 100 %"
        raise ValueRefused("fill fraction", str(container.fill_fraction), remedy)


def _check_silent(reading: Reading, person: str) -> None:
    recorded = sum(entry.recorded_by == person for entry in reading.entries())
    if recorded:
        state = f"named by {recorded} {'entry' if recorded == 1 else 'entries'}"
        raise StateRefused(
            f"person {person}", state, "the record keeps who recorded it; amend the name or role"
        )


def _check_ratio(cleaner: Cleaner) -> None:
    if bool(cleaner.mix_ratio) != (cleaner.form is CleanerForm.CONCENTRATE):
        remedy = "a concentrate has a mix ratio as in 1:4, a ready-to-use cleaner has none"
        raise ValueRefused("mix ratio", cleaner.mix_ratio, remedy)
    if cleaner.mix_ratio:
        read_ratio(cleaner.mix_ratio)


def _check_zone(name: str) -> None:
    try:
        ZoneInfo(name)
    except (ZoneInfoNotFoundError, ValueError, OSError) as error:
        raise ValueRefused(
            "time zone", name, "use an IANA name, as in Europe/Lisbon or America/Chicago"
        ) from error


def need_reason(reason: str, verb: str) -> None:
    """Refuse a correction without a reason.

    Raises
    ------
    ValueRefused
    """
    if not reason.strip():
        raise ValueRefused("reason", reason, f"say why, as in: {verb} … --reason 'misread the gauge'")
