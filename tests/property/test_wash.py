"""Any sequence of washes, movements, corrections and voids leaves every container possible at every time."""

from __future__ import annotations

import tempfile
from collections import defaultdict
from datetime import timedelta
from fractions import Fraction
from pathlib import Path

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, initialize, invariant, precondition, rule

from effluent.domain import Movement
from effluent.errors import VolumeRefused
from effluent.services.container import contents, movements_of, void_movement, working_capacity
from effluent.services.register import listing
from effluent.services.wash import amend, record, void
from tests.washing import add_station, desalination, pour, q, rinse, withdraw
from tests.world import NOON, world

DRUMS = ["D-1", "D-2", "T-1"]
HOURS = st.integers(0, 6)
LITRES = st.sampled_from(["0.1 L", "10 gal", "33.3 L", "120 L", "197.6 L"])
DRUM = st.sampled_from(DRUMS)


class Ledger(RuleBasedStateMachine):
    """A ledger that is written to at random; what is refused must leave it as it was."""

    @initialize()
    def open(self) -> None:
        self.folder = tempfile.TemporaryDirectory()
        self.opened = world(str(Path(self.folder.name) / "ledger"))
        self.book = self.opened.__enter__()
        add_station(self.book)

    def teardown(self) -> None:
        if hasattr(self, "opened"):
            self.opened.__exit__(None, None, None)
            self.folder.cleanup()

    def attempt(self, act: object) -> None:
        before = self.book.head()
        try:
            act()  # type: ignore[operator]
        except VolumeRefused:
            assert self.book.head() == before

    def numbers(self, noun: str) -> list[str]:
        kept = [each for each in listing(self.book, noun) if noun == "wash" or each.wash is None]
        return [each.code for each in kept]

    @rule(drum=DRUM, litres=LITRES, hour=HOURS)
    def wash(self, drum: str, litres: str, hour: int) -> None:
        done = desalination(
            performed_at=NOON + timedelta(hours=hour),
            rinse_water=q("1000 L"),
            caught=q(litres),
            caught_by="meter",
        )
        self.attempt(lambda: record(self.book, done, {drum: None}, by="AM", accept="made up"))

    @rule(source=DRUM, into=DRUM, litres=LITRES, hour=HOURS)
    def transfer(self, source: str, into: str, litres: str, hour: int) -> None:
        if source != into:
            self.attempt(lambda: pour(self.book, litres, source, into, hours=hour))

    @rule(source=DRUM, litres=LITRES, hour=HOURS)
    def withdraw(self, source: str, litres: str, hour: int) -> None:
        self.attempt(lambda: withdraw(self.book, litres, source, hours=hour))

    @precondition(lambda self: self.numbers("wash"))
    @rule(data=st.data(), litres=LITRES, hour=HOURS)
    def amend(self, data: st.DataObject, litres: str, hour: int) -> None:
        code = data.draw(st.sampled_from(self.numbers("wash")))
        changes = {
            "caught": q(litres),
            "performed_at": NOON + timedelta(hours=hour),
            "remarks": str(self.book.head()),
        }
        self.attempt(lambda: amend(self.book, code, changes, by="AM", reason="x", accept="x"))

    @precondition(lambda self: self.numbers("wash"))
    @rule(data=st.data())
    def void_wash(self, data: st.DataObject) -> None:
        code = data.draw(st.sampled_from(self.numbers("wash")))
        self.attempt(lambda: void(self.book, code, by="AM", reason="x"))

    @precondition(lambda self: self.numbers("movement"))
    @rule(data=st.data())
    def void_movement(self, data: st.DataObject) -> None:
        code = data.draw(st.sampled_from(self.numbers("movement")))
        self.attempt(lambda: void_movement(self.book, code, by="AM", reason="x"))

    @invariant()
    def is_possible_at_every_time(self) -> None:
        for drum in DRUMS if hasattr(self, "book") else ():
            with self.book.reading() as reading:
                told, most = movements_of(reading, drum), working_capacity(reading.value("container", drum))
            levels = running(told, drum)
            assert all(0 <= level <= most for level in levels)
            found = contents(self.book, drum)
            assert found.level_l == (levels or [0])[-1] == sum(o.volume_l for o in found.origins)

    @invariant()
    def loses_no_water(self) -> None:
        """What washes caught is in the containers or was withdrawn, wash by wash."""
        if not hasattr(self, "book"):
            return
        found = [contents(self.book, drum) for drum in DRUMS]
        gone = sum(
            (litres(m) for m in listing(self.book, "movement") if m.target is None and m.source), Fraction(0)
        )
        caught = sum((litres(m) for m in listing(self.book, "movement") if m.wash), Fraction(0))
        assert sum(each.level_l for each in found) + gone == caught
        by_wash: dict[str, Fraction] = defaultdict(Fraction)
        for origin in (origin for each in found for origin in each.origins):
            by_wash[origin.wash.code] += origin.volume_l
        filled = {m.wash: litres(m) for m in listing(self.book, "movement") if m.wash}
        assert all(volume <= filled[wash] for wash, volume in by_wash.items())


def litres(movement: Movement) -> Fraction:
    """Return a volume in litres by arithmetic of its own; 1 US gal is 231 in3 of 16.387064 mL exactly."""
    factor = Fraction("3.785411784") if movement.volume.unit == "gal" else Fraction(1)
    return Fraction(movement.volume.text) * factor


def running(movements: tuple[Movement, ...], drum: str) -> list[Fraction]:
    """Return the level after each movement, added up here."""
    level, levels = Fraction(0), []
    for movement in movements:
        level += litres(movement) if movement.target == drum else -litres(movement)
        levels.append(level)
    return levels


Ledger.TestCase.settings = settings(
    max_examples=4, stateful_step_count=10, deadline=None, suppress_health_check=list(HealthCheck)
)
test_any_sequence_keeps_every_container_possible = Ledger.TestCase


@given(
    wrong=st.tuples(st.sampled_from(["1 L", "3 gal"]), HOURS),
    right=st.lists(st.tuples(st.sampled_from(["5 L", "12.5 L", "2 gal"]), HOURS), min_size=2, max_size=4),
    out=HOURS,
)
@settings(max_examples=5, deadline=None)
def test_amended_wash_equals_one_recorded_right_at_first(
    wrong: tuple[str, int], right: list[tuple[str, int]], out: int
) -> None:
    with tempfile.TemporaryDirectory() as folder, world(f"{folder}/ledger") as book:
        add_station(book)
        first = rinse(book, wrong[0], "D-1", hours=wrong[1])
        for drum, washes in (("D-1", right[1:]), ("D-2", right)):
            for number, (caught, hour) in enumerate(washes):
                rinse(book, caught, drum, hours=hour + number / 100)
        changes = {"caught": q(right[0][0]), "performed_at": NOON + timedelta(hours=right[0][1])}
        amend(book, first, changes, by="AM", reason="x", accept="x")
        for drum in ("D-1", "D-2"):
            withdraw(book, "2 L", drum, hours=7 + out)
        one, other = (contents(book, drum) for drum in ("D-1", "D-2"))
    assert one.level_l == other.level_l
    assert sorted(o.volume_l for o in one.origins) == sorted(o.volume_l for o in other.origins)
