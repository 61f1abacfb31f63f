from dataclasses import replace
from fractions import Fraction as Rational

import pytest

from effluent.calc.wastestream import (
    Stream,
    StreamKind,
    combined_concentration,
    combined_mass,
    refuse_below_detection,
)
from effluent.errors import ValueRefused

PLATING = Stream(
    name="plating rinse",
    kind=StreamKind.REGULATED,
    flow=Rational(10_000),
    daily=Rational("0.69"),
    average=Rational("0.26"),
)
COOLING = Stream(name="cooling water", kind=StreamKind.DILUTION, flow=Rational(5_000))
WASH = Stream(name="wash water", kind=StreamKind.UNREGULATED, flow=Rational(5_000))


# Derived by hand from the formula of 40 CFR 403.6(e) with the cadmium limits of 433.15; no published answer
def test_dilution_lowers_the_limit_and_is_named():
    found = combined_concentration([PLATING, COOLING])
    assert (found.daily, found.average) == (Rational("0.46"), Rational("0.26") * 2 / 3)
    assert (found.regulated_flow, found.dilution_flow, found.total_flow) == (10_000, 5_000, 15_000)
    assert found.dilution == ("cooling water",)


def test_unregulated_stream_keeps_the_limit():
    assert combined_concentration([PLATING, WASH]).daily == Rational("0.69")


def test_regulated_streams_are_weighted_by_flow():
    other = replace(PLATING, name="strip rinse", flow=Rational(30_000), daily=Rational("0.11"), average=None)
    found = combined_concentration([PLATING, other])
    assert (found.daily, found.average) == (Rational("0.255"), None)


def test_mass_limits_grow_with_unregulated_flow_only():
    mass = replace(PLATING, daily=Rational(600), average=Rational(300))
    assert combined_mass([mass, COOLING]).daily == 600
    grown = combined_mass([mass, COOLING, WASH])
    assert (grown.daily, grown.average) == (900, 450)
    assert combined_mass([replace(mass, average=None), WASH]).average is None


@pytest.mark.parametrize("formula", [combined_concentration, combined_mass])
@pytest.mark.parametrize(
    ("streams", "text"),
    [
        ([COOLING], "none is regulated"),
        ([replace(PLATING, daily=None)], "needs its daily limit"),
        ([replace(PLATING, flow=Rational(0)), WASH], "and a flow"),
        ([PLATING, replace(WASH, flow=Rational(-1))], "never negative"),
    ],
)
def test_streams_that_give_no_limit_are_refused(formula, streams, text):
    with pytest.raises(ValueRefused, match=text):
        formula(streams)


def test_limit_below_the_detection_limit_is_refused():
    found = combined_concentration([PLATING, COOLING])
    refuse_below_detection(found, Rational("0.17"))
    refuse_below_detection(replace(found, average=None), Rational("0.46"))
    with pytest.raises(ValueRefused, match="before it is combined"):
        refuse_below_detection(found, Rational("0.18"))
    with pytest.raises(ValueRefused, match="alternative daily limit"):
        refuse_below_detection(found, Rational("0.47"))
