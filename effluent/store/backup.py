"""Copies of a ledger file, made while it is in use; a file appears whole at its place or not at all."""

from __future__ import annotations

import errno
import os
import secrets
import sqlite3
from collections.abc import Callable, Iterator
from contextlib import closing, contextmanager
from pathlib import Path
from urllib.parse import quote

from effluent.errors import StorageFailed, ValueRefused, WouldOverwrite
from effluent.store.database import is_server, refuse_taken, shown, translated

__all__ = ["appearing", "copy_ledger"]

_CANNOT_LINK = {errno.EPERM, errno.ENOTSUP, errno.EOPNOTSUPP, errno.ENOSYS, errno.EMLINK}


def copy_ledger(
    source: str, target: str, *, check: Callable[[str], object] | None = None, journal: str = "WAL"
) -> None:
    """Copy a ledger file with SQLite's online backup.

    Parameters
    ----------
    source, target : str
        Where the ledger is, and where the copy is to appear.
    check : callable
        Gets the place of the finished copy before it appears; what it raises keeps the copy away.
    journal : str
        SQLite's journal mode of the copy: a ledger to work in uses WAL, while one to lay aside uses
        DELETE, so that it can be read from a medium that nobody can write to.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
        If the target exists, its folder does not, or it cannot be written.
    ValueRefused
        If either is a database server, which has tools of its own for this.
    """
    _refuse_servers(source, target)
    with appearing(target) as unfinished:
        with translated(target):
            _copy(source, unfinished, journal)
        if check:
            check(str(unfinished))


@contextmanager
def appearing(target: str) -> Iterator[Path]:
    """Give the path of an unfinished file; it gets the target's name when the block ends well.

    Raises
    ------
    WouldOverwrite, FileMissing, StorageFailed
        If the target exists, its folder does not, or it cannot be written.
    """
    path = Path(target)
    refuse_taken(path)
    unfinished = path.with_name(f".{path.name[:40]}.{secrets.token_hex(4)}.unfinished")
    try:
        yield unfinished
        with unfinished.open("rb+") as written:
            os.fsync(written.fileno())
        _name(unfinished, path)
    except FileExistsError as error:
        raise WouldOverwrite(path) from error
    except OSError as error:
        raise StorageFailed(path, error.strerror or str(error)) from error
    finally:
        for ending in ("", "-wal", "-shm", "-journal"):
            leftover = Path(f"{unfinished}{ending}")
            if leftover.exists():  # a folder that cannot be written refuses even to remove nothing
                leftover.unlink()


def _name(unfinished: Path, path: Path) -> None:
    """Give a finished file its name, which must be free; some file systems know no links."""
    try:
        os.link(unfinished, path)
    except OSError as error:
        if error.errno not in _CANNOT_LINK:
            raise
        path.touch(exist_ok=False)
        unfinished.replace(path)
    if os.name == "posix":
        _keep_name(path.absolute().parent)


def _keep_name(folder: Path) -> None:
    """Have the new name survive a power cut."""
    opened = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(opened)
    finally:
        os.close(opened)


def _copy(source: str, target: Path, journal: str) -> None:
    address = f"file:{quote(os.path.abspath(source))}?mode=rw"
    with closing(sqlite3.connect(address, uri=True)) as old, closing(sqlite3.connect(target)) as new:
        old.backup(new)
        new.execute(f"PRAGMA journal_mode = {journal}")


def _refuse_servers(*places: str) -> None:
    for place in places:
        if is_server(place):
            raise ValueRefused(
                "ledger", shown(place), "back a database server up with the server's own tools"
            )
