"""Statistics against published figures and independent libraries.

"Published" says where the figure stands; "from memory" that its page was not read here. Figures of the R
packages NADA 1.6-1.1 and EnvStats 3.1.0 were made by running them.
"""

from datetime import date, timedelta
from fractions import Fraction as Rational
from math import exp, log, sqrt
from statistics import fmean

import numpy as np
import pandas as pd
import pymannkendall
import pytest
from scipy import stats
from statsmodels.imputation.ros import impute_ros
from uncertainties import ufloat

from effluent.calc.confidence import land as land_limits
from effluent.calc.confidence import samples_needed, student
from effluent.calc.daily import Several, daily_value
from effluent.calc.decision import (
    DecisionRule,
    Guard,
    Part,
    Shared,
    acceptance_limit,
    blend,
    probability_met,
    risk_at_acceptance_limit,
)
from effluent.calc.land import land_h
from effluent.calc.lognormal import likelihood, regression
from effluent.calc.nondetect import Anchor, Minimum, kaplan_meier
from effluent.calc.observation import Observation, Substitution
from effluent.calc.quantile import normal_quantile, student_quantile
from effluent.calc.trend import Point, mann_kendall, sen_slope
from effluent.domain import Bound, Qualifier

# Helsel 2005, chapter 6: arsenic in ug/L, Manoa stream, Oahu; data of the R package NADA
OAHU = (
    [1.7, 3.2, 2.8, 0.7, 0.9, 0.5, 0.5, 0.5, 0.7, 0.6, 1.5],
    [1.0] * 4 + [2.0] * 8 + [0.9],
)
# Helsel, Cohn, Water Resources Research 24(12), 1988, appendix B
HELSEL_COHN = ([3.0, 7.0, 9.0, 12.0, 15.0, 20.0, 27.0, 33.0, 50.0], [1.0] * 6 + [10.0] * 3)
# Help page of `ros` in the R package NADA
ROS_HELP = ([0.5, 1.0, 5.0, 10.0, 100.0], [0.5, 1.5])
# Dissolved iron, Brazos, summer; data of the R package NADA
IRON = ([20.0, 7.0, 3.0], [10.0] * 4 + [3.0] * 2)
# EPA 1992, addendum, example 9: zinc in ug/L, 40 results, 20 of them below 7; data of the R package EnvStats
DETECTED_ZINC = (
    "11.41 10.00 15.00 13.70 11.56 10.50 12.59 12.85 14.20 9.36 "
    "12.00 11.69 10.90 12.22 11.05 13.24 11.15 13.31 12.35 8.74"
)
ZINC = ([float(value) for value in DETECTED_ZINC.split()], [7.0] * 20)
FEW = Minimum(detects=3)


# Means: EnvStats and NADA; of Oahu 0.949 also Helsel 2005, chapter 6, from memory
@pytest.mark.parametrize(
    ("data", "anchor", "mean", "sd"),
    [
        (OAHU, Anchor.LOWEST_LIMIT, 0.948958333, 0.713015970),
        (OAHU, Anchor.LOWEST_DETECT, 22.775 / 24, 0.713015970),
        (HELSEL_COHN, Anchor.LOWEST_LIMIT, 10.574074, 13.473708),
        (HELSEL_COHN, Anchor.LOWEST_DETECT, 11.462963, 12.864987),
        (ROS_HELP, Anchor.LOWEST_LIMIT, 16.809523810, 34.119703912),
        (IRON, Anchor.LOWEST_DETECT, 5.777777778, 5.286834335),
    ],
)
def test_kaplan_meier_equals_r(data, anchor, mean, sd):
    found = kaplan_meier(*data, anchor=anchor, minimum=FEW)
    assert (found.mean, found.sd) == pytest.approx((mean, sd), rel=1e-7)


# EnvStats and NADA. NADA prints 0.8068 as the standard deviation, which is the error times the root of n
@pytest.mark.parametrize(
    ("data", "error", "upper"),
    [(OAHU, 0.164688753, 1.231214), (HELSEL_COHN, 3.226041399, 17.075006)],
)
def test_kaplan_meier_error_and_limit_equal_r(data, error, upper):
    found = kaplan_meier(*data, anchor=Anchor.LOWEST_DETECT)
    assert found.standard_error == pytest.approx(error, rel=1e-8)
    assert found.upper_limit(0.95) == pytest.approx(upper, rel=1e-6)
    assert data is not OAHU or found.standard_error * sqrt(24) == pytest.approx(0.806806822, rel=1e-8)


# NADA, EnvStats and statsmodels agree to nine digits; Oahu 0.972/0.718 in Helsel 2005, chapter 6, from memory
@pytest.mark.parametrize(
    ("data", "mean", "sd"),
    [
        (OAHU, 0.972463242, 0.718012249),
        (HELSEL_COHN, 10.788166247, 13.681527726),
        (ROS_HELP, 16.689773047, 36.915441077),
        (IRON, 4.667483689, 6.138230194),
    ],
)
def test_regression_on_order_statistics_equals_r(data, mean, sd):
    found = regression(*data, minimum=FEW)
    assert (found.mean, found.sd) == pytest.approx((mean, sd), rel=1e-9)


# Helsel, Cohn 1988, appendix B: modelled values as published, to about one in the second place; read in the
# tests of statsmodels
def test_regression_gives_the_mean_of_the_published_modelled_values():
    modelled = [0.47, 0.85, 1.11, 1.27, 1.76, 2.34, 2.50, 3.00, 3.03, 4.80]
    published = [*(value for value in modelled if value != 3.00), *HELSEL_COHN[0]]
    assert regression(*HELSEL_COHN).mean == pytest.approx(fmean(published), abs=0.005)


# statsmodels, an independent library, on data of our own making
@pytest.mark.parametrize("seed", range(6))
def test_regression_equals_statsmodels(seed):
    values = np.random.default_rng(seed).lognormal(1.0, 0.8, size=25).round(3)
    limits = np.random.default_rng(seed + 100).choice([1.0, 2.0, 4.0], size=25)
    below = (values < limits) & (limits < values.max())
    table = pd.DataFrame({"value": np.where(below, limits, values), "below": below})
    independent = impute_ros("value", "below", df=table)
    found = regression(values[~below].tolist(), limits[below].tolist())
    assert (found.mean, found.sd) == pytest.approx((independent.mean(), independent.std(ddof=1)), rel=1e-9)


# NADA; Oahu 0.945/0.656 in Helsel 2005, chapter 6, from memory
@pytest.mark.parametrize(
    ("data", "mean", "sd"),
    [
        (OAHU, 0.945258517, 0.655926149),
        (ROS_HELP, 24.643421, 323.085120),
        (IRON, 5.211599197, 6.931667666),
        (HELSEL_COHN, 26.7239, 26.7239 * 11.7657),
    ],
)
def test_likelihood_equals_r(data, mean, sd):
    found = likelihood(*data, minimum=FEW)
    assert (found.mean, found.sd) == pytest.approx((mean, sd), rel=1e-5)


# scipy, an independent library; its search stops after about five digits
@pytest.mark.parametrize("data", [OAHU, HELSEL_COHN, ROS_HELP, ZINC])
def test_likelihood_equals_scipy(data):
    detects, limits = data
    censored = stats.CensoredData(uncensored=np.log(detects), left=np.log(limits))
    mu, sigma = stats.norm.fit(censored)
    assert likelihood(detects, limits).mean == pytest.approx(exp(mu + sigma**2 / 2), rel=1e-3)


# EPA 1992, addendum, example 9: 5.9455 with zeros is published; half and full recalculated by others
def test_zinc_spreads_from_zero_to_full():
    detects = [Observation(value=Rational(value)) for value in DETECTED_ZINC.split()]
    hidden = [Observation(value=Rational(7), qualifier=Qualifier.BELOW)] * 20
    means = [
        daily_value([*detects, *hidden], Several.MEAN, rule=rule, unit="ug/L")
        for rule in (Substitution.ZERO, Substitution.HALF, Substitution.FULL)
    ]
    assert [one.value for one in means] == [Rational("5.9455"), Rational("7.6955"), Rational("9.4455")]
    assert {(one.low, one.high) for one in means} == {(Rational("5.9455"), Rational("9.4455"))}


# EnvStats, on the same data: the methods lie as far apart as the substitutions
def test_zinc_estimates_equal_r():
    assert kaplan_meier(*ZINC).mean == pytest.approx(9.4455)
    assert kaplan_meier(*ZINC, anchor=Anchor.LOWEST_DETECT).mean == pytest.approx(10.3155)
    assert regression(*ZINC).mean == pytest.approx(10.041323, rel=1e-6)


# Average of five results in a state's guide to discharge monitoring reports: 5.896, reported as 5.90
def test_mean_of_a_monitoring_guide():
    results = [Observation(value=Rational(value)) for value in ("5.30", "6.21", "4.00", "5.25", "8.72")]
    found = daily_value(results, Several.MEAN, rule=Substitution.ZERO, unit="mg/L")
    assert found.value == Rational("5.896")


# California's rule on four results of our own; the answer is derived from the rule, not published
def test_median_rule_of_california_prefers_the_lower_of_the_middle_two():
    results = [
        Observation(value=Rational(value), qualifier=Qualifier(sign))
        for sign, value in (("=", "0.20"), ("<", "0.05"), ("=", "0.10"), ("<", "0.05"))
    ]
    found = daily_value(results, Several.MEAN, rule=Substitution.MEDIAN, unit="mg/L")
    assert (found.value, found.low, found.high) == (None, Rational("0.075"), Rational("0.1"))


# EPA 9285.7-081 (May 1992), highlights 7 and 8: chromium in mg/kg; printed 502 by H, with its table
# interpolated, and 325 by t, rounded; the exact figures stand in the help pages of EnvStats
CHROMIUM = [10, 13, 20, 36, 41, 59, 67, 110, 110, 136, 140, 160, 200, 230, 1300]


def test_limits_of_the_chromium_example_of_epa():
    assert land_limits(CHROMIUM, 0.95).upper == pytest.approx(496.6282, abs=1e-4)
    assert student(CHROMIUM, 0.95).upper == pytest.approx(320.3304, abs=1e-4)
    assert land_limits(CHROMIUM, 0.95).upper == pytest.approx(502, rel=0.015)
    assert student(CHROMIUM, 0.95).upper == pytest.approx(325, rel=0.015)


# A question and answer page on Land's procedure: 11.6 and 0.039, each one-sided 95 %, read off with a table
def test_land_limits_of_four_results():
    found = land_limits([0.043, 0.236, 0.057, 0.016], 0.95)
    assert (found.lower, found.upper) == pytest.approx((0.039, 11.6), rel=0.025)


SIZES = (3, 5, 7, 10, 12, 15, 21, 31, 51, 101)
# Gilbert 1987, table A12 (H for 0.95) and A10 (0.90), as made by EnvStats and recalled; its last figures at a
# deviation of 1.5 and more and 51 and more results are left out: there R is inexact, as scipy shows
H_95 = {
    0.1: (2.750, 2.035, 1.886, 1.802, 1.775, 1.749, 1.722, 1.701, 1.684, 1.670),
    0.5: (6.495, 2.947, 2.465, 2.220, 2.141, 2.068, 1.989, 1.928, 1.875, 1.830),
    1.0: (13.054, 4.905, 3.698, 3.103, 2.915, 2.744, 2.564, 2.424, 2.306, 2.205),
    2.0: (26.145, 9.387, 6.747, 5.396, 4.962, 4.564, 4.141, 3.811),
}
H_90 = {
    0.1: (1.686, 1.438, 1.381, 1.349, 1.338, 1.328, 1.317, 1.308, 1.301, 1.295),
    1.0: (5.955, 2.980, 2.450, 2.167, 2.073, 1.985, 1.889, 1.812, 1.745, 1.686),
}


@pytest.mark.parametrize(("probability", "table"), [(0.95, H_95), (0.90, H_90)])
def test_h_equals_the_printed_table(probability, table):
    for sd, printed in table.items():
        for count, h in zip(SIZES, printed, strict=False):
            assert land_h(sd, count, probability) == pytest.approx(h, abs=0.00051)


# 40 CFR 1065.602, table 1: Student t, two-sided 90 % and 95 %
@pytest.mark.parametrize(
    ("df", "ninety", "ninety_five"),
    [
        (1, "6.314", "12.706"),
        (5, "2.015", "2.571"),
        (10, "1.812", "2.228"),
        (15, "1.753", "2.131"),
        (30, "1.697", "2.042"),
        (100, "1.660", "1.984"),
    ],
)
def test_student_quantiles_of_a_federal_table(df, ninety, ninety_five):
    assert f"{student_quantile(0.95, df):.3f}" == ninety
    assert f"{student_quantile(0.975, df):.3f}" == ninety_five


# 40 CFR 1065.602(b), (c): 10.60, 11.91 and 11.09 have the mean 11.20 and the deviation 0.6619
def test_mean_and_deviation_of_a_federal_example():
    found = student([10.60, 11.91, 11.09], 0.95)
    assert (f"{found.mean:.2f}", f"{found.sd:.4f}") == ("11.20", "0.6619")


# SW-846, chapter nine, table 9-2: t with one tail of 0.10, from memory
@pytest.mark.parametrize(
    ("df", "t"), [(1, "3.078"), (2, "1.886"), (3, "1.638"), (8, "1.397"), (20, "1.325"), (30, "1.310")]
)
def test_student_quantiles_of_chapter_nine(df, t):
    assert f"{student_quantile(0.9, df):.3f}" == t


# EPA QA/G-9, box on the one-sample t-test, from memory: mean 99.38, deviation 10.41, t = 1.26 below 1.397,
# so that a mean of at most 95 is not rejected: the lower limit lies below 95
def test_one_sample_example_of_epa():
    found = student([82.39, 103.46, 104.93, 105.52, 98.37, 113.23, 86.62, 91.72, 108.21], 0.9)
    assert (f"{found.mean:.2f}", f"{found.sd:.3f}") == ("99.38", "10.405")
    assert f"{(found.mean - 95) / (found.sd / 3):.2f}" == "1.26"
    assert found.lower < 95


# SW-846, chapter nine, form n = t^2 s^2 / D^2 (from memory), with t = 1.638 for four results; figures our own
def test_samples_needed_in_the_form_of_chapter_nine():
    assert samples_needed(90.0, 12.0, 4, limit=100.0) == 4  # 1.638^2 x 144 / 100 = 3.86
    assert samples_needed(95.0, 12.0, 4, limit=100.0) == 16  # 15.45


def series(times, values):
    """Make points at times in years of a thousand days each."""
    days = [date(1900, 1, 1) + timedelta(days=round(time * 1000)) for time in times]
    return [Point(day=day, low=value, high=value) for day, value in zip(days, values, strict=True)]


# EPA 530/R-09-007 (2009), example 17-7, sodium in ppm; figures as quoted in the help pages of EnvStats
def test_trend_of_the_sodium_example_of_epa():
    times = [89.6, 90.1, 90.8, 91.1, 92.1, 93.1, 94.1, 95.6, 96.1, 96.3]
    points = series(times, [56.0, 53.0, 51.0, 55.0, 52.0, 60.0, 62.0, 59.0, 61.0, 63.0])
    found, slope = mann_kendall(points), sen_slope(points)
    assert (found.s, found.variance) == (25, 125.0)
    assert (found.z, found.normal_p) == pytest.approx((2.146625, 0.03182313), rel=1e-6)
    assert slope.low * 1000 == pytest.approx(1.333333, rel=1e-6)
    assert (slope.lower * 1000, slope.upper * 1000) == pytest.approx((0.3992083, 2.333333), rel=1e-6)


# EPA QA/G-9 and Gilbert 1987, table A18, from memory: 5, 6, 11, 8, 10 give S = 6, one-sided 0.117
def test_exact_probability_of_a_short_series():
    found = mann_kendall(series(range(5), [5.0, 6.0, 11.0, 8.0, 10.0]))
    assert found.s == 6
    assert f"{found.exact_p / 2:.3f}" == "0.117"


# Kendall's exact distribution, one-sided, from memory and enumerated
@pytest.mark.parametrize(
    ("order", "s", "one_sided"),
    [
        ([1, 2, 3, 4], 6, 0.0417),
        ([1, 2, 4, 3], 4, 0.1667),
        ([1, 2, 3, 4, 5], 10, 0.0083),
        ([2, 1, 3, 4, 5, 6, 7], 19, 0.0014),
    ],
)
def test_exact_probabilities_of_the_printed_table(order, s, one_sided):
    found = mann_kendall(series(range(len(order)), [float(value) for value in order]))
    assert found.s == s
    assert found.exact_p / 2 == pytest.approx(one_sided, abs=5.1e-5)


# pymannkendall and scipy, independent libraries, on data with ties
@pytest.mark.parametrize("seed", range(5))
def test_trend_equals_independent_libraries(seed):
    values = np.random.default_rng(seed).integers(0, 12, size=20).astype(float)
    points = series([n / 1000 for n in range(20)], values.tolist())
    found, other = mann_kendall(points), pymannkendall.original_test(values)
    assert (found.s, found.variance) == pytest.approx((other.s, other.var_s))
    assert (found.z, found.normal_p) == pytest.approx((other.z, other.p))
    assert sen_slope(points).low == pytest.approx(stats.theilslopes(values, np.arange(20.0)).slope)


@pytest.mark.parametrize("seed", range(5))
def test_exact_probability_equals_scipy(seed):
    values = np.random.default_rng(seed).permutation(9).astype(float)
    found = mann_kendall(series([n / 1000 for n in range(9)], values.tolist()))
    assert found.exact_p == pytest.approx(stats.kendalltau(np.arange(9), values, method="exact").pvalue)


# JCGM 106:2012, 7.3, from memory: burst strength 509.7 kPa, u = 8.6 kPa, at least 490 kPa: 0.99
def test_probability_of_the_burst_strength_example():
    assert probability_met(509.7, 2 * 8.6, 490.0, bound=Bound.MINIMUM) == pytest.approx(0.99, abs=0.002)


# JCGM 106:2012, table 1, from memory
@pytest.mark.parametrize(
    ("p", "z"), [(0.80, "0.84"), (0.90, "1.28"), (0.95, "1.64"), (0.99, "2.33"), (0.999, "3.09")]
)
def test_normal_quantiles_of_the_guide(p, z):
    assert f"{normal_quantile(p):.2f}" == z


# JCGM 106:2012, 8.3.3, from memory: limit 100 km/h, u = 2 km/h, w = 3.09 u, so 99.9 % sure above 106.2
def test_guarded_rejection_of_the_radar_example():
    guard = Guard(rule=DecisionRule.GUARDED_REJECTION, multiple=Rational("3.09") / 2)
    edge = acceptance_limit(Rational(100), Rational(4), guard)
    assert edge == Rational("106.18")
    assert probability_met(float(edge), 4.0, 100.0) == pytest.approx(0.001, rel=0.01)


# ILAC-G8:09/2019, table of guard bands w = rU, as restated in secondary texts: risks below 1 ppm, 0.16 %,
# 2.5 %, 5 % and 50 %
@pytest.mark.parametrize(
    ("multiple", "below", "computed"),
    [
        ("3", 1e-6, 9.87e-10),
        ("1.5", 0.0016, 0.001350),
        ("1", 0.025, 0.022750),
        ("0.83", 0.05, 0.048457),
    ],
)
def test_risks_of_the_guard_bands_of_ilac(multiple, below, computed):
    guard = Guard(rule=DecisionRule.GUARDED_ACCEPTANCE, multiple=Rational(multiple))
    assert risk_at_acceptance_limit(guard) == pytest.approx(computed, rel=1e-3)
    assert risk_at_acceptance_limit(guard) < below


# The `uncertainties` package: independent, and with one common error of the concentrations
def test_blend_equals_an_independent_library():
    figures = [(120.0, 2.4, 3.2, 0.32), (30.0, 0.6, 11.5, 1.15)]
    parts = [
        Part(
            volume=Rational(str(v)),
            volume_spread=Rational(str(uv)),
            concentration=Rational(str(c)),
            concentration_spread=Rational(str(uc)),
        )
        for v, uv, c, uc in figures
    ]
    volumes = [ufloat(v, uv) for v, uv, _, _ in figures]
    common = ufloat(0, 1)
    for shared, errors in ((Shared.NONE, [ufloat(0, 1), ufloat(0, 1)]), (Shared.ALL, [common, common])):
        readings = [c + uc * error for (_, _, c, uc), error in zip(figures, errors, strict=True)]
        independent = sum(v * c for v, c in zip(volumes, readings, strict=True)) / sum(volumes)
        found = blend(parts, shared=shared)
        assert float(found.concentration) == pytest.approx(independent.nominal_value)
        assert found.spread == pytest.approx(independent.std_dev)


def test_logarithms_of_the_chromium_example_are_those_printed():
    logs = [log(value) for value in CHROMIUM]
    found = student(logs, 0.95)
    assert (found.mean, found.sd) == pytest.approx((4.378636, 1.246779), rel=1e-6)
