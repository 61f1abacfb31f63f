from fractions import Fraction
from math import sqrt

import pytest

from effluent.calc.balance import Answer, balance, summary
from effluent.domain import Quantity
from effluent.errors import UnitMismatch


def of(*put_in, caught=None, retained=None):
    def read(written):
        return Quantity.parse(written) if written else None

    return balance([Quantity.parse(volume) for volume in put_in], read(caught), read(retained))


def test_unaccounted_is_put_in_less_caught_and_retained():
    found = of("10 L", "40 L", "60 L", caught="95 L", retained="5 L")
    assert (found.put_in, found.caught, found.retained) == (110, 95, 5)
    assert (found.unaccounted, found.share) == (10, Fraction(1, 11))


# NIST Handbook 44, appendix C: 1 US gallon = 3.785411784 L
def test_gallons_are_summed_as_litres_exactly():
    found = of("1 gal", "500 mL", caught="1 gal")
    assert (found.put_in, found.unaccounted) == (Fraction("4.285411784"), Fraction(1, 2))


def test_nothing_measured_counts_as_nothing_caught():
    found = of("60 L")
    assert (found.caught, found.retained, found.share) == (0, 0, 1)


def test_nothing_put_in_has_no_share():
    found = of(caught="5 L")
    assert (found.unaccounted, found.share, found.share_uncertainty) == (-5, None, None)


def test_uncertainty_is_the_root_of_the_sum_of_squares():
    found = of("60 ± 2 L", "40 L ± 5 %", caught="70 ± 1 L", retained="4 ± 4 L")
    assert found.uncertainty == 5.0


def test_uncertainty_is_converted_with_its_unit():
    assert of("1 ± 0.1 gal").uncertainty == pytest.approx(0.3785411784, rel=1e-15)


def test_share_uncertainty_knows_that_put_in_stands_twice():
    assert of("100 ± 10 L").share_uncertainty == 0.0
    assert of("100 ± 10 L", caught="50 L").share_uncertainty == 0.05


@pytest.mark.parametrize(
    ("caught", "expected"),
    [
        ("90 L", Answer.WITHIN),
        ("89.999 L", Answer.ABOVE),
        ("92 ± 2 L", Answer.WITHIN),
        ("91.9 ± 2 L", Answer.OPEN),
        ("88 ± 2 L", Answer.OPEN),
        ("87.9 ± 2 L", Answer.ABOVE),
        ("101 L", Answer.WITHIN),
    ],
)
def test_share_above_the_threshold_is_flagged_only_beyond_doubt(caught, expected):
    assert of("100 L", caught=caught).flagged(Fraction(1, 10)) == expected


def test_doubt_about_put_in_counts_too():
    assert of("100 ± 10 L", caught="85 L").flagged(Fraction(1, 10)) == Answer.OPEN


@pytest.mark.parametrize(
    ("put_in", "caught", "expected"),
    [
        ("60 L", "60.1 L", True),
        ("60 L", "60 L", False),
        ("60 ± 3 L", "65 ± 4 L", False),
        ("60 ± 3 L", "65.1 ± 4 L", True),
        ("60 ± 3 L", "40 ± 4 L", False),
    ],
)
def test_more_caught_than_put_in_is_told_beyond_uncertainty(put_in, caught, expected):
    assert of(put_in, caught=caught).caught_exceeds_put_in is expected


def test_summary_adds_by_group():
    march, april = ("SITE-A", "type 1", "2026-03"), ("SITE-A", "type 1", "2026-04")
    sums = summary(
        [
            (march, of("60 ± 3 L", caught="50 ± 1 L")),
            (april, of("60 L", caught="30 L")),
            (march, of("40 ± 4 L", caught="45 L", retained="1 ± 1 L")),
        ]
    )
    assert list(sums) == [march, april]
    assert (sums[march].put_in, sums[march].unaccounted, sums[april].unaccounted) == (100, 4, 30)
    assert sums[march].uncertainty == sqrt(9 + 1 + 16 + 1)


def test_mass_is_no_volume():
    with pytest.raises(UnitMismatch):
        of("60 kg")
