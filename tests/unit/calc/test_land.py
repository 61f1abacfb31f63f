from math import asin, cos, exp, inf, log, pi, sin, sqrt

import pytest
from scipy.integrate import quad
from scipy.optimize import brentq

from effluent.calc.land import land_h, land_log_mean
from effluent.errors import ValueRefused


def share(observed, sd, count):
    """The same probability, integrated by an independent library."""
    scale = sqrt(observed**2 + (count - 1) * sd**2 / count)
    half, power = count * scale / 2, count - 2
    peak = asin((power - sqrt(power**2 + 4 * half**2)) / (2 * half))

    def height(t):
        return power * log(cos(t)) - half * sin(t) if abs(t) < pi / 2 else -inf

    def density(t):
        return exp(height(t) - height(peak))

    edge = asin(observed / scale)
    below = quad(density, -pi / 2, edge, epsabs=0, epsrel=1e-11, limit=500)[0]
    return below / (below + quad(density, edge, pi / 2, epsabs=0, epsrel=1e-11, limit=500)[0])


@pytest.mark.parametrize("probability", [0.05, 0.9, 0.95])
@pytest.mark.parametrize(("sd", "count"), [(0.1, 3), (0.1, 15), (1.0, 10), (1.5, 51), (3.0, 3)])
def test_limit_equals_that_of_an_independent_library(sd, count, probability):
    centre = sd**2 / 2
    expected = brentq(
        lambda trial: share(-trial, sd, count) - (1 - probability),
        centre - 4 * sd,
        centre + 40 * sd,
        xtol=1e-13,
    )
    assert land_log_mean(0.0, sd, count, probability) == pytest.approx(expected, rel=1e-9)


def test_limit_moves_with_the_mean_of_the_logarithms():
    assert land_log_mean(5.0, 1.0, 8, 0.95) - 5 == pytest.approx(land_log_mean(0.0, 1.0, 8, 0.95))


@pytest.mark.parametrize("count", [3, 1000, 10**5])
@pytest.mark.parametrize("sd", [1e-9, 20.0])
def test_factor_is_finite_at_the_ends_of_its_range(sd, count):
    assert 1 < land_h(sd, count, 0.95) < 300


@pytest.mark.parametrize(
    ("sd", "count", "probability", "text"),
    [
        (1.0, 2, 0.95, "three or more"),
        (0.0, 5, 0.95, "above 0 and up to 20"),
        (20.1, 5, 0.95, "above 0 and up to 20"),
        (1.0, 5, 1.0, "between 0 and 1"),
    ],
)
def test_what_has_no_limit_is_refused(sd, count, probability, text):
    with pytest.raises(ValueRefused, match=text):
        land_h(sd, count, probability)
