"""How many sheets the lines and carriers need."""

import pytest

from effluent.paper.section import continuation_count


@pytest.mark.parametrize(
    ("lines", "count"), [(0, 0), (1, 0), (4, 0), (5, 1), (14, 1), (15, 2), (24, 2), (25, 3)]
)
def test_continuations_follow_four_lines_then_ten(lines, count):
    assert continuation_count(lines) == count


@pytest.mark.parametrize(("carriers", "count"), [(0, 0), (2, 0), (3, 1), (4, 1), (5, 2)])
def test_third_carrier_needs_a_continuation(carriers, count):
    assert continuation_count(1, carriers) == count


def test_lines_and_carriers_share_continuations():
    assert continuation_count(14, 5) == 2
