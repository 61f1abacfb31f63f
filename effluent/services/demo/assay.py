"""The two invented laboratories of the demo: what they find, and the files they send."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from datetime import timedelta
from pathlib import Path

from effluent.intake.sheet import write_xlsx
from effluent.services.demo.scenario import Finding, findings
from effluent.services.demo.stage import Stage
from effluent.services.demo.station import Bottle

__all__ = ["Sending", "long_rows", "spoiled", "wide_rows", "write_long", "write_wide"]

Row = tuple[str, ...]

_LONG = (
    "Amostra",
    "Parâmetro",
    "Fração",
    "Valor",
    "Unidade",
    "LQ",
    "Método",
    "Analisado em",
    "Relatório",
    "Tipo",
)
_WIDE = ("Bottle", "Analyzed", "Report")
_METHODS = {"Oil and grease": "EPA 1664"}
_BLANK, _SAMPLE = "BRANCO", "AMOSTRA"


@dataclass(frozen=True)
class Sending:
    """Bottles sent to a laboratory for one report; `told` are the cells that the scenario prescribes."""

    report: str
    bottles: Sequence[Bottle]
    told: Mapping[tuple[str, str], str]

    def cell(self, stage: Stage, bottle: Bottle, finding: Finding) -> str:
        """Return what the laboratory writes for one analyte of one bottle."""
        chance = _found(stage, finding, bottle.kind)
        return self.told.get((bottle.code, finding.analyte), chance)


def long_rows(stage: Stage, sending: Sending) -> list[Row]:
    """Return the rows of laboratory Ribeira: one a result, decimal comma, and its blank."""
    analytes = findings("ribeira")
    rows = [
        _long_row(sending.report, bottle, finding, sending.cell(stage, bottle, finding))
        for bottle in sending.bottles
        for finding in analytes
    ]
    blank = ("BRANCO-1", *rows[0][1:3], f"<{analytes[0].limit:g}".replace(".", ","), *rows[0][4:-1], _BLANK)
    return [blank, *rows]


def wide_rows(stage: Stage, sending: Sending) -> list[Row]:
    """Return the rows of laboratory Sandgate: one a bottle, one column an analyte."""
    return [
        (
            bottle.code,
            f"{bottle.drawn_at + timedelta(days=4, hours=3):%Y-%m-%d %H:%M}",
            sending.report,
            *(sending.cell(stage, bottle, finding) for finding in findings("sandgate")),
        )
        for bottle in sending.bottles
    ]


def spoiled(rows: Sequence[Row]) -> list[Row]:
    """Return the rows with one bad cell of five kinds, as in a file that was typed over by hand."""
    bad = [list(row) for row in rows]
    sample, analyte, value, unit, analysed = (
        _LONG.index(name) for name in (*_LONG[:2], "Valor", "Unidade", "Analisado em")
    )
    bad[1][sample] = "S-9999"
    bad[2][analyte] = "Unobtainium"
    bad[3][value] = "cerca de 3"
    bad[4][unit] = "°C"
    bad[5][analysed] = "01.01.2020 10:00"
    return [tuple(row) for row in bad]


def write_long(path: Path, rows: Sequence[Row]) -> None:
    """Write a file of laboratory Ribeira: semicolons, decimal comma, Latin-1."""
    text = "".join(f"{';'.join(row)}\r\n" for row in (_LONG, *rows))
    path.write_bytes(text.encode("latin-1"))


def write_wide(path: Path, rows: Sequence[Row]) -> None:
    """Write a workbook of laboratory Sandgate."""
    write_xlsx(path, (*_WIDE, *(finding.analyte for finding in findings("sandgate"))), rows)


def _found(stage: Stage, finding: Finding, kind: str) -> str:
    value = round(stage.pick(finding.drum if kind == "drum" else finding.water), finding.places)
    if value < finding.limit:
        return f"<{finding.limit:g}"
    estimated = value < 2 * finding.limit and stage.chance.random() < 0.3
    return f"{value:.{finding.places}f}{' J' if estimated else ''}"


def _long_row(report: str, bottle: Bottle, finding: Finding, cell: str) -> Row:
    analysed_at = bottle.drawn_at + timedelta(days=3, hours=2)
    return (
        bottle.code,
        finding.analyte,
        "total",
        cell.replace(".", ","),
        finding.unit,
        f"{finding.limit:g}".replace(".", ","),
        _METHODS.get(finding.analyte, "ISO 17294-2"),
        f"{analysed_at:%d.%m.%Y %H:%M}",
        report,
        _SAMPLE,
    )
