from datetime import UTC, datetime
from fractions import Fraction

import pytest

from effluent.calc.contents import Flow, contents, contents_at, first_violation, levels
from effluent.errors import ValueRefused, VolumeRefused


def flow(hour, litres, **ends):
    return Flow(at=datetime(2026, 3, 1, hour, tzinfo=UTC), order=hour, volume_l=Fraction(litres), **ends)


TWO_WASHES = [
    flow(1, 60, origin="W1", target="DRUM"),
    flow(2, 20, origin="W2", target="DRUM"),
]


def test_levels_are_in_minus_out():
    flows = [*TWO_WASHES, flow(3, 30, source="DRUM", target="TOTE"), flow(4, 10, source="TOTE")]
    assert levels(flows) == {"DRUM": 50, "TOTE": 20}


def test_transfer_takes_every_origin_in_proportion():
    held = contents([*TWO_WASHES, flow(3, 40, source="DRUM", target="TOTE")])
    assert held == {"DRUM": {"W1": 30, "W2": 10}, "TOTE": {"W1": 30, "W2": 10}}


def test_fill_after_withdrawal_is_not_thinned():
    held = contents([*TWO_WASHES, flow(3, 40, source="DRUM"), flow(4, 10, origin="W2", target="DRUM")])
    assert held == {"DRUM": {"W1": 30, "W2": 20}}


def test_second_withdrawal_thins_what_the_first_left():
    held = contents([*TWO_WASHES, flow(3, 40, source="DRUM"), flow(4, 20, source="DRUM")])
    assert held == {"DRUM": {"W1": 15, "W2": 5}}


def test_contents_at_count_what_moved_just_then():
    moments = [flow(hour, 0, target="DRUM").at for hour in (2, 0, 1)]
    assert contents_at(TWO_WASHES, "DRUM", moments) == ({"W1": 60, "W2": 20}, {}, {"W1": 60})


def test_thirds_stay_exact():
    held = contents([flow(1, 3, origin="W1", target="A"), flow(2, 1, source="A", target="B")])
    again = contents([flow(1, 7, origin="W1", target="A"), flow(2, Fraction(7, 3), source="A")])
    assert (held["B"], again["A"]) == ({"W1": Fraction(1)}, {"W1": Fraction(14, 3)})


def test_emptied_container_forgets_its_origins():
    held = contents([*TWO_WASHES, flow(3, 80, source="DRUM"), flow(4, 5, origin="W3", target="DRUM")])
    assert held == {"DRUM": {"W3": 5}}


def test_emptied_container_stays_listed_as_empty():
    assert contents([*TWO_WASHES, flow(3, 80, source="DRUM")]) == {"DRUM": {}}


def test_water_of_no_wash_is_kept_without_a_name():
    assert contents([flow(1, 5, target="DRUM")]) == {"DRUM": {"": 5}}


def test_flows_are_taken_by_time_not_by_the_order_given():
    flows = [*TWO_WASHES, flow(3, 40, source="DRUM")]
    assert contents(reversed(flows)) == contents(flows)


def test_flows_of_one_instant_are_taken_by_their_number():
    at = datetime(2026, 3, 1, tzinfo=UTC)
    out = Flow(at=at, order=2, volume_l=Fraction(5), source="DRUM")
    into = Flow(at=at, order=1, volume_l=Fraction(5), origin="W1", target="DRUM")
    assert first_violation([out, into], {}) is None


def test_contents_below_empty_are_refused():
    with pytest.raises(VolumeRefused, match="container DRUM: holds 80 L, so 81 L cannot leave it"):
        contents([*TWO_WASHES, flow(3, 81, source="DRUM")])


def test_nothing_out_of_an_empty_container_is_nothing():
    assert contents([flow(1, 0, source="DRUM", target="TOTE")]) == {"DRUM": {}, "TOTE": {}}


def test_level_at_working_capacity_is_allowed():
    assert first_violation(TWO_WASHES, {"DRUM": Fraction(80)}) is None


def test_level_above_working_capacity_is_found():
    found = first_violation(TWO_WASHES, {"DRUM": Fraction(79)})
    assert (found.container, found.at.hour, found.order) == ("DRUM", 2, 2)
    assert (found.level, found.capacity, found.what) == (80, 79, "above working capacity")


def test_back_dated_fill_that_overflowed_is_found_though_the_end_is_low():
    flows = [*TWO_WASHES, flow(3, 80, source="DRUM")]
    back_dated = Flow(at=flows[0].at, order=9, volume_l=Fraction(30), origin="W9", target="DRUM")
    found = first_violation([*flows, back_dated], {"DRUM": Fraction(100)})
    assert (found.at.hour, found.level) == (2, 110)


def test_withdrawal_before_its_fill_is_found():
    found = first_violation([flow(5, 10, origin="W1", target="A"), flow(4, 10, source="A")], {})
    assert (found.container, found.what, found.level, found.capacity) == ("A", "below empty", -10, None)


def test_overflow_at_the_far_end_of_a_transfer_is_found():
    flows = [*TWO_WASHES, flow(3, 40, source="DRUM", target="TOTE")]
    assert first_violation(flows, {"TOTE": Fraction(39)}).container == "TOTE"


def test_transfer_into_itself_changes_nothing():
    flows = [*TWO_WASHES, flow(3, 40, source="DRUM", target="DRUM")]
    assert contents(flows) == contents(TWO_WASHES)
    assert first_violation(flows, {"DRUM": Fraction(80)}) is None


@pytest.mark.parametrize(
    ("ends", "litres"), [({"target": "A"}, -1), ({"origin": "W1"}, 1)], ids=["negative", "no container"]
)
def test_impossible_flow_is_refused(ends, litres):
    with pytest.raises(ValueRefused):
        flow(1, litres, **ends)
