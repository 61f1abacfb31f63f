"""The command ``effluent``: runs the command line and turns what goes wrong into text and exit status.

0 done; 1 a limit is broken or cannot be shown to hold; 2 usage or bad input; 3, 4 and 5 as in
`effluent.errors`; 130 interrupted; 141 the reader of the output went away.
"""

from __future__ import annotations

import errno
import io
import os
import sys
from collections.abc import Sequence
from typing import TextIO

import click

from effluent.cli.group import root
from effluent.errors import EffluentError, StorageFailed

__all__ = ["main", "run"]

_INTERRUPTED, _READER_GONE = 130, 141
_OUTPUT_FULL = {errno.ENOSPC, errno.EDQUOT, errno.EFBIG, errno.EIO}


def main() -> None:
    """Run the command line with the arguments of the process and leave with its exit status."""
    sys.exit(run(sys.argv[1:]))


def run(arguments: Sequence[str]) -> int:
    """Run one command line.

    Parameters
    ----------
    arguments : sequence of str
        What was typed after ``effluent``.

    Returns
    -------
    int
        The exit status; a bug passes through as the exception it is.
    """
    for stream in (sys.stdout, sys.stderr):
        _soften(stream)
    try:
        status = _translate(arguments)
        if sys.stdout is not None:
            sys.stdout.flush()
    except OSError as error:
        return _output_failed(error)
    except (click.Abort, EOFError, KeyboardInterrupt):
        return _INTERRUPTED
    return status


def _soften(stream: TextIO | None) -> None:
    """Spell out a character that the terminal cannot show; it must not end the command."""
    if isinstance(stream, io.TextIOWrapper):
        stream.reconfigure(errors="backslashreplace")


def _translate(arguments: Sequence[str]) -> int:
    try:
        with root.make_context("effluent", list(arguments)) as context:
            status = root.invoke(context)
            return status if isinstance(status, int) else 0
    except click.exceptions.Exit as leaving:
        return leaving.exit_code
    except click.ClickException as error:
        shown = io.StringIO()
        error.show(shown)
        _complain(shown.getvalue().rstrip())
        return error.exit_code
    except EffluentError as error:
        _complain(f"{error.code}: {error}")
        return error.exit_status


def _complain(message: str) -> None:
    """Print what went wrong; nothing in it steers the terminal or floods it."""
    from effluent.cli.text import clip, printable

    try:
        click.echo("\n".join(clip(printable(line)) for line in message.split("\n")), err=True)
    except OSError:  # nobody can read it any more; the exit status still says it
        _close(sys.stderr)


def _output_failed(error: OSError) -> int:
    if error.errno == errno.EPIPE:
        _close(sys.stdout)
        return _READER_GONE
    if error.errno not in _OUTPUT_FULL:
        raise error
    _close(sys.stdout)
    _complain(f"{StorageFailed.code}: the output cannot be written ({error.strerror})")
    return StorageFailed.exit_status


def _close(stream: TextIO | None) -> None:
    """Lead what is still to be flushed into nothing, so that leaving stays quiet."""
    if isinstance(stream, io.TextIOWrapper):
        nothing = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nothing, stream.fileno())
        os.close(nothing)


if __name__ == "__main__":
    main()
