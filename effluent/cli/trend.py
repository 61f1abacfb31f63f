"""The command that shows how an analyte changes over time."""

from __future__ import annotations

from math import isinf
from typing import TYPE_CHECKING, Any

import click

from effluent.cli import option, show
from effluent.cli.group import TABLE
from effluent.cli.value import day, line, word
from effluent.domain import Fraction

if TYPE_CHECKING:
    from effluent.calc.trend import Slope, Trend
    from effluent.services.trend import Told, Trended

__all__ = ["trend"]

_NOUNS = ("engine", "point", "container")
_DAYS_A_YEAR = 365.25
_SERIES = "Several readings of a day count as their mean."
_CHANCE = (
    "Of a hundred series without any trend about five are called rising or falling all the same, and a short "
    "or much censored series can hide one. A concentration also changes with the water used, the cleaner, "
    "the kind of wash and the laboratory; the test knows nothing of them."
)


@click.command(
    "trend",
    help=f"{TABLE['trend'][1]}\n\nANALYTE is a name, symbol or CAS number. An engine is spoken for by the "
    "samples of its washes, and of containers that held its water alone when they were drawn. " + _SERIES,
)
@click.argument("analyte", type=line)
@click.option("--engine", type=line, metavar="SERIAL", help="The water of this engine alone.")
@click.option("--point", type=line, metavar="POINT", help="Samples drawn at this discharge point.")
@click.option("--container", type=line, metavar="CONTAINER", help="Samples drawn from this container.")
@click.option(
    "--fraction",
    type=word(Fraction),
    metavar="FRACTION",
    help="Fraction; left out, that of the name, else total.",
)
@click.option("--since", type=day, metavar="DATE", help="Only samples drawn on this local day or later.")
@click.option("--until", type=day, metavar="DATE", help="Only samples drawn on this local day or before.")
@option.reads
def trend(*, ledger: str, as_of: str | None, as_json: bool, **given: Any) -> None:
    """Test a series for a trend."""
    named = [(noun, given.pop(noun)) for noun in _NOUNS]
    chosen = [(noun, code) for noun, code in named if code is not None]
    if len(chosen) != 1:
        raise click.UsageError("name one of --engine, --point and --container")
    from effluent.services import trend as service
    from effluent.wiring import open_ledger

    series = service.Series(noun=chosen[0][0], code=chosen[0][1], **given)
    with open_ledger(ledger) as book:
        trended = service.trend(book, series, as_of=as_of)
    if as_json:
        show.document(_document(trended, as_of=as_of))
    else:
        show.screen(*_text(trended))


def _text(trended: Trended) -> list[str]:
    left_out = [_cells(each) for each in trended.left_out]
    return [
        show.card([*_head(trended), *_tested(trended.test), *_sloped(trended.slope, trended.unit)]),
        show.table(_HEADINGS, [_cells(each) for each in trended.used]),
        show.table((*_HEADINGS[:-1], "left out because"), left_out) if left_out else "",
        show.text(trended.question),
        f"{_SERIES} {_CHANCE}",
    ]


def _head(trended: Trended) -> list[tuple[str, object]]:
    series = trended.series
    return [
        ("series", f"{trended.analyte.name}, {trended.fraction}, {series.noun} {series.code}"),
        ("direction", trended.direction),
    ]


def _tested(test: Trend) -> list[tuple[str, object]]:
    how = "normal approximation" if test.exact_p is None else "exact"
    return [
        ("n", f"{test.count} days, {test.nondetects} with a non-detect, {test.tied} values tied"),
        ("Mann-Kendall", f"S = {test.s}, Var = {test.variance:.6g}, Z = {test.z:.4g}"),
        ("p", f"{test.p:.4g}, two-sided, {how}; called a trend at 0.05 or less"),
    ]


def _sloped(slope: Slope, unit: str) -> list[tuple[str, object]]:
    middle = _yearly(slope.low)
    if slope.high != slope.low:
        middle = f"between {middle} and {_yearly(slope.high)}, as the non-detects may be"
    interval = f"{_yearly(slope.lower)} to {_yearly(slope.upper)}"
    if isinf(slope.lower):
        interval = "without bounds: so few days cannot reach that confidence"
    per_year = f"{unit} per year".strip()
    return [
        ("Sen slope", f"{middle}, {per_year} (365.25 days)"),
        (f"{slope.confidence:.0%} interval", interval),
    ]


def _yearly(slope: float) -> str:
    return f"{slope * _DAYS_A_YEAR:.4g}"


_HEADINGS = ("date", "sample", "drawn from", "value", "unit", "result", "remarks")


def _cells(told: Told) -> list[object]:
    one = told.result
    remarks = [one.flag, "analysed outside its holding time" if told.late else ""]
    said = told.left_out or ", ".join(filter(None, remarks))
    return [told.day, one.sample, told.origin, one.text, one.unit, one.row, said]


def _document(trended: Trended, *, as_of: str | None) -> dict[str, object]:
    slope = trended.slope
    return {
        "as_of": as_of,
        trended.series.noun: trended.series.code,
        "analyte": trended.analyte.key,
        "fraction": trended.fraction,
        "unit": trended.unit,
        "direction": trended.direction,
        "mann_kendall": {**show.plain(trended.test), "p": trended.test.p},
        "sen_slope_per_year": {
            **{name: _finite(getattr(slope, name)) for name in ("low", "high", "lower", "upper")},
            "confidence": slope.confidence,
        },
        "used": trended.used,
        "left_out": trended.left_out,
        "question": trended.question,
    }


def _finite(slope: float) -> float | None:
    return None if isinf(slope) else slope * _DAYS_A_YEAR
