"""Records with their times as the clocks of their site show them."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import fields, replace
from datetime import datetime
from typing import Any

from effluent.services.moment import at_site
from effluent.store.reading import Reading

__all__ = ["localised"]

_WAYS = (
    ("site", "site"),
    ("container", "container"),
    ("wash", "wash"),
    ("point", "point"),
    ("source", "container"),
    ("target", "container"),
)
"""By which fields, and over which nouns, a record leads to its site."""


def localised(reading: Reading, values: Sequence[Any]) -> tuple[Any, ...]:
    """Return records with the same instants, told in the time zone of their site."""
    if not any(_moments(value) for value in values):
        return tuple(values)
    places = dict(zip(map(id, values), _sites(reading, values), strict=True))
    return tuple(_told(value, places[id(value)]) for value in values)


def _moments(value: Any) -> dict[str, datetime]:
    named = {field.name: getattr(value, field.name) for field in fields(value)}
    return {name: held for name, held in named.items() if isinstance(held, datetime)}


def _told(value: Any, site: Any) -> Any:
    if site is None:
        return value
    return replace(value, **{name: at_site(held, site) for name, held in _moments(value).items()})


def _sites(reading: Reading, values: Sequence[Any]) -> Iterator[Any]:
    steps = [_step(value) for value in values]
    while any(step and step[0] != "site" for step in steps):
        known = _records(reading, steps)
        steps = [step if step is None or step[0] == "site" else _step(known[step]) for step in steps]
    known = _records(reading, steps)
    yield from (known.get(step) if step else None for step in steps)


def _step(value: Any) -> tuple[str, str] | None:
    """Return the noun and code of the next record on the way to the site."""
    ways = ((noun, getattr(value, name, None)) for name, noun in _WAYS)
    return next(((noun, code) for noun, code in ways if code), None)


def _records(reading: Reading, steps: Iterable[tuple[str, str] | None]) -> dict[Any, Any]:
    """Return the records named, as they stand or last stood; a few queries serve many records."""
    wanted = dict.fromkeys(step for step in steps if step)
    found: dict[Any, Any] = {}
    for noun in {noun for noun, _ in wanted}:
        codes = [code for kind, code in wanted if kind == noun]
        found |= {(noun, value.code): value for value in reading.values(noun, key=codes)}
    voided = {step: reading.versions(*step)[-1].value for step in wanted if step not in found}
    return found | voided
