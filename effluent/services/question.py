"""What is plausible only with a reason."""

from __future__ import annotations

from collections.abc import Iterable

from effluent.errors import Questioned
from effluent.store.writing import Writing

__all__ = ["accepted_because", "answer", "plainly"]

_ACCEPTED, _QUESTIONED = "accepted: ", " (questioned: "
_REMEDY = "check the figures; if they are right all the same, repeat with --accept and the reason"


def answer(writing: Writing, questions: Iterable[str], *, accept: str) -> None:
    """Let the entry keep the answer to what is questioned.

    Raises
    ------
    Questioned
        If something is questioned and nobody accepted it.
    """
    asked = tuple(questions)
    if not asked:
        return
    if not accept.strip():
        raise Questioned(asked, _REMEDY)
    writing.explain(f"{_ACCEPTED}{accept.strip()}{_QUESTIONED}{'; '.join(asked)})")


def accepted_because(reason: str) -> str:
    """Return why what was questioned was accepted, out of the reason an entry kept; empty if nothing was."""
    return reason.partition(_ACCEPTED)[2].partition(_QUESTIONED)[0]


def plainly(reason: str) -> str:
    """Return a reason that an entry kept as a reader is told it: the answer stays, the questions do not.

    Examples
    --------
    >>> plainly("wrong works; accepted: brought back (questioned: is it back?)")
    'wrong works; brought back'
    """
    because = accepted_because(reason)
    return f"{reason.partition(f'; {_ACCEPTED}')[0]}; {because}" if because else reason
