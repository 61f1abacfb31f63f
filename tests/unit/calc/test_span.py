from fractions import Fraction as Rational

import pytest

from effluent.calc.rule import Cut
from effluent.calc.span import Span, proven
from effluent.domain import Bound, Outcome

WITHIN, _, OVER, UNDETERMINED = Outcome
EDGE = Rational(1)


# Ends of a span beside an edge of 1, and what a maximum of 1 says, without and with 1 itself forbidden.
@pytest.mark.parametrize(
    ("low", "high", "open_ends", "beyond", "reaching"),
    [
        (0, 1, "", WITHIN, UNDETERMINED),
        (0, 1, "high", WITHIN, WITHIN),
        (1, 2, "", UNDETERMINED, OVER),
        (1, 2, "low", OVER, OVER),
        (1, 1, "", WITHIN, OVER),
        (0, 2, "", UNDETERMINED, UNDETERMINED),
        (0, None, "low", UNDETERMINED, UNDETERMINED),
        (1, None, "low", OVER, OVER),
    ],
)
def test_a_maximum_is_met_or_broken_by_all_of_a_span(low, high, open_ends, beyond, reaching):
    span = Span(low=low, high=high, low_open=open_ends == "low", high_open=open_ends == "high")
    assert proven(span, Cut(EDGE, 1.0, inclusive=False), Bound.MAXIMUM) == beyond
    assert proven(span, Cut(EDGE, 1.0, inclusive=True), Bound.MAXIMUM) == reaching


def test_a_minimum_is_the_mirror_image():
    span = Span(low=EDGE, high=None, low_open=True)
    assert proven(span, Cut(EDGE, 1.0, inclusive=True), Bound.MINIMUM) == WITHIN
    below = Span(low=Rational(0), high=EDGE, high_open=True)
    assert proven(below, Cut(EDGE, 1.0, inclusive=False), Bound.MINIMUM) == OVER
