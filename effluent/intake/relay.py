"""A long laboratory file: a second process reads ahead while this one checks and writes.

The second process is a help and nothing more. Where it cannot start, or ends before the file does, this one
reads the rest itself, and so meets what is wrong itself if something is.
"""

from __future__ import annotations

import pickle
import subprocess
import sys
from collections.abc import Generator, Iterator
from itertools import islice
from typing import IO

from effluent.intake.result import ResultChunk, ResultReader

__all__ = ["chunks_ahead", "serve"]

_LONG = 5_000_000  # bytes; a shorter file is read before a second process has started
_AT_ONCE = 40  # enough to write meanwhile that the next ones are ready when they are wanted


def chunks_ahead(reader: ResultReader) -> Iterator[ResultChunk]:
    """Yield what `ResultReader.chunks` yields, read by a second process if the file is long.

    Raises
    ------
    ValueRefused
        As `ResultReader.chunks`.
    """
    received = 0
    if reader.table.path.stat().st_size >= _LONG and sys.executable:
        received, is_whole = yield from _relayed(reader)
        if is_whole:
            return
    yield from islice(reader.chunks(), received, None)


def serve(source: IO[bytes], target: IO[bytes]) -> None:
    """Read what a reader that comes in reads, and send it some chunks at a time; ``None`` ends it."""
    chunks = pickle.load(source).chunks()  # noqa: S301 - from the process that started this one
    while some := list(islice(chunks, _AT_ONCE)):
        _send(some, target)
    _send(None, target)


def _send(message: object, target: IO[bytes]) -> None:
    pickle.dump(message, target, pickle.HIGHEST_PROTOCOL)
    target.flush()


def _relayed(reader: ResultReader) -> Generator[ResultChunk, None, tuple[int, bool]]:
    """Yield chunks of the second process; return how many came, and whether it came to the end."""
    received = 0
    for chunks in _messages(reader):
        if chunks is None:
            return received, True
        yield from chunks
        received += len(chunks)
    return received, False


def _messages(reader: ResultReader) -> Iterator[list[ResultChunk] | None]:
    """Yield the messages of a second process for as long as it lives; it ends with this generator."""
    # -P: nothing in the user's folder is taken for one of our modules
    command = [sys.executable, "-P", "-m", __name__]
    nowhere, pipe = subprocess.DEVNULL, subprocess.PIPE
    try:
        process = subprocess.Popen(command, stdin=pipe, stdout=pipe, stderr=nowhere)  # noqa: S603 - fixed
    except OSError:
        return
    with process:
        try:
            if process.stdin and process.stdout:
                yield from _heard(process.stdin, process.stdout, reader)
        finally:
            process.kill()


def _heard(target: IO[bytes], source: IO[bytes], reader: ResultReader) -> Iterator[list[ResultChunk] | None]:
    try:
        with target:
            _send(reader, target)
        while True:
            yield pickle.load(source)  # noqa: S301 - from a process that this one started
    except (EOFError, OSError, pickle.UnpicklingError):
        return


if __name__ == "__main__":
    serve(sys.stdin.buffer, sys.stdout.buffer)
