"""The command that holds what the laboratory found against the limits of the place."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING, Any

import click

from effluent.cli import option, show
from effluent.cli.result import wanted_from, wanted_options
from effluent.cli.value import line
from effluent.domain import Limit, Outcome, Verdict
from effluent.reference.analyte import called

if TYPE_CHECKING:
    from effluent.services.check import Checked

__all__ = ["check"]

_SHOWN = {
    Outcome.OVER: "OVER",
    Outcome.UNDETERMINED: "UNDETERMINED",
    Outcome.NEAR: "near",
    Outcome.WITHIN: "within",
}
_FAILED = {Outcome.OVER, Outcome.UNDETERMINED}


@click.command()
@wanted_options
@click.option(
    "--against", type=line, metavar="POINT", help="Hold caught water against the limits of this point alone."
)
@click.option("--working", is_flag=True, help="Show the arithmetic of every verdict, line by line.")
@option.reads
def check(*, against: str | None, working: bool, **given: Any) -> int:
    """Hold results against limits and say within, near, over or undetermined.

    The limits are those in force where the water may leave. The exit status is 0 when every verdict is
    within or near, and 1 when one is over or undetermined, when there is nothing to judge, or when the
    container asked about holds water that no sample speaks for.
    """
    from effluent.services import check as service
    from effluent.wiring import open_ledger

    wanted = wanted_from(given)
    with open_ledger(given["ledger"]) as book:
        checked = service.check(book, wanted, against=against, as_of=given["as_of"])
    if given["as_json"]:
        show.document(_document(checked, as_of=given["as_of"]))
    else:
        show.screen(*_text(checked, working=working))
    return int(not _is_met(checked))


def _is_met(checked: Checked) -> bool:
    failed = any(verdict.outcome in _FAILED for verdict in checked.verdicts)
    return bool(checked.verdicts) and not failed and not checked.unsampled


def _text(checked: Checked, *, working: bool) -> list[str]:
    return [
        _table(checked.verdicts)
        if checked.verdicts
        else "nothing to judge: no reading meets a limit in force",
        *(_working(checked.verdicts) if working else ()),
        _decided(checked),
        _decided_together(checked),
        _summary(checked.verdicts),
        _gaps(checked),
    ]


def _table(verdicts: tuple[Verdict, ...]) -> str:
    rows = [
        [
            _SHOWN[one.outcome], _margin(one), ", ".join(one.samples), one.day, called(one.limit.analyte),
            _limit(one.limit), _reason(one),
        ]
        for one in verdicts
    ]  # fmt: skip
    return show.table(("verdict", "margin", "sample", "day", "analyte", "limit", "why"), rows)


def _margin(verdict: Verdict) -> str:
    return "" if verdict.margin is None else f"{verdict.margin:.1%}"


def _limit(limit: Limit) -> str:
    return f"{limit.code} at {limit.point}"


def _reason(verdict: Verdict) -> str:
    return "; ".join([verdict.reason, *verdict.notes])


def _working(verdicts: tuple[Verdict, ...]) -> list[str]:
    return [
        "\n".join([_headed(each), *(f"  {show.text(line)}" for line in each.working)]) for each in verdicts
    ]


def _headed(verdict: Verdict) -> str:
    """Return the line that tells one working from another."""
    what = f"{called(verdict.limit.analyte)} against {_limit(verdict.limit)}"
    return show.text(f"working of {_SHOWN[verdict.outcome]}: {', '.join(verdict.samples)}, {what}")


def _decided(checked: Checked) -> str:
    if not checked.strictest:
        return ""
    rows = [
        [sample, _SHOWN[verdict.outcome], _limit(verdict.limit), called(verdict.limit.analyte)]
        for sample, verdict in checked.strictest.items()
    ]
    return show.table(("sample", "decided", "by limit", "analyte"), rows)


def _decided_together(checked: Checked) -> str:
    lines = [
        f"container {container}, over all its samples: {_SHOWN[verdict.outcome]}, decided by sample "
        f"{', '.join(verdict.samples)}, {called(verdict.limit.analyte)}, {_limit(verdict.limit)}"
        for container, verdict in checked.by_container.items()
    ]
    return "\n".join(show.text(line) for line in lines)


def _summary(verdicts: tuple[Verdict, ...]) -> str:
    counts = Counter(verdict.outcome for verdict in verdicts)
    said = ", ".join(f"{counts[outcome]} {_SHOWN[outcome]}" for outcome in _SHOWN)
    noun = "verdict" if len(verdicts) == 1 else "verdicts"
    return f"{len(verdicts)} {noun}: {said}" if verdicts else ""


def _gaps(checked: Checked) -> str:
    lines = [
        *([f"NOT SAMPLED: {show.text(checked.unsampled)}"] if checked.unsampled else ()),
        *(f"no reading: {each.water}: {_named(each.limit)}" for each in checked.without_reading),
        *(f"no average: {each.water}: {_named(each.limit)}: {each.why}" for each in checked.unaveraged),
        *(f"not computed by this version: {_named(limit)}" for limit in checked.not_computed),
        *(f"no verdict on sample {show.text(sample)}" for sample in checked.without_verdict),
    ]
    return "\n".join(lines)


def _named(limit: Limit) -> str:
    what = f"{limit.bound} {limit.value}, {limit.statistic}"
    return show.text(f"{_limit(limit)}: {called(limit.analyte)}, {limit.fraction}, {what}")


def _document(checked: Checked, *, as_of: str | None) -> dict[str, object]:
    return {
        "as_of": as_of,
        "verdicts": checked.verdicts,
        "strictest": {
            sample: {"outcome": verdict.outcome, "limit": verdict.limit.code}
            for sample, verdict in checked.strictest.items()
        },
        "by_container": {
            container: {"outcome": verdict.outcome, "samples": verdict.samples, "limit": verdict.limit.code}
            for container, verdict in checked.by_container.items()
        },
        "without_reading": [{"water": each.water, "limit": each.limit} for each in checked.without_reading],
        "unaveraged": [
            {"water": each.water, "limit": each.limit, "why": each.why} for each in checked.unaveraged
        ],
        "not_computed": checked.not_computed,
        "without_verdict": checked.without_verdict,
        "unsampled": checked.unsampled,
    }
