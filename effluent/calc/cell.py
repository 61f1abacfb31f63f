"""One laboratory value cell: what a text such as ``<0.005`` or ``0.0123 J`` says.

A cell that could mean two numbers is refused; the remedy names the ways out.
"""

from __future__ import annotations

import re
from decimal import Decimal
from typing import NamedTuple

from effluent.domain import Qualifier
from effluent.errors import ValueRefused

__all__ = ["Cell", "read_cell"]

_LONGEST = 60
_LARGEST_EXPONENT = 30
_PLAIN = re.compile(r"(<?) ?((?:0|[1-9][0-9]{0,14})(?:\.[0-9]{1,15})?)")
_EXPONENT = r"(?:[eE][+-]?[0-9]{1,2})?"
# By decimal_comma. A group of thousands never begins with zero: 0,005 is a decimal comma.
_NUMBERS = {
    False: re.compile(
        rf"[+-]?(?:[1-9][0-9]{{0,2}}(?:,[0-9]{{3}})+(?:\.[0-9]*)?|[0-9]+\.?[0-9]*|\.[0-9]+){_EXPONENT}"
    ),
    True: re.compile(
        rf"[+-]?(?:[1-9][0-9]{{0,2}}(?:\.[0-9]{{3}})+(?:,[0-9]*)?|[0-9]+,?[0-9]*|,[0-9]+){_EXPONENT}"
    ),
}
_TWO_WAYS = {
    False: re.compile(r"[+-]?[1-9][0-9]{0,2},[0-9]{3}"),
    True: re.compile(r"[+-]?[1-9][0-9]{0,2}\.[0-9]{3}"),
}
_SPACED = re.compile(r"(?<![0-9.,])[1-9][0-9]{0,2}(?:[\u00a0\u2009\u202f][0-9]{3})+(?![0-9])")
_ONE_FORM = str.maketrans("＜﹤＞﹥−\u00a0\u2009\u202f\t", "<<>>-    ")

_NOT_DETECTED = r"(?i:ND|N\.D\.?|not detected|BDL)"
_NO_NUMBER = re.compile(rf"{_NOT_DETECTED}|(?i:non-?detect|< ?RL|UJ?)")
_FORM = re.compile(
    rf"(?P<sign>[<>]?) ?(?:(?P<nd>{_NOT_DETECTED}) ?[@(<]? ?)?"
    r"(?P<number>[+-]?[0-9.,]+(?:[eE][+-]?[0-9]+)?)(?P<gap> ?)(?P<flag>.*)"
)
# Letters in pairs only where they cannot spell a unit (NTU, SU, PH, MG, C and F are no flags).
_FLAG = re.compile(r"(?:[UJBHEDNQ]{1,3}|[AIMPSTVWXYZ]|u|j|uj|J[+-]|[*^#])[*^#]{0,2}")
_REMEDY = "write a number as in 0.11, <0.005, 0.005 U, >200 or 1.2E-3, or ND with a reporting limit"
# The first that is found in the cell; a K or L flag means opposite things to different laboratories.
_REMEDIES = (
    (re.compile(r"^$"), "the cell is empty; leave the row out, or write ND and give the reporting limit"),
    (
        re.compile(r"(?i)trace"),
        "a trace is no number; ask the laboratory for its value or limit",
    ),
    (
        re.compile(r"(?i)pending|see note|tbd|n/a"),
        "there is no result yet; leave the row out until there is one",
    ),
    (re.compile(r"≤|<=|≥|>="), "write < or > as the laboratory defines it; 'or equal' can turn a verdict"),
    (re.compile(r"±|\+/-"), "the uncertainty belongs in its own column"),
    (re.compile(r"[0-9][ED]$"), "complete the power of ten as in 1.2E-3, or set the flag apart as in 1.2 E"),
    (re.compile(r"[0-9] ?R\b"), "the result was rejected; leave it out and ask the laboratory for a new one"),
    (re.compile(r"[0-9] ?[KL]\b"), "this flag has opposite meanings; write < or > instead, or drop the flag"),
    (re.compile(r"[0-9] ?(?:%|°|[A-Za-zµμ]+/|[A-Za-zµμ]{2,}|[CF]\b)"), "the unit belongs in the unit column"),
    (re.compile(r"[0-9] ?(?:-|–|to) ?[0-9]"), "a range is no reading; ask the laboratory for the values"),
    (re.compile(r","), "write a decimal point, or declare that the file uses a decimal comma"),
)


class Cell(NamedTuple):
    """How a value stands to the truth, its number as a plain decimal text, and the laboratory's flag.

    The number has no sign but a minus, no power of ten and no grouping, so that ``float(number + "e-3")``
    is correctly rounded. Below a bound, the number is the bound.
    """

    qualifier: Qualifier
    number: str
    flag: str


def read_cell(text: str, *, decimal_comma: bool, reporting_limit: str = "", negative: bool = False) -> Cell:
    """Return what one value cell says.

    Parameters
    ----------
    text : str
        The cell as written, number in the unit of its row.
    decimal_comma : bool
        Whether the laboratory writes 0,005 for five thousandths.
    reporting_limit : str
        Stands in where the cell says only "not detected"; same unit, same decimal mark.
    negative : bool
        Whether the reading may be below zero, as a temperature may.

    Returns
    -------
    Cell
        Qualifier, number, flag.

    Raises
    ------
    ValueRefused
        If the cell is empty, is no number, or could mean two; the remedy is in the text.

    Notes
    -----
    U marks "not detected at this value", J "estimated": common practice of laboratories, no source. An
    estimated value counts as equal. ≤ and ≥ are refused, since a limit may be broken by being reached.

    Examples
    --------
    >>> read_cell("< 0,005", decimal_comma=True)
    Cell(qualifier=<Qualifier.BELOW: '<'>, number='0.005', flag='')
    """
    plain = None if decimal_comma else _PLAIN.fullmatch(text)
    if plain and (not plain[1] or plain[2].strip("0.")):
        return Cell(Qualifier.BELOW if plain[1] else Qualifier.EQUAL, plain[2], "")
    written = _one_form(text)
    if _NO_NUMBER.fullmatch(written):
        number = _reporting_number(written, reporting_limit, decimal_comma=decimal_comma)
        return Cell(Qualifier.BELOW, number, "" if written.startswith("<") else written)
    match = _FORM.fullmatch(written)
    if match is None or (not match["gap"] and match["flag"][:1] in {"E", "D"}):
        raise _refused(written)
    flag, absent = _flag(match, written)
    number = _number(match["number"], written, decimal_comma=decimal_comma)
    qualifier = _qualifier(match["sign"], written, absent=absent)
    _check_sign(number, qualifier, written, negative=negative)
    return Cell(qualifier, number, flag)


def _one_form(text: str) -> str:
    """Return the text trimmed, one form of each sign, thousands joined where a fixed space parts them."""
    if len(text) > _LONGEST:
        raise ValueRefused("value", text[:_LONGEST] + "…", "it is too long for a value; " + _REMEDY)
    joined = _SPACED.sub(lambda match: re.sub(r"[^0-9]", "", match[0]), text)
    return " ".join(joined.translate(_ONE_FORM).split())


def _refused(written: str) -> ValueRefused:
    remedy = next((remedy for found, remedy in _REMEDIES if found.search(written)), _REMEDY)
    return ValueRefused("value", written, remedy)


def _reporting_number(written: str, reporting_limit: str, *, decimal_comma: bool) -> str:
    """Return the bound of a cell that has no number of its own."""
    limit = _one_form(reporting_limit).removeprefix("<").strip()
    if not limit:
        raise ValueRefused("value", written, "give the reporting limit; alone it shows nothing")
    number = _number(limit, limit, decimal_comma=decimal_comma)
    if Decimal(number) <= 0:
        raise ValueRefused("reporting limit", reporting_limit, "a reporting limit is above zero")
    return number


def _flag(match: re.Match[str], written: str) -> tuple[str, bool]:
    """Return the flag as written and whether it says "not detected"."""
    rest = match["flag"].strip(" ()[]")
    tokens = [token for token in re.split(r"[,; ]+", rest) if token]
    absent = bool(match["nd"])
    for token in tokens:
        if re.fullmatch(_NOT_DETECTED, token):
            absent = True
        elif not _FLAG.fullmatch(token):
            raise _refused(written)
        absent = absent or "U" in token.upper()
    return " ".join(filter(None, (match["nd"], rest))), absent


def _qualifier(sign: str, written: str, *, absent: bool) -> Qualifier:
    if sign == ">" and absent:
        raise ValueRefused("value", written, "it says above and not detected at once; ask the laboratory")
    return Qualifier.BELOW if absent else Qualifier(sign or "=")


def _number(text: str, written: str, *, decimal_comma: bool) -> str:
    """Return a plain decimal text, digits kept."""
    if _TWO_WAYS[decimal_comma].fullmatch(text):
        raise ValueRefused("value", written, _two_ways(text, "," if decimal_comma else "."))
    if not _NUMBERS[decimal_comma].fullmatch(text):
        if decimal_comma:
            raise ValueRefused(
                "value", written, "a decimal comma was declared; write one comma, no decimal point"
            )
        raise _refused(written)
    group, mark = (".", ",") if decimal_comma else (",", ".")
    number = Decimal(text.replace(group, "").replace(mark, "."))
    if abs(number.adjusted()) > _LARGEST_EXPONENT:
        raise ValueRefused("value", written, "its power of ten is beyond any measured value")
    return f"{number:f}"


def _two_ways(text: str, mark: str) -> str:
    whole, part = re.split(r"[.,]", text)
    return (
        f"it can mean {whole}{part} or {whole}.{part}; write {whole}{part} without grouping, "
        f"or {whole}{mark}{part} with the decimal mark that was declared"
    )


def _check_sign(number: str, qualifier: Qualifier, written: str, *, negative: bool) -> None:
    """Refuse what no measurement gives: an amount below zero, or a bound of zero."""
    value = Decimal(number)
    if value < 0 and not negative:
        raise ValueRefused("value", written, "an amount is never below zero; ask the laboratory")
    if value == 0 and qualifier is not Qualifier.EQUAL and not negative:
        raise ValueRefused("value", written, "a bound of zero says nothing; give the reporting limit")
