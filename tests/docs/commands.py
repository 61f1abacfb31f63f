"""The command reference, generated from the commands themselves.

``python -m tests.docs.commands > docs/commands.md`` writes it anew; a test holds the two together.
"""

from __future__ import annotations

from collections.abc import Iterator

import click

from effluent.cli.group import root

INTRODUCTION = """# Commands

Generated from the commands themselves; `effluent COMMAND --help` says the same. Options stand after the verb.
Every read takes `--json` and `--as-of`. Leaving status: 0 done or within, 1 over or undetermined (or a ledger
that does not verify), 2 usage or bad input, further ones in [errors](errors.md).

| environment variable | stands for |
|---|---|
| `EFFLUENT_LEDGER` | `--ledger`, the place of the ledger |
| `EFFLUENT_BY` | `--by`, the person who records |
"""


def reference() -> str:
    """Return the whole reference as Markdown."""
    return "\n".join([INTRODUCTION, *_described(root, "effluent")]).rstrip() + "\n"


def _described(command: click.Command, path: str) -> Iterator[str]:
    context = click.Context(command, info_name=path)
    if isinstance(command, click.Group):
        if path != "effluent":
            yield f"## {path}\n\n{_help(command)}\n"
        for name in command.list_commands(context):
            found = command.get_command(context, name)
            assert found is not None, f"{path} {name} cannot be loaded"
            yield from _described(found, f"{path} {name}")
        return
    pieces = " ".join(command.collect_usage_pieces(context))
    yield f"{'##' if path.count(' ') == 1 else '###'} {path}\n\n`{path} {pieces}`\n\n{_help(command)}\n"
    options = [
        p for p in command.get_params(context) if isinstance(p, click.Option) and "--help" not in p.opts
    ]
    if options:
        yield "| option | meaning |\n|---|---|"
        yield from (_row(option) for option in options)
        yield ""


def _help(command: click.Command) -> str:
    return " ".join((command.help or "").split())


def _row(option: click.Option) -> str:
    takes = "" if option.is_flag else f" {option.make_metavar(click.Context(click.Command('x')))}"
    names = ", ".join(f"`{name}{takes}`" for name in option.opts).replace("|", "\\|")
    meaning = (option.help or "").replace("|", "\\|")
    return f"| {names} | {meaning}{' Required.' if option.required else ''} |"


if __name__ == "__main__":
    print(reference(), end="")
