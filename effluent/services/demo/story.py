"""The story of the demo in a page, with the commands to try next."""

from __future__ import annotations

import shlex
from datetime import timedelta
from pathlib import Path
from textwrap import fill

from effluent.domain import Outcome
from effluent.services.demo.play import Facts
from effluent.services.demo.scenario import page
from effluent.settings import CAUTION

__all__ = ["LEDGER", "tell"]

_WIDTH = 116

LEDGER = "demo.ledger"
"""Name of the ledger in the folder of the demo."""


def tell(facts: Facts, folder: Path, *, program: str = "effluent") -> str:
    """Return the story as text.

    Parameters
    ----------
    facts : Facts
        What happened.
    folder : Path
        Where everything is going to be, as the user named it.
    program : str
        How the command is called.
    """
    laboratory, paper = folder / "laboratory", folder / "paper"
    return page("story").format(
        **_told(facts),
        caution=fill(CAUTION, _WIDTH),
        program=program,
        folder=folder,
        ledger_name=folder / LEDGER,
        ledger=_quoted(folder / LEDGER),
        laboratory_name=laboratory,
        workbook=_quoted(laboratory / facts.files[-1]),
        layout=_quoted(laboratory / "sandgate.toml"),
        issued=_quoted(paper / f"{facts.draft}-issued.pdf"),
        papers="\n".join(f"  {paper / name}" for name in facts.papers),
    )


def _told(facts: Facts) -> dict[str, object]:
    return {
        "washes": facts.washes,
        "first_day": facts.first_day,
        "last_day": facts.last_day,
        "last_month": facts.last_day - timedelta(days=30),
        "file_count": len(facts.files),
        "verdicts": ", ".join(f"{facts.outcomes[outcome]} {outcome}" for outcome in Outcome),
        "rain_wash": facts.rain_wash,
        "misread_wash": facts.misread_wash,
        "misread_entry": facts.misread_entry,
        "refused_file": facts.refused_file,
        "refusal": "\n".join(_wrapped(line.strip()) for line in facts.refusal.splitlines()[1:]),
        "near_drum": facts.near.source,
        "near_sample": facts.near.code,
        "over_drum": facts.over.source,
        "over_sample": facts.over.code,
        "held_tote": facts.undetermined.source,
        "held_sample": facts.undetermined.code,
        "late_limit": facts.late_limit,
        "returned": facts.returned,
        "draft": facts.draft,
        "waiting_tank": facts.waiting_tank,
        "number": facts.number,
        "entries": facts.entries,
        "digest": facts.digest,
        "witness": f"{facts.witness[0]}:{facts.witness[1][:16]}",
    }


def _wrapped(text: str) -> str:
    return fill(text, _WIDTH, initial_indent=" " * 15, subsequent_indent=" " * 17)


def _quoted(path: Path) -> str:
    return shlex.quote(str(path))
