"""Print a table of ratios: ``python -m tests.bench [--rows N] [--only NAME] [--turns N]``.

The exit status is 1 when a ratio or a peak is over its budget. Seconds explain a ratio; they judge nothing.
"""

from __future__ import annotations

import argparse
import importlib
import sys

from tests.bench.race import WORKS, Figure, measure

MODULES = ["start", "intake", "verify", "paper", "wash"]
WIDTHS = (40, 10, 10, 7, 7, 14)
HEADS = ("work", "floor", "ours", "ratio", "budget", "peak MiB")


def line(cells: tuple[str, ...]) -> str:
    first, *rest = zip(cells, WIDTHS, strict=True)
    return " | ".join([first[0].ljust(first[1]), *(text.rjust(width) for text, width in rest)])


def shown(figure: Figure) -> str:
    most = f" of {figure.work.most_mib:.0f}" if figure.work.most_mib else ""
    cells = (
        figure.work.name,
        f"{figure.floor_s:.3f} s",
        f"{figure.ours_s:.3f} s",
        f"{figure.ratio:.2f}",
        f"{figure.work.budget:.2f}",
        f"{figure.peak_mib:.0f}{most}",
    )
    return line(cells) + ("  OVER" if figure.is_over else "")


def read_options() -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.bench", description=__doc__.splitlines()[0])
    parser.add_argument(
        "--rows", type=int, default=100_000, help="results in the ledger (default %(default)s)"
    )
    parser.add_argument("--only", action="append", choices=sorted(WORKS), help="a work; can be repeated")
    parser.add_argument("--turns", type=int, default=5, help="turns of each side (default %(default)s)")
    return parser.parse_args()


def main() -> int:
    for name in MODULES:
        importlib.import_module(f"tests.bench.{name}")
    options = read_options()
    print(line(HEADS), flush=True)
    figures = []
    for name in options.only or WORKS:
        figures.append(measure(WORKS[name], rows=options.rows, turns=options.turns))
        print(shown(figures[-1]), flush=True)
    return int(any(figure.is_over for figure in figures))


if __name__ == "__main__":
    sys.exit(main())
