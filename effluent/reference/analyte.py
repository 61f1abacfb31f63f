"""What is measured, found under the names that laboratories write."""

from __future__ import annotations

import functools
import itertools
import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass

from effluent.domain.sample import Fraction
from effluent.errors import RecordMissing, ValueRefused
from effluent.reference.table import near_names, read

__all__ = ["Analyte", "Named", "analytes", "by_key", "called", "cas_is_valid", "find"]

_CAS = re.compile(r"0*([1-9]\d{1,6})-(\d\d)-(\d)", re.ASCII)
_DASHES = str.maketrans(dict.fromkeys("‐‑‒–—−", "-"))
_CAS_WRITTEN = re.compile(
    r"(?:CAS\s*(?:NO|RN|NUMBER|#)?\s*[.:]?\s*)?(\d{2,10}-\d\d-\d|\d{5,10})", re.ASCII | re.IGNORECASE
)

# A single letter names a fraction only behind the analyte, as in Cd-T.
_LEADING: dict[tuple[str, ...], Fraction] = {
    ("total", "recoverable"): Fraction.TOTAL_RECOVERABLE,
    ("tot", "rec"): Fraction.TOTAL_RECOVERABLE,
    ("recoverable",): Fraction.TOTAL_RECOVERABLE,
    ("total",): Fraction.TOTAL,
    ("tot",): Fraction.TOTAL,
    ("unfiltered",): Fraction.TOTAL,
    ("dissolved",): Fraction.DISSOLVED,
    ("diss",): Fraction.DISSOLVED,
    ("soluble",): Fraction.DISSOLVED,
    ("field", "filtered"): Fraction.DISSOLVED,
    ("filtered",): Fraction.DISSOLVED,
    ("tclp", "extract"): Fraction.TCLP,
    ("tclp", "leachate"): Fraction.TCLP,
    ("tclp",): Fraction.TCLP,
}
_TRAILING = {
    **_LEADING,
    ("t",): Fraction.TOTAL,
    ("tr",): Fraction.TOTAL_RECOVERABLE,
    ("d",): Fraction.DISSOLVED,
}


@dataclass(frozen=True)
class Analyte:
    """Something a laboratory or a meter measures.

    ``kind`` is the kind of quantity its values have; ``cas`` is empty where the parameter is no
    single substance.
    """

    key: str
    name: str
    symbol: str
    cas: str
    kind: str
    group: str


@dataclass(frozen=True)
class Named:
    """An analyte, and the fraction its written name spoke of (``None`` when it named none)."""

    analyte: Analyte
    fraction: Fraction | None


@functools.cache
def analytes() -> tuple[Analyte, ...]:
    """Return every analyte of the shipped table, in its order."""
    columns = ("key", "name", "symbol", "cas", "kind", "group")
    return tuple(Analyte(*(row[column] for column in columns)) for row in read("analytes"))


def by_key(key: str) -> Analyte:
    """Return the analyte with exactly this key.

    Raises
    ------
    RecordMissing
        If the shipped table has no such key.
    """
    for analyte in analytes():
        if analyte.key == key:
            return analyte
    raise RecordMissing("analyte", key, _advice(key))


def called(key: str) -> str:
    """Return the name of an analyte as it stands within a sentence, or the key where the table has none.

    Examples
    --------
    >>> called("ph"), called("cadmium"), called("nitrate as n")
    ('pH', 'cadmium', 'nitrate (as N)')
    """
    name = _names_by_key().get(key, key)
    return name[0].lower() + name[1:] if name[1:2].islower() else name


@functools.cache
def _names_by_key() -> dict[str, str]:
    return {analyte.key: analyte.name for analyte in analytes()}


def cas_is_valid(text: str) -> bool:
    """Return whether a text is a CAS Registry Number whose check digit holds.

    The last digit is the sum of the others, each times its place counted from the right, modulo 10 [1]_.

    References
    ----------
    .. [1] CAS, "Check Digit Verification of CAS Registry Numbers"; from memory.

    Examples
    --------
    >>> cas_is_valid("7440-43-9"), cas_is_valid("7440-43-8")
    (True, False)
    """
    match = _CAS.fullmatch(text)
    return match is not None and int(match[3]) == _check_digit(match[1] + match[2])


@functools.cache
def find(text: str) -> Named:
    """Return the analyte, and the fraction if any, that a laboratory's name means.

    Case, spaces and punctuation do not matter; a symbol or a CAS number is a name too.

    Parameters
    ----------
    text : str
        As in ``Cd``, ``Cadmium, total``, ``7440-43-9``, ``Cr(VI)``, ``O&G`` or ``Lead (dissolved)``.

    Raises
    ------
    ValueRefused
        If nothing of that name is in the shipped table, if the name means more than one thing
        (nitrate as N or as NO3), if it names two fractions, or if a CAS check digit does not hold.

    Examples
    --------
    >>> find("Total Cadmium").fraction
    <Fraction.TOTAL: 'total'>
    >>> find("total suspended solids").fraction is None
    True
    """
    written = unicodedata.normalize("NFKC", text).translate(_DASHES).strip()
    number = _CAS_WRITTEN.fullmatch(written)
    if number is not None:
        return Named(_by_cas(number[1]), None)
    for name, fractions in _readings(tuple(re.findall(r"[^\W_]+", written.casefold()))):
        if name in _names():
            return Named(_only(text, _names()[name]), _one_fraction(text, fractions))
    raise ValueRefused("analyte", text, _advice(text))


def _check_digit(digits: str) -> int:
    return sum(place * int(digit) for place, digit in enumerate(reversed(digits), start=1)) % 10


def _compact(text: str) -> str:
    return "".join(re.findall(r"[^\W_]+", unicodedata.normalize("NFKC", text).casefold()))


@functools.cache
def _names() -> dict[str, tuple[Analyte, ...]]:
    """Every accepted name without spaces and punctuation; a few mean more than one analyte."""
    found: dict[str, tuple[Analyte, ...]] = {}
    for analyte, row in zip(analytes(), read("analytes"), strict=True):
        for name in (analyte.key, analyte.name, analyte.symbol, *row["synonyms"].split(";")):
            owners = found.get(_compact(name), ())
            if name and analyte not in owners:
                found[_compact(name)] = (*owners, analyte)
    return found


def _readings(words: tuple[str, ...]) -> Iterator[tuple[str, frozenset[Fraction]]]:
    """Yield the name as it stands, then with one fraction after the other taken off."""
    fractions: frozenset[Fraction] = frozenset()
    while words:
        yield "".join(words), fractions
        words, fraction = _without_fraction(words)
        if fraction is None:
            return
        fractions |= {fraction}


def _without_fraction(words: tuple[str, ...]) -> tuple[tuple[str, ...], Fraction | None]:
    """Take one fraction off the end, the front, or the middle ("Alkalinity, total, as CaCO3")."""
    for size in (2, 1):
        if words[-size:] in _TRAILING:
            return words[:-size], _TRAILING[words[-size:]]
    for size, place in itertools.product((2, 1), range(len(words))):
        part = words[place : place + size]
        if part in _LEADING:
            return words[:place] + words[place + size :], _LEADING[part]
    return words, None


def _one_fraction(text: str, fractions: frozenset[Fraction]) -> Fraction | None:
    """Give one fraction: in "total dissolved" the word total counts valences, not fractions."""
    narrow = fractions - {Fraction.TOTAL} or fractions
    if len(narrow) > 1:
        both = " and ".join(sorted(narrow))
        raise ValueRefused("analyte", text, f"it names two fractions, {both}; write one")
    return next(iter(narrow), None)


def _only(text: str, owners: tuple[Analyte, ...]) -> Analyte:
    if len(owners) > 1:
        choice = " or ".join(f"'{analyte.key}'" for analyte in owners)
        raise ValueRefused("analyte", text, f"it can mean more than one thing; write {choice}")
    return owners[0]


def _by_cas(written: str) -> Analyte:
    digits = written.replace("-", "").lstrip("0")
    number = f"{digits[:-3]}-{digits[-3:-1]}-{digits[-1:]}"
    if not cas_is_valid(number):
        raise ValueRefused("CAS number", written, f"the check digit does not hold{_meant(digits)}")
    owners = tuple(analyte for analyte in analytes() if analyte.cas == number)
    if not owners:
        raise ValueRefused("CAS number", written, "it is well formed, but not in the table; write a name")
    return _only(written, owners)


def _meant(digits: str) -> str:
    """Name the known numbers a single slip away, if they are few."""
    slips = [a for a in analytes() if _one_slip(digits, a.cas.replace("-", ""))]
    if not 1 <= len(slips) <= 3:
        return "; compare it with the laboratory's report"
    return "; was it " + " or ".join(f"{analyte.cas} ({analyte.key})" for analyte in slips) + "?"


def _one_slip(written: str, known: str) -> bool:
    """Whether one digit differs, or two neighbours changed places."""
    if len(written) != len(known):
        return False
    places = [place for place, (a, b) in enumerate(zip(written, known, strict=True)) if a != b]
    if len(places) == 2 and places[1] == places[0] + 1:
        first, second = places
        return written[first] == known[second] and written[second] == known[first]
    return len(places) == 1


@functools.lru_cache(maxsize=1024)
def _advice(text: str) -> str:
    known = {name: analyte.key for analyte in analytes() for name in (analyte.key, analyte.name.casefold())}
    near = near_names(text.strip().casefold(), known)
    return f"near names are {near}" if near else "write a name, a symbol or a CAS number of the shipped table"
