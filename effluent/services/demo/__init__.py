"""The demo: two invented stations, two years of washes, made by the real services."""

from __future__ import annotations

import secrets
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from random import Random

from effluent.domain import Person
from effluent.errors import FileMissing, StorageFailed, WouldOverwrite
from effluent.services.demo.play import Facts, perform
from effluent.services.demo.scenario import mapping
from effluent.services.demo.stage import Clock, Stage
from effluent.services.demo.story import LEDGER, tell
from effluent.services.ledger import create, open_ledger

__all__ = ["Demo", "make"]

_FIRST = Person(code="AM", name="Ana Moreira", role="line maintenance supervisor, Cabo Velho (invented)")


@dataclass(frozen=True)
class Demo:
    """What was made: where, the noted facts, and the story in a page."""

    folder: Path
    facts: Facts
    story: str


def make(folder: str, *, seed: int = 1, program: str = "effluent") -> Demo:
    """Make the demo in a new or empty folder; it appears whole or not at all.

    Parameters
    ----------
    folder : str
        Where it appears.
    seed : int
        Another seed, other volumes and findings.
    program : str
        How the story is to call the command.

    Raises
    ------
    WouldOverwrite
        If the folder holds something, or is none.
    FileMissing, StorageFailed
        If its parent is not there, or it cannot be written.

    Notes
    -----
    The same seed gives the same ledger digest and the same papers, with the same versions installed.
    """
    target = Path(folder)
    with _appearing(target) as unfinished:
        facts = _play(unfinished, seed)
        story = tell(facts, target, program=program)
        (unfinished / "story.txt").write_text(story, encoding="utf-8")
    return Demo(target, facts, story)


def _play(folder: Path, seed: int) -> Facts:
    laboratory = folder / "laboratory"
    for part in (laboratory, folder / "paper"):
        part.mkdir()
    for name in ("ribeira", "sandgate"):
        (laboratory / f"{name}.toml").write_bytes(mapping(name))
    clock, place = Clock(), str(folder / LEDGER)
    create(place, _FIRST, number=f"demo-{seed}", clock=clock)
    # A connection that stays open keeps SQLite from tidying up after each of some 400 entries.
    with open_ledger(place, clock=clock) as book, book.connection():
        return perform(Stage(book, clock, Random(seed)), folder)


@contextmanager
def _appearing(target: Path) -> Iterator[Path]:
    """Give an unfinished folder beside the wanted one; it gets its name when the block ends well."""
    parent = target.absolute().parent
    _check_free(target, parent)
    unfinished = parent / f".{target.absolute().name}.{secrets.token_hex(4)}.unfinished"
    try:
        unfinished.mkdir()
        yield unfinished
        if target.is_dir():
            target.rmdir()
        unfinished.rename(target)
    except OSError as error:
        raise StorageFailed(target, error.strerror or str(error)) from error
    finally:
        shutil.rmtree(unfinished, ignore_errors=True)


def _check_free(target: Path, parent: Path) -> None:
    try:
        if target.is_dir() and not any(target.iterdir()):
            return
        if target.exists() or target.is_symlink():
            raise WouldOverwrite(target)
        if not parent.is_dir():
            raise FileMissing(parent, "make the folder first")
    except OSError as error:
        raise StorageFailed(target, error.strerror or str(error)) from error
