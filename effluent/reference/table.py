"""The shipped data files, and where each of their rows comes from."""

from __future__ import annotations

import csv
import difflib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import date
from enum import StrEnum
from importlib import resources

__all__ = ["Mark", "Source", "near_names", "read"]


class Mark(StrEnum):
    """How sure the figure is."""

    VERIFIED = "verified"
    SECONDARY = "secondary"
    MEMORY = "memory"


@dataclass(frozen=True)
class Source:
    """Where a row was read: citation, edition, the day it was read, and how sure it is.

    ``verified`` was read in the text of the rule itself, ``secondary`` in a text that restates it,
    ``memory`` in neither.
    """

    citation: str
    edition: str
    read_on: date
    mark: Mark

    @classmethod
    def of(cls, row: Mapping[str, str]) -> Source:
        """Read the four source columns of a row."""
        read_on = date.fromisoformat(row["read_on"])
        return cls(row["source"], row["edition"], read_on, Mark(row["mark"]))


def read(name: str) -> tuple[dict[str, str], ...]:
    """Return the rows of a shipped data file, as text by column.

    Parameters
    ----------
    name : str
        File name without its ending, as in ``limits``.
    """
    file = resources.files("effluent.reference").joinpath(f"{name}.csv")
    return tuple(csv.DictReader(file.read_text(encoding="utf-8").splitlines()))


def near_names(written: str, known: Iterable[str]) -> str:
    """Return up to four known names that look like the written one, or an empty text."""
    return ", ".join(difflib.get_close_matches(written[:80], list(known), n=4, cutoff=0.6))
