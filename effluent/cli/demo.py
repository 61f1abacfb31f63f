"""The command ``effluent demo``."""

from __future__ import annotations

import shlex
import shutil
import sys
from pathlib import Path

import click

from effluent.cli import show
from effluent.cli.group import TABLE
from effluent.cli.value import line

__all__ = ["demo"]


@click.command("demo", help=f"{TABLE['demo'][1]}\n\nDIR must be new or empty.")
@click.argument("folder", metavar="DIR", type=line)
@click.option(
    "--seed",
    type=click.IntRange(0, 999_999),
    default=1,
    show_default=True,
    help="Another seed, other volumes and findings; the same seed gives the same ledger.",
)
def demo(*, folder: str, seed: int) -> None:
    """Make two invented years and tell their story."""
    from effluent.services.demo import make

    if sys.stderr.isatty():
        click.echo("two years are being recorded; this takes a while …", err=True)
    show.say(make(folder, seed=seed, program=_program()).story.rstrip("\n"))


def _program() -> str:
    """Return what to type for this command: its name where a shell finds it, else how it was started."""
    if shutil.which("effluent"):
        return "effluent"
    started = Path(sys.argv[0])
    if started.stem == "effluent":
        return shlex.quote(str(started))
    return f"{shlex.quote(sys.executable)} -m effluent"
