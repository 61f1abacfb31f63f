"""Rules of the trade for a wash (common practice, no source): what is refused and what is questioned."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from effluent.calc.balance import balance
from effluent.calc.mixture import ratio_question
from effluent.calc.units import canonical
from effluent.domain import Cleaner, CleanerForm, Quantity, RunningMode, Wash, WashKind
from effluent.errors import ValueRefused
from effluent.store.reading import Reading

__all__ = ["check_trade", "questions"]

_CLEANER_FIELDS = ("cleaner", "lot", "concentrate", "solution_water", "soaks")
_LIQUID_FIELDS = (
    *_CLEANER_FIELDS,
    "rinse_water",
    "additive",
    "additive_volume",
    "caught",
    "retained",
    "rinses",
)
_GRIT_FIELDS = ("grit", "grit_mass")


def check_trade(wash: Wash) -> None:
    """Refuse a wash that cannot have been.

    Raises
    ------
    ValueRefused
        Naming the first thing that contradicts the wash kind, and what to do.
    """
    if wash.kind is WashKind.DESALINATION:
        _leave_out(
            wash, (*_CLEANER_FIELDS, *_GRIT_FIELDS), "a desalination wash is fresh water only; leave it out"
        )
        _need(wash, "rinse_water", "a desalination wash rinses with fresh water; give its volume")
    elif wash.kind is WashKind.RECOVERY:
        _leave_out(wash, _GRIT_FIELDS, "a performance recovery wash takes no grit; record two washes")
        _need(wash, "cleaner", "a performance recovery wash sprays a cleaner; name it")
        _need(wash, "concentrate", "give the volume of the cleaner as delivered")
    else:
        _check_grit(wash)
    _check_pairs(wash)


def questions(reading: Reading, wash: Wash) -> Iterator[str]:
    """Yield what about a wash is plausible only with a reason."""
    if wash.cleaner is not None and wash.concentrate is not None:
        yield from _about_mix(reading.value("cleaner", wash.cleaner), wash, wash.concentrate)
    liquids = [
        q for q in (wash.concentrate, wash.solution_water, wash.rinse_water, wash.additive_volume) if q
    ]
    result = balance(liquids, wash.caught, wash.retained)
    if result.caught_exceeds_put_in:
        yield (
            f"more was caught ({wash.caught}) than put in ({float(result.put_in):g} L): "
            "rain, or water from another source?"
        )
    same = {"engine": wash.engine, "performed_at": wash.performed_at, "kind": wash.kind}
    for other in reading.values("wash", **same):
        if other.code != wash.code:
            yield f"{other.code} is a {wash.kind} of engine {wash.engine} at that time too: logged twice?"


def _check_grit(wash: Wash) -> None:
    if wash.mode is not RunningMode.IDLE:
        raise ValueRefused("mode", wash.mode.value, "grit goes in at idle")
    _leave_out(wash, _LIQUID_FIELDS, "an abrasive grit clean yields no liquid; leave it out")
    _need(wash, "grit", "say which grit, as in 'crushed nut shell'")


def _check_pairs(wash: Wash) -> None:
    for first, second, remedy in (
        ("additive_volume", "additive", "name the additive"),
        ("additive", "additive_volume", "give the volume of the additive"),
        ("caught", "caught_by", "say how the caught volume was found, as in 'level stick'"),
        ("retained", "retained_basis", "state the basis of the retained volume: measured, or whose estimate"),
    ):
        if getattr(wash, first):
            _need(wash, second, remedy)


def _about_mix(cleaner: Cleaner, wash: Wash, concentrate: Quantity) -> Iterator[str]:
    water_l = canonical(wash.solution_water, "volume") if wash.solution_water else Fraction(0)
    if cleaner.form is CleanerForm.READY:
        if water_l:
            yield f"{cleaner.label} is ready to use, yet {wash.solution_water} of water was mixed in"
        return
    concentrate_l = canonical(concentrate, "volume")
    question = ratio_question(cleaner.mix_ratio, concentrate_l=concentrate_l, water_l=water_l)
    if question:
        yield question


def _leave_out(wash: Wash, names: tuple[str, ...], remedy: str) -> None:
    for name in names:
        if getattr(wash, name):
            raise ValueRefused(name.replace("_", " "), str(getattr(wash, name)), remedy)


def _need(wash: Wash, name: str, remedy: str) -> None:
    if not getattr(wash, name):
        raise ValueRefused(name.replace("_", " "), "", remedy)
