"""Standing records: adding, changing, voiding, showing and listing them."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any, NamedTuple
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

from effluent.calc.mixture import read_ratio
from effluent.calc.units import canonical
from effluent.domain import Cleaner, CleanerForm, Container, Quantity, Site
from effluent.errors import ValueRefused
from effluent.store.column import plain_fields
from effluent.store.ledger import Ledger
from effluent.store.noun import noun_of
from effluent.store.reading import Version
from effluent.store.writing import Writing

__all__ = ["Shown", "add", "amend", "check", "check_quantities", "listing", "need_reason", "show", "void"]


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
    then: Callable[[Writing], None] | None = None,
) -> str:
    """Record a new version of something; the old one stays readable. `then` looks at what it leads to.

    Raises
    ------
    ValueRefused
        If nothing changes or no reason is given.
    """
    need_reason(reason, "amend")

    def job(writing: Writing) -> str:
        old = writing.value(noun, code)
        new = replace(old, **changes)
        if new == old:
            raise ValueRefused(noun, code, "nothing would change; name what to change")
        check(new)
        writing.amend(new)
        if then is not None:
            then(writing)
        return code

    return ledger.write(job, by=by, action=f"amend {noun}", reason=reason)


def void(ledger: Ledger, noun: str, code: str, *, by: str, reason: str) -> None:
    """Record that something does not stand; it stays readable."""
    need_reason(reason, "void")
    ledger.write(lambda writing: writing.void(noun, code), by=by, action=f"void {noun}", reason=reason)


def show(ledger: Ledger, noun: str, code: str, *, as_of: str | None = None) -> Shown:
    """Return a record with all its versions, voided or not."""
    with ledger.reading(as_of) as reading:
        versions = reading.versions(noun, code)
    return Shown(versions[-1].value, versions, versions[-1].voided)


def listing(ledger: Ledger, noun: str, *, as_of: str | None = None) -> tuple[Any, ...]:
    """Return the records of a noun that stand."""
    with ledger.reading(as_of) as reading:
        return reading.values(noun)


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
    if isinstance(value, Container) and not 0 < value.fill_fraction.magnitude <= 100:
        raise ValueRefused("fill fraction", str(value.fill_fraction), "use a share above 0 % and up to 100 %")


def check_quantities(value: Any) -> None:
    """Refuse quantities of the wrong kind, and volumes, masses and densities below zero."""
    for field in plain_fields(type(value)):
        quantity, measures = getattr(value, field.name), field.metadata.get("measures")
        if isinstance(quantity, Quantity) and measures:
            amount = canonical(quantity, measures)
            if amount < 0 and measures not in ("temperature", "limit"):
                raise ValueRefused(field.name.replace("_", " "), str(quantity), "it cannot be negative")


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
