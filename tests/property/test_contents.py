from datetime import UTC, datetime, timedelta
from fractions import Fraction

from hypothesis import given
from hypothesis import strategies as st

from effluent.calc.contents import Flow, contents, contents_at, first_violation, levels

START = datetime(2026, 1, 1, tzinfo=UTC)
CONTAINERS = ("A", "B", "C")


@st.composite
def possible_flows(draw):
    """Draw flows that never take more than a container holds."""
    held = dict.fromkeys(CONTAINERS, Fraction(0))
    flows = []
    for order in range(draw(st.integers(0, 15))):
        source = draw(st.sampled_from([None, *CONTAINERS]))
        share = Fraction(draw(st.integers(0, 12)), 12)
        volume = share * (held[source] if source else 100)
        target = draw(st.sampled_from(CONTAINERS if source is None else (None, *CONTAINERS)))
        for name, change in ((source, -volume), (target, volume)):
            if name:
                held[name] += change
        origin = None if source else f"W{order}"
        flows.append(
            Flow(
                at=START + timedelta(hours=order),
                order=order,
                volume_l=volume,
                origin=origin,
                source=source,
                target=target,
            )
        )
    return flows


def naive(flows):
    """Take every origin in proportion, one after another."""
    held = {name: {} for name in CONTAINERS}
    for flow in flows:
        moved = {flow.origin: flow.volume_l}
        if flow.source:
            level = sum(held[flow.source].values())
            moved = {o: v * flow.volume_l / level for o, v in held[flow.source].items()} if level else {}
            for origin, volume in moved.items():
                held[flow.source][origin] -= volume
        if flow.target:
            for origin, volume in moved.items():
                held[flow.target][origin] = held[flow.target].get(origin, 0) + volume
    return held


def without_zeros(held):
    return {name: kept for name, mix in held.items() if (kept := {o: v for o, v in mix.items() if v})}


@given(possible_flows())
def test_contents_equal_the_naive_account(flows):
    assert without_zeros(contents(flows)) == without_zeros(naive(flows))


@given(possible_flows())
def test_contents_add_up_to_the_level_exactly(flows):
    assert {name: sum(mix.values()) for name, mix in contents(flows).items()} == levels(flows)


@given(possible_flows(), st.randoms())
def test_order_given_does_not_matter(flows, random):
    shuffled = random.sample(flows, len(flows))
    assert contents(shuffled) == contents(flows)


@given(possible_flows())
def test_possible_flows_have_no_violation(flows):
    assert first_violation(flows, {}) is None


@given(possible_flows(), st.integers(0, 300))
def test_capacity_is_broken_exactly_when_some_prefix_is_above_it(flows, capacity):
    peaks = [levels(flows[: n + 1]).get("A", 0) for n in range(len(flows))]
    found = first_violation(flows, {"A": Fraction(capacity)})
    assert (found is not None) == any(peak > capacity for peak in peaks)


@given(possible_flows(), st.lists(st.integers(-1, 16), max_size=4), st.sampled_from(CONTAINERS))
def test_contents_at_a_moment_are_those_of_the_flows_up_to_it(flows, hours, container):
    moments = [START + timedelta(hours=hour) for hour in hours]
    told = [
        without_zeros({container: naive([f for f in flows if f.at <= moment])[container]})
        for moment in moments
    ]
    found = contents_at(reversed(flows), container, moments)
    assert [without_zeros({container: held}) for held in found] == told
