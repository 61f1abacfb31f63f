"""The root of the command line; it loads a command's module only when that command is used."""

from __future__ import annotations

from importlib import import_module

import click

from effluent import __version__
from effluent.settings import CAUTION

__all__ = ["TABLE", "Group", "RootGroup", "root"]

TABLE: dict[str, tuple[str, str]] = {
    "demo": ("effluent.cli.demo:demo", "Make two invented years of washes, and tell their story."),
    "convert": ("effluent.cli.convert:convert", "Convert a value to another unit, exactly."),
    "trace": (
        "effluent.cli.trace:trace",
        "Walk the chain from any record to the nozzle and to the manifest.",
    ),
    "ledger": ("effluent.cli.ledger:ledger", "The ledger itself: make, verify, copy and upgrade it."),
    "site": ("effluent.cli.register:site", "Sites: where engines are washed and water is held."),
    "point": ("effluent.cli.register:point", "Discharge points: where water may leave a site."),
    "engine": ("effluent.cli.register:engine", "Engines that are washed."),
    "cleaner": ("effluent.cli.register:cleaner", "Gas-path cleaners."),
    "container": ("effluent.cli.container:container", "Drums, totes, bowsers and tanks."),
    "movement": ("effluent.cli.movement:movement", "Water into, between and out of containers."),
    "wash": ("effluent.cli.wash:wash", "Washes: what was put in, caught and filled."),
    "sample": ("effluent.cli.sample:sample", "Samples of containers, wash streams and discharge points."),
    "result": ("effluent.cli.result:result", "Laboratory results: read from files or entered by hand."),
    "limit": ("effluent.cli.limit:limit", "Discharge limits, each with its source."),
    "check": (
        "effluent.cli.check:check",
        "Hold results against limits and say within, near, over or undetermined.",
    ),
    "trend": ("effluent.cli.trend:trend", "Tell whether an analyte rises or falls over time."),
    "noncompliance": (
        "effluent.cli.noncompliance:noncompliance",
        "Count what exceeds over six months, for significant noncompliance.",
    ),
    "manifest": ("effluent.cli.manifest:manifest", "Manifests: the paper with which containers leave."),
    "person": ("effluent.cli.register:person", "People who record, sample, verify or approve."),
    "company": ("effluent.cli.register:company", "Carriers, receiving facilities and laboratories."),
}
"""Command name: where it is (``module:attribute``), and the first line of its help."""


class Group(click.Group):
    """A group of commands that proposes the nearest names for one it does not have."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names in the order they joined the group."""
        return list(self.commands)

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """Find the command that the first argument names.

        Raises
        ------
        click.UsageError
            If there is none.
        """
        name = args[0]
        if name[:1] not in {"-", ""} and self.get_command(ctx, name) is None:
            raise click.UsageError(_unknown(name, self.list_commands(ctx)), ctx)
        return super().resolve_command(ctx, args)


def _unknown(name: str, known: list[str]) -> str:
    from difflib import get_close_matches

    near = get_close_matches(name[:40].lower(), known, n=2, cutoff=0.6)
    proposal = f"did you mean {' or '.join(near)}?" if near else f"there are: {', '.join(known)}"
    return f"no command {name!r}; {proposal}"


class RootGroup(Group):
    """The commands of `TABLE`, each loaded when it is first asked for."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Return the names in the order of the table."""
        return list(TABLE)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Load and return the command of that name, if the table has it."""
        if cmd_name not in TABLE:
            return None
        module, attribute = TABLE[cmd_name][0].split(":")
        command: click.Command = getattr(import_module(module), attribute)
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """Write the table's lines; no command is loaded for them."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, line) for name, (_, line) in TABLE.items()])


@click.group(cls=RootGroup, epilog=CAUTION, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(__version__, prog_name="effluent", message="%(prog)s %(version)s")
def root() -> None:
    """Follow turbine-engine wash water from the nozzle to the signed-for drum."""
