"""Propagation of uncertainty, held against an independent library and a published worked example."""

import pytest
from uncertainties import ufloat

from effluent.calc.balance import balance
from effluent.domain import Quantity

CASES = [
    (["60 ± 2 L", "40 ± 1.5 L", "1.2 ± 0.05 L"], "88 ± 3 L", "4 ± 2 L"),
    (["15 ± 0.4 gal"], "50 ± 2 L", "1 ± 1 L"),
    (["200 L ± 2 %"], "190 L ± 5 %", "3 L ± 50 %"),
]


def independent(written):
    quantity = Quantity.parse(written)
    litres = 3.785411784 if quantity.unit == "gal" else 1.0
    return ufloat(float(quantity.magnitude) * litres, float(quantity.spread_magnitude) * litres)


# The `uncertainties` package, linear propagation of independent variables
@pytest.mark.parametrize(("put_in", "caught", "retained"), CASES)
def test_unaccounted_and_share_equal_an_independent_library(put_in, caught, retained):
    found = balance([Quantity.parse(v) for v in put_in], Quantity.parse(caught), Quantity.parse(retained))
    volume = sum(independent(v) for v in put_in)
    left = volume - independent(caught) - independent(retained)
    assert float(found.unaccounted) == pytest.approx(left.nominal_value, rel=1e-12)
    assert found.uncertainty == pytest.approx(left.std_dev, rel=1e-12)
    assert float(found.share) == pytest.approx((left / volume).nominal_value, rel=1e-12)
    assert found.share_uncertainty == pytest.approx((left / volume).std_dev, rel=1e-12)


# Eurachem/CITAC QUAM:2012, example A1: a 100 mL flask has standard uncertainties of 0.04 mL (calibration),
# 0.02 mL (filling) and 0.05 mL (temperature); printed as 0.07 mL, unrounded 0.0671 mL. Recalled from notes
# on the guide, not read in it here. Additive contributions combine as volumes put in do.
def test_additive_contributions_combine_as_in_the_eurachem_flask():
    flask = balance([Quantity.parse(v) for v in ("100 ± 0.04 mL", "0 ± 0.02 mL", "0 ± 0.05 mL")], None, None)
    assert flask.uncertainty * 1000 == pytest.approx(0.0671, abs=0.00005)
    assert round(flask.uncertainty * 1000, 2) == 0.07
