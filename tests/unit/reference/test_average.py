from fractions import Fraction

import pytest

from effluent.errors import RecordMissing
from effluent.reference.average import average_rows, thirty_day


def test_row_is_found_by_both_figures():
    assert thirty_day(Fraction("4.5"), Fraction("2.7")).thirty_day == "1.8"
    assert thirty_day(Fraction(5), Fraction("2.70")).thirty_day == "1.5"


def test_pair_that_was_never_published_is_refused():
    with pytest.raises(RecordMissing, match=r"5 / 2\.6"):
        thirty_day(Fraction(5), Fraction("2.6"))


def test_averages_get_smaller_with_the_days():
    assert all(
        Fraction(row.daily) > Fraction(row.four_day) > Fraction(row.thirty_day) for row in average_rows()
    )
