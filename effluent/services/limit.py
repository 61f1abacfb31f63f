"""Discharge limits: entered with their source, verified by a second person, adopted, amended, retired."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field, replace
from datetime import date
from typing import Any

from effluent.calc.rule import in_force
from effluent.calc.units import KINDS, canonical, kind_of
from effluent.domain import Bound, Limit, Quantity, Statistic
from effluent.errors import StateRefused, UnitMismatch, ValueRefused
from effluent.reference.analyte import find
from effluent.reference.limit import ReferenceLimit, row, rows
from effluent.services.moment import local_day
from effluent.services.question import answer
from effluent.services.register import Shown, need_reason
from effluent.services.register import show as show_record
from effluent.store.ledger import Ledger
from effluent.store.reading import Reading
from effluent.store.writing import Writing

__all__ = ["Adoption", "adopt", "amend", "enter", "listing", "reference", "retire", "show", "verify"]

_BY_MASS = {Statistic.MASS_DAY, Statistic.MASS_MONTH}
_KEPT = ("entered_by", "verified_by", "verified_on", "reference", "code")


@dataclass(frozen=True, kw_only=True)
class Adoption:
    """A row of a shipped table taken over for one discharge point.

    ``acknowledge`` says how it was checked that the row applies at that place; ``changes`` are fields of
    the limit that differ from the row, as where its authority or document are named otherwise.
    """

    key: str
    point: str
    effective_from: date
    acknowledge: str
    changes: Mapping[str, object] = field(default_factory=dict)


def enter(ledger: Ledger, limit: Limit, *, by: str, reason: str = "", accept: str = "") -> str:
    """Record a limit, not yet verified, and return its number.

    Parameters
    ----------
    limit : Limit
        Its analyte by any name; ``entered_by`` and the verification are set here.
    by, reason : str
        Who enters it, and why.
    accept : str
        Why a limit beside an equal one is right all the same.

    Raises
    ------
    ValueRefused, UnitUnknown, UnitMismatch
        If the limit contradicts itself, or its unit does not fit the analyte.
    Questioned
        If one equal in all but its value is in force at the same time.
    """
    entered = _checked(replace(limit, entered_by=by, verified_by=None, verified_on=None))

    def job(writing: Writing) -> str:
        answer(writing, _beside(writing, entered), accept=accept)
        return writing.record(entered)

    return ledger.write(job, by=by, action="enter limit", reason=reason)


def adopt(ledger: Ledger, adoption: Adoption, *, by: str, accept: str = "") -> str:
    """Record a limit taken over from a shipped table, not yet verified, and return its number.

    Raises
    ------
    RecordMissing
        If there is no such row or point.
    ValueRefused
        If nothing is acknowledged, or it is not known who governs the point.
    """
    if not adoption.acknowledge.strip():
        remedy = "say how you checked that this row applies at this place; a published table is not a permit"
        raise ValueRefused("acknowledgement", adoption.acknowledge, remedy)
    published = row(adoption.key)

    def job(writing: Writing) -> str:
        authority = writing.value("point", adoption.point).authority
        entered = _checked(_taken_over(published, adoption, authority, by))
        answer(writing, _beside(writing, entered), accept=accept)
        return writing.record(entered)

    reason = f"acknowledged: {adoption.acknowledge.strip()}"
    return ledger.write(job, by=by, action=f"adopt limit {adoption.key}", reason=reason)


def amend(
    ledger: Ledger, code: str, changes: Mapping[str, object], *, by: str, reason: str, accept: str = ""
) -> str:
    """Correct a limit; it is then entered by whoever corrects it, and must be verified again.

    Raises
    ------
    ValueRefused
        If nothing changes, no reason is given, or the limit would contradict itself.
    """
    need_reason(reason, "amend")
    for name in _KEPT:
        if name in changes:
            raise ValueRefused("field", name, "it is kept by the ledger and never typed")

    def change(writing: Writing, old: Limit) -> Limit:
        new = _checked(replace(old, **changes))  # type: ignore[arg-type]
        if new == old:
            raise ValueRefused("limit", code, "nothing would change; name what to change")
        answer(writing, _beside(writing, new), accept=accept)
        return replace(new, entered_by=by, verified_by=None, verified_on=None)

    return _change(ledger, code, change, by=by, action=f"amend limit {code}", reason=reason)


def verify(ledger: Ledger, code: str, *, by: str, reason: str = "") -> str:
    """Record that a second person compared a limit with its source.

    Raises
    ------
    StateRefused
        If it is verified already, or by whoever entered it.
    """

    def change(writing: Writing, old: Limit) -> Limit:
        if old.verified_by is not None:
            state = f"verified by {old.verified_by} on {old.verified_on}"
            raise StateRefused(f"limit {code}", state, "nothing is left to verify")
        if old.entered_by == by:
            remedy = "another person has to compare it with its source"
            raise StateRefused(f"limit {code}", f"entered by {by}", remedy)
        site = writing.value("site", writing.value("point", old.point).site)
        return replace(old, verified_by=by, verified_on=local_day(ledger.clock(), site))

    return _change(ledger, code, change, by=by, action=f"verify limit {code}", reason=reason)


def retire(ledger: Ledger, code: str, last_day: date, *, by: str, reason: str) -> str:
    """Record the last day on which a limit is in force.

    Raises
    ------
    ValueRefused
        If no reason is given, or the day lies before the first.
    StateRefused
        If the limit ends sooner already.
    """
    need_reason(reason, "retire")

    def change(_writing: Writing, old: Limit) -> Limit:
        if old.effective_to is not None and old.effective_to <= last_day:
            state = f"in force to {old.effective_to} only"
            raise StateRefused(f"limit {code}", state, "nothing is left to retire; amend it to extend it")
        return _checked(replace(old, effective_to=last_day))

    return _change(ledger, code, change, by=by, action=f"retire limit {code}", reason=reason)


def listing(
    ledger: Ledger,
    *,
    point: str | None = None,
    analyte: str = "",
    on: date | None = None,
    as_of: str | None = None,
) -> tuple[Limit, ...]:
    """Return limits in the order entered: all, those of a point, of an analyte, or in force on a day.

    Raises
    ------
    RecordMissing, ValueRefused
        If the point is not in the ledger, or the analyte not in the table.
    """
    key = find(analyte).analyte.key if analyte else ""
    with ledger.reading(as_of) as reading:
        where = {} if point is None else {"point": reading.value("point", point).code}
        found: tuple[Limit, ...] = reading.values("limit", **where)
    return tuple(
        limit for limit in found if key in ("", limit.analyte) and (on is None or in_force(limit, on))
    )


def show(ledger: Ledger, code: str, *, as_of: str | None = None) -> Shown:
    """Return a limit with all its versions."""
    return show_record(ledger, "limit", code, as_of=as_of)


def reference(table: str | None = None, *, analyte: str = "") -> tuple[ReferenceLimit, ...]:
    """Return the rows of the shipped published tables; none of them is in force by being here.

    Raises
    ------
    RecordMissing, ValueRefused
        If there is no such table or analyte.
    """
    key = find(analyte).analyte.key if analyte else ""
    return tuple(published for published in rows(table) if key in ("", published.analyte))


def _change(
    ledger: Ledger,
    code: str,
    change: Callable[[Writing, Limit], Limit],
    *,
    by: str,
    action: str,
    reason: str,
) -> str:
    def job(writing: Writing) -> str:
        return writing.amend(change(writing, writing.value("limit", code)))

    return ledger.write(job, by=by, action=action, reason=reason)


def _taken_over(published: ReferenceLimit, adoption: Adoption, authority: str, by: str) -> Limit:
    fields: dict[str, Any] = {
        "analyte": published.analyte,
        "fraction": published.fraction,
        "statistic": published.statistic,
        "bound": published.bound,
        "value": published.value,
        "broken_by": published.broken_by,
        "authority": authority,
        "document": f"{published.source.citation}, {published.source.edition}",
        **adoption.changes,
    }
    if not fields["authority"]:
        remedy = "name who applies this limit at that point"
        raise ValueRefused("authority", "", remedy)
    return Limit(
        **fields,
        point=adoption.point,
        effective_from=adoption.effective_from,
        reference=published.key,
        entered_by=by,
    )


def _checked(limit: Limit) -> Limit:
    """Return the limit with its analyte as the table spells it, or refuse what contradicts itself."""
    named = find(limit.analyte)
    if named.fraction not in (None, limit.fraction):
        remedy = f"its name says {named.fraction}, the limit {limit.fraction}; make both agree"
        raise ValueRefused("analyte", limit.analyte, remedy)
    checked = replace(limit, analyte=named.analyte.key)
    _check_unit(checked.value, checked, named.analyte.kind)
    if checked.action_level is not None:
        _check_unit(checked.action_level, checked, named.analyte.kind)
        _check_action_level(checked, checked.action_level)
    if limit.effective_to is not None and limit.effective_to < limit.effective_from:
        remedy = f"it lies before the first day in force, {limit.effective_from}"
        raise ValueRefused("last day in force", str(limit.effective_to), remedy)
    return checked


def _check_unit(value: Quantity, limit: Limit, kind: str) -> None:
    """Refuse a unit in which the analyte, or the statistic, is not expressed."""
    allowed = {kind, "mass ratio"} if kind == "concentration" else {kind}
    if limit.statistic in _BY_MASS:
        allowed = {"load"}
    unit = value.unit or (KINDS["pH"] if kind == "pH" else "")
    if not unit:
        example = " or ".join(KINDS[each] for each in sorted(allowed))
        raise ValueRefused("limit", str(value), f"write its unit, as in {example}")
    if (found := kind_of(unit)) not in allowed:
        example = " or ".join(KINDS[each] for each in sorted(allowed))
        remedy = f"a {found} is no limit for {limit.analyte}, {limit.statistic}; use a unit like {example}"
        raise UnitMismatch(unit, example, remedy)
    if value.spread:
        raise ValueRefused("limit", str(value), "a limit has no uncertainty; write the number and its unit")
    if canonical(value, "pH" if found == "pH" else "limit") < 0 and found != "temperature":
        raise ValueRefused("limit", str(value), "it cannot be negative")


def _check_action_level(limit: Limit, level: Quantity) -> None:
    unit = "pH" if not level.unit else kind_of(level.unit)
    at, edge = canonical(level, unit), canonical(limit.value, unit)
    beyond = at > edge if limit.bound is Bound.MAXIMUM else at < edge
    if beyond:
        remedy = f"it lies beyond the limit {limit.value}; the level warns before the limit is reached"
        raise ValueRefused("action level", str(level), remedy)


def _beside(reading: Reading, limit: Limit) -> list[str]:
    """Ask about limits equal in all but their value that are in force at the same time."""
    return [
        f"{other.code} says {other.value} for the same ({', '.join(_what(limit))}) at {limit.point}, "
        f"in force from {other.effective_from}: are both to hold?"
        for other in reading.values("limit", point=limit.point)
        if other.code != limit.code and _what(other) == _what(limit) and _overlap(other, limit)
    ]


def _what(limit: Limit) -> tuple[str, ...]:
    return (limit.analyte, limit.fraction, limit.statistic, limit.bound)


def _overlap(one: Limit, other: Limit) -> bool:
    return (one.effective_to or date.max) >= other.effective_from and (
        other.effective_to or date.max
    ) >= one.effective_from
