"""The command that counts what exceeds over six months."""

from __future__ import annotations

import re
from datetime import date
from fractions import Fraction
from typing import TYPE_CHECKING, Any

import click

from effluent.calc.noncompliance import Criteria, Finding, Share, Windows
from effluent.cli import option, show
from effluent.cli.group import TABLE
from effluent.cli.value import day, line, short, word
from effluent.domain import BrokenBy, exact
from effluent.errors import ValueRefused
from effluent.reference.analyte import called

if TYPE_CHECKING:
    from effluent.services.noncompliance import Code, Judged, Noncompliance

__all__ = ["noncompliance"]

_HUNDRED = 100
_FEDERAL = Criteria()
_BREAKS = {BrokenBy.BEYOND: "beyond", BrokenBy.REACHING: "at or beyond"}
_SOURCE = "40 CFR 403.8(f)(2)(viii)(A) and (B)"
_HOW = (
    "Each result of a sample drawn at the point is one measurement (laboratory duplicates together one, by "
    "their worst), held exactly as reported against the strictest instantaneous or daily limit of its "
    "analyte and fraction in force on its day; below a minimum counts as beyond it."
)
_WHO = (
    f"Figures not marked as your own are those of {_SOURCE}, 2015 annual edition; it leaves pH out of (B), "
    "and temperature and minima are left out too, because a multiple of them means nothing. Codes differ by "
    "place: give the figures of yours. The authority decides what is significant noncompliance, also by (C) "
    "to (H) of that rule and by averages and masses, none of which is counted here."
)


def _share(written: str) -> int:
    """Return a percentage from 1 to 100, written as ``66%`` or ``66``."""
    match = re.fullmatch(r"([0-9]{1,3})\s*%?", short(written))
    if match is None or not 1 <= int(match[1]) <= _HUNDRED:
        problem = f"'{show.text(written)}' is no whole percentage from 1% to 100%; write it as in 66%"
        raise click.BadParameter(problem)
    return int(match[1])


def _factor(written: str) -> Fraction:
    """Return a factor of 1 or more, exactly."""
    try:
        number = exact(short(written))
    except ValueRefused as error:
        raise click.BadParameter(str(error)) from error
    if number < 1:
        raise click.BadParameter(f"'{show.text(written)}' is below 1; a review looks above the limit")
    return number


@click.command(
    "noncompliance",
    help=f"{TABLE['noncompliance'][1]}\n\nThe criteria are those of {_SOURCE} unless you give others. Every "
    f"window that ends in the period is listed. {_HOW}\n\nThe exit status is 0 when the criteria are not met "
    "in any window, and 1 when they are, when it cannot be told, or when there is nothing to count.",
)
@click.option("--point", type=line, required=True, metavar="POINT", help="The discharge point.")
@click.option("--since", type=day, required=True, metavar="DATE", help="First day of the period.")
@click.option("--until", type=day, required=True, metavar="DATE", help="Last day of the period.")
@click.option(
    "--windows",
    type=word(Windows),
    default="rolling quarters",
    show_default=True,
    metavar="KIND",
    help="Six months up to each end of a quarter, or fixed halves of the year.",
)
@click.option(
    "--chronic-share",
    type=_share,
    default="66%",
    show_default=True,
    metavar="SHARE",
    help="(A) is met at this share or more.",
)
@click.option(
    "--exceeding",
    type=word(BrokenBy),
    default="beyond",
    show_default=True,
    metavar="HOW",
    help="(A) counts what lies beyond the limit, or already what is reaching it.",
)
@click.option(
    "--review-share",
    type=_share,
    default="33%",
    show_default=True,
    metavar="SHARE",
    help="(B) is met at this share or more.",
)
@click.option(
    "--reviewing",
    type=word(BrokenBy),
    default="reaching",
    show_default=True,
    metavar="HOW",
    help="(B) counts what is reaching that line, or only what lies beyond.",
)
@click.option(
    "--factor", type=_factor, default="1.2", show_default=True, metavar="NUMBER", help="Factor of (B)."
)
@click.option(
    "--factor-oils",
    type=_factor,
    default="1.4",
    show_default=True,
    metavar="NUMBER",
    help="Factor of (B) for BOD, TSS, fats, oil and grease.",
)
@option.reads
def noncompliance(
    *, point: str, since: date, until: date, ledger: str, as_of: str | None, **given: Any
) -> int:
    """Count over six months."""
    from effluent.services import noncompliance as service
    from effluent.wiring import open_ledger

    as_json = given.pop("as_json")
    code = service.Code(**given)
    with open_ledger(ledger) as book:
        found = service.judge_point(book, point, (since, until), code, as_of=as_of)
    if as_json:
        show.document(_document(found, period=(since, until), as_of=as_of))
    else:
        show.screen(*_text(found, period=(since, until)))
    return int(not found.is_clear)


def _text(found: Noncompliance, *, period: tuple[date, date]) -> list[str]:
    nothing = "nothing to count: no result meets an instantaneous or daily limit in force"
    return [
        show.card([("point", f"{found.point.code}, {found.point.name}"), *_parameters(found.code, period)]),
        show.table(_HEADINGS, [_cells(one, found.today) for one in found.judged])
        if found.judged
        else nothing,
        _gaps(found),
        f"{_HOW} {_WHO}",
    ]


def _parameters(code: Code, period: tuple[date, date]) -> list[tuple[str, str]]:
    federal = _FEDERAL
    chronic = f"{code.chronic_share} % or more {_BREAKS[code.exceeding]} the limit"
    review = (
        f"{code.review_share} % or more {_BREAKS[code.reviewing]} the limit x {show.decimal(code.factor)} "
        f"({show.decimal(code.factor_oils)} for BOD, TSS, oil and grease; not for pH, temperature, minima)"
    )
    same_a = (code.chronic_share, code.exceeding) == (federal.chronic_percent, federal.chronic_broken_by)
    same_b = (code.review_share, code.reviewing, code.factor, code.factor_oils) == (
        federal.technical_percent, federal.technical_broken_by, federal.technical_factor, Fraction("1.4"),
    )  # fmt: skip
    return [
        ("windows", f"{code.windows} that end from {period[0]} to {period[1]}"),
        ("(A) chronic", chronic + ("" if same_a else _OWN)),
        ("(B) review", review + ("" if same_b else _OWN)),
    ]


_OWN = " [your own figures]"
_HEADINGS = (
    "window", "analyte", "fraction", "limits", "n", "exceeding", "share", "(A)", "at factor", "share", "(B)",
    "finding",
)  # fmt: skip


def _cells(one: Judged, today: date) -> list[object]:
    window = one.window
    over = "" if window.last < today else " (not over)"
    finding = window.finding
    return [
        f"{window.first} to {window.last}{over}", called(one.analyte), one.fraction, one.limits,
        window.chronic.count, *_shared(window.chronic), *_shared(window.technical),
        finding if finding == Finding.NOT_MET else finding.upper(),
    ]  # fmt: skip


def _shared(share: Share | None) -> list[object]:
    return ["", "", "left out"] if share is None else [_counted(share), _percent(share), share.finding]


def _counted(share: Share) -> str:
    """Return the count of hits; with the possible ones beside it where bounds leave it open."""
    return str(share.surely) if share.surely == share.possibly else f"{share.surely} to {share.possibly}"


def _percent(share: Share) -> str:
    bounds = dict.fromkeys((share.surely, share.possibly))
    return " to ".join(f"{_mixed(Fraction(hits * _HUNDRED, share.count))} %" for hits in bounds)


def _mixed(number: Fraction) -> str:
    """Return a number exactly, as in ``66 2/3``."""
    whole, part = divmod(number, 1)
    return " ".join(filter(None, [str(whole) if whole or not part else "", str(part) if part else ""]))


def _gaps(found: Noncompliance) -> str:
    lines = [
        *(
            f"no measurement: {called(one.analyte)}, {one.fraction}, from {one.first} to {one.last}; "
            f"in force: {', '.join(one.limits)}; whether one was due is another question"
            for one in found.unread
        ),
        *(
            f"not counted: {_results(count)} of {called(analyte)}, for whose fraction and unit no "
            "instantaneous or daily limit was in force"
            for analyte, count in found.without_limit.items()
        ),
        *(
            f"not judged here: {limit.code}, {called(limit.analyte)}, {limit.statistic}"
            for limit in found.not_judged
        ),
    ]
    return "\n".join(map(show.text, lines))


def _results(count: int) -> str:
    return "1 result" if count == 1 else f"{count} results"


def _document(found: Noncompliance, *, period: tuple[date, date], as_of: str | None) -> dict[str, object]:
    return {
        "as_of": as_of,
        "point": found.point.code,
        "since": period[0],
        "until": period[1],
        "source": _SOURCE,
        "code": found.code,
        "judged": [_judged_document(one, found.today) for one in found.judged],
        "unread": found.unread,
        "without_limit": found.without_limit,
        "not_judged": found.not_judged,
        "clear": found.is_clear,
    }


def _judged_document(one: Judged, today: date) -> dict[str, object]:
    window = one.window
    return {
        "first": window.first,
        "last": window.last,
        "over": window.last < today,
        "analyte": one.analyte,
        "fraction": one.fraction,
        "limits": one.limits,
        "chronic": _share_document(window.chronic),
        "factor": one.factor,
        "review": None if window.technical is None else _share_document(window.technical),
        "finding": window.finding,
    }


def _share_document(share: Share) -> dict[str, object]:
    return {
        "count": share.count,
        "surely": share.surely,
        "possibly": share.possibly,
        "percent_needed": share.percent,
        "finding": share.finding,
    }
