"""Copies of a ledger file, made while it is in use."""

from __future__ import annotations

import os
import sqlite3
from contextlib import closing
from pathlib import Path

from effluent.errors import FileMissing, StorageFailed, ValueRefused, WouldOverwrite
from effluent.store.database import is_server, shown, translated

__all__ = ["copy_ledger"]


def copy_ledger(source: str, target: str) -> None:
    """Copy a ledger file with SQLite's online backup; the copy appears whole or not at all.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
        If the target exists, its folder does not, or it cannot be written.
    ValueRefused
        If either is a database server, which has tools of its own for this.
    """
    _refuse_servers(source, target)
    path = Path(target)
    if path.exists():
        raise WouldOverwrite(path)
    if not path.parent.is_dir():
        raise FileMissing(path.parent, "make the folder first")
    unfinished = path.with_name(f".{path.name}.{os.getpid()}.unfinished")
    try:
        with translated(target):
            _copy(source, unfinished)
        os.link(unfinished, path)
    except FileExistsError as error:
        raise WouldOverwrite(path) from error
    except OSError as error:
        raise StorageFailed(path, error.strerror or str(error)) from error
    finally:
        unfinished.unlink(missing_ok=True)


def _copy(source: str, target: Path) -> None:
    with closing(sqlite3.connect(source)) as old, closing(sqlite3.connect(target)) as new:
        old.backup(new)
        new.execute("PRAGMA journal_mode = WAL")
    with target.open("rb+") as written:
        os.fsync(written.fileno())


def _refuse_servers(*places: str) -> None:
    for place in places:
        if is_server(place):
            raise ValueRefused(
                "ledger", shown(place), "back a database server up with the server's own tools"
            )
