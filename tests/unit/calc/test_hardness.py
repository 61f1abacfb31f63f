from decimal import Decimal
from fractions import Fraction as Rational
from math import exp, log

import pytest

from effluent.calc.hardness import cadmium_acute, cadmium_chronic, cadmium_class, cadmium_eqs
from effluent.errors import ValueRefused


# A second, plain implementation in binary floating point of the equations named in the module
@pytest.mark.parametrize("hardness", ["12.5", "25", "34.12", "100", "250", "400"])
def test_criteria_equal_a_plain_implementation(hardness):
    ln = log(float(hardness))
    acute = exp(0.9789 * ln - 3.866) * (1.136672 - 0.041838 * ln)
    chronic = exp(0.7977 * ln - 3.909) * (1.101672 - 0.041838 * ln)
    assert float(cadmium_acute(Rational(hardness)).unrounded) == pytest.approx(acute, rel=1e-13)
    assert float(cadmium_chronic(Rational(hardness)).unrounded) == pytest.approx(chronic, rel=1e-13)


def test_hardness_counts_up_to_the_ceiling_and_from_the_floor():
    capped = cadmium_acute(Rational(900))
    assert (capped.hardness, capped.hardness_used) == (900, 400)
    assert capped.value == cadmium_acute(Rational(400)).value
    assert cadmium_acute(Rational(900), ceiling=None).value > capped.value
    assert cadmium_chronic(Rational(3), floor=Rational(25)).hardness_used == 25


def test_limit_has_two_significant_figures():
    found = cadmium_acute(Rational(100))
    assert (found.value, found.unrounded.quantize(Decimal("0.001"))) == (Rational("1.8"), Decimal("1.794"))
    assert found.total_recoverable * found.conversion_factor == pytest.approx(found.unrounded)


@pytest.mark.parametrize("hardness", ["0", "-5", "10001"])
@pytest.mark.parametrize("criterion", [cadmium_acute, cadmium_chronic, cadmium_class, cadmium_eqs])
def test_absurd_hardness_is_refused(criterion, hardness):
    with pytest.raises(ValueRefused, match="above 0 and up to"):
        criterion(Rational(hardness))


def test_standards_come_from_the_shipped_table():
    year, most = cadmium_eqs(Rational(100))
    assert (year.value.text, most.value.text) == ("0.15", "0.9")
    assert year.key == "EU2008-105/cadmium/class-4/year"
