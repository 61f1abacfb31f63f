"""The command that converts a value to another unit."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from effluent.cli import show
from effluent.cli.value import short

if TYPE_CHECKING:
    from effluent.calc.units import Conversion

__all__ = ["convert"]


# A negative value is no option.
@click.command(context_settings={"ignore_unknown_options": True})
@click.argument("written", metavar="VALUE", type=short)
@click.argument("unit", type=short)
@click.argument("wanted", metavar="UNIT", type=short)
@click.option(
    "--density",
    metavar="QUANTITY",
    type=short,
    help="Joins mass and volume (ppm by mass), as in '0.998 kg/L'.",
)
@click.option("--json", "as_json", is_flag=True, help="Answer as JSON.")
def convert(*, written: str, unit: str, wanted: str, density: str | None, as_json: bool) -> None:
    """Convert a value to another unit, exactly.

    VALUE is a decimal number, as in 1.2e-3; the first UNIT is its own, the second the one wanted.
    """
    from effluent.services import conversion

    answer = conversion.convert(written, unit, wanted, density)
    if as_json:
        show.document(_as_document(f"{written} {unit}", wanted, answer))
    else:
        show.screen(_as_text(f"{written} {unit}", wanted, answer))


def _as_text(given: str, wanted: str, answer: Conversion) -> str:
    pairs = [
        ("given", given),
        ("answer", f"{show.with_decimals(answer.value)} {wanted}"),
        ("factor", show.with_decimals(answer.factor)),
        ("offset", show.with_decimals(answer.offset) if answer.offset else None),
        ("density", answer.density),
        ("working", answer.working),
    ]
    return show.card(pairs)


def _as_document(given: str, wanted: str, answer: Conversion) -> dict[str, object]:
    return {
        "given": given,
        "answer": answer.value,
        "unit": wanted,
        "factor": answer.factor,
        "offset": answer.offset,
        "density": answer.density,
        "working": answer.working,
    }
