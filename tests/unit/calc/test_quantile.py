from math import pi

import pytest
from scipy import stats
from scipy.special import erfcx

from effluent.calc.quantile import mills_ratio, normal_cdf, normal_quantile, student_cdf, student_quantile
from effluent.errors import ValueRefused

FREEDOM = [1, 2, 3, 4, 5, 6, 7, 10, 29, 100, 999, 1000, 1001, 5000, 10**6]


# scipy, an independent library
@pytest.mark.parametrize("z", [-37.0, -8.0, -1.0, 0.0, 0.3, 2.2907, 9.0])
def test_normal_probability_keeps_its_digits_in_the_tail(z):
    assert normal_cdf(z) == pytest.approx(stats.norm.cdf(z), rel=1e-13)


@pytest.mark.parametrize("z", [-1e6, -40.0, -30.001, -29.999, -5.0, 0.0, 3.0])
def test_mills_ratio_equals_an_independent_library(z):
    independent = (2 / pi) ** 0.5 / erfcx(-z / 2**0.5)
    assert mills_ratio(z) == pytest.approx(independent, rel=1e-8)


@pytest.mark.parametrize("df", FREEDOM)
@pytest.mark.parametrize("probability", [0.0001, 0.025, 0.5, 0.8, 0.9, 0.95, 0.975, 0.999, 0.9999])
def test_student_quantile_equals_an_independent_library(probability, df):
    assert student_quantile(probability, df) == pytest.approx(
        stats.t.ppf(probability, df), rel=1e-9, abs=1e-12
    )


@pytest.mark.parametrize("df", [1, 2, 3, 8, 25, 600])
@pytest.mark.parametrize("t", [-300.0, -1.0, 0.0, 0.7, 12.706])
def test_student_probability_equals_an_independent_library(t, df):
    assert student_cdf(t, df) == pytest.approx(stats.t.cdf(t, df), abs=1e-14)


@pytest.mark.parametrize("probability", [0.0, 1.0, -1.0, float("nan")])
def test_certainty_is_refused(probability):
    with pytest.raises(ValueRefused, match="between 0 and 1"):
        normal_quantile(probability)
    with pytest.raises(ValueRefused, match="between 0 and 1"):
        student_quantile(probability, 5)


@pytest.mark.parametrize("use", [student_cdf, student_quantile])
def test_one_result_has_no_spread(use):
    with pytest.raises(ValueRefused, match="two or more"):
        use(0.9, 0)
