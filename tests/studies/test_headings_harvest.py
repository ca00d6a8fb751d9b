"""What each way to hold the nose harvests, in a real typical year, through an mppt controller."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.robot import Battery, Load, Panel, Rail, Robot
from sunbot.inputs.site import Site, WeatherSource
from sunbot.sky import weather_for
from sunbot.studies.chain import Chain

NOSES_DEG = np.arange(0.0, 360.0, 22.5)
# A typical year that pvlib ships, of Greensboro, North Carolina.
PLACE = Site(
    name="Greensboro",
    latitude=36.1,
    longitude=-79.95,
    altitude_m=273.0,
    time_zone="America/New_York",
    weather=WeatherSource(source="file", file="pvlib-data:723170TYA.CSV"),
)


@pytest.fixture(scope="module")
def chain():
    return Chain(weather_for(PLACE))


def robot(tilt_deg, **ways):
    panel = Panel(name="deck", watts=40.0, vmp_v=18.0, imp_a=2.22, voc_v=21.8, isc_a=2.35, tilt_deg=tilt_deg)
    return Robot.model_validate(
        {
            "name": "invented",
            "site": PLACE,
            "panel": (panel,),
            "battery": Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12.0),
            "rail": (Rail(name="bus", kind="none"),),
            "load": (Load(name="drive", rail="bus", watts=20.0, hours=((9.0, 15.5),), moves=True),),
            **ways,
        }
    )


def monthly_wh(chain, robot):
    """Harvest offered at the battery in each month [Wh]."""
    offer_w = chain.supply(robot, accounts=False).offer_w[:, 0, :].mean(axis=-1)
    return np.bincount(chain.months, weights=offer_w, minlength=13)[1:]


@pytest.fixture(scope="module")
def fixed_wh(chain):
    """Harvest of a deck at 30 deg under each of 16 fixed headings, (16, 12)."""
    return np.array([monthly_wh(chain, robot(30.0, heading_deg=float(nose))) for nose in NOSES_DEG])


WAYS = [
    {"heading": "fixed", "heading_deg": 77.0},
    {"heading": "turns-to-sun"},
    *({"heading": "roams", "parked": parked} for parked in ("random", "mean", "worst", "to-sun")),
    {"headings": [[0.0, 9.0, "fixed", 135.0], [9.0, 16.0, "roams"], [16.0, 24.0, "turns-to-sun"]]},
]


@pytest.mark.parametrize("ways", WAYS, ids=str)
def test_a_flat_deck_harvests_the_same_whichever_way_it_points(chain, ways):
    """To the last digit, in every month."""
    np.testing.assert_array_equal(monthly_wh(chain, robot(0.0, **ways)), monthly_wh(chain, robot(0.0)))


@pytest.mark.parametrize("parked", ["random", "mean", "worst"])
def test_roaming_harvests_between_the_best_and_the_worst_fixed_heading(chain, fixed_wh, parked):
    """In every month; with every heading alike it is the mean of the harvests, not of the light."""
    wh = monthly_wh(chain, robot(30.0, heading="roams", parked=parked))
    assert (wh < fixed_wh.max(axis=0)).all()
    assert (wh > fixed_wh.min(axis=0)).all()
    if parked == "mean":
        np.testing.assert_allclose(wh, fixed_wh.mean(axis=0), rtol=1e-9)


def test_turning_to_the_sun_harvests_as_much_as_any_fixed_heading(chain, fixed_wh):
    """In every month, to 0.1 %, and clearly more than the best of them over the year."""
    turning_wh = monthly_wh(chain, robot(30.0, heading="turns-to-sun"))
    assert (turning_wh >= 0.999 * fixed_wh.max(axis=0)).all()
    assert turning_wh.sum() > 1.03 * fixed_wh.sum(axis=1).max()


def test_facing_the_sun_when_parked_lies_between_roaming_and_turning_always(chain):
    """In every month: it turns, but not while it works."""
    turning, parked, roaming = (
        monthly_wh(chain, robot(30.0, **ways))
        for ways in (
            {"heading": "turns-to-sun"},
            {"heading": "roams", "parked": "to-sun"},
            {"heading": "roams", "parked": "mean"},
        )
    )
    assert (roaming < parked).all()
    assert (parked < turning).all()


@pytest.mark.parametrize("first", ["to-sun", "worst"])
def test_what_the_chain_keeps_does_not_change_an_answer(first):
    """Harvest parked one way after another is the one of a chain that never saw the other."""
    weather = weather_for(PLACE)
    one, other = robot(30.0, heading="roams", parked=first), robot(30.0, heading="roams", parked="random")
    used = Chain(weather)
    used.lights(one)
    np.testing.assert_allclose(monthly_wh(used, other), monthly_wh(Chain(weather), other), rtol=1e-12)
    back = Chain(weather)
    back.lights(other)
    np.testing.assert_allclose(monthly_wh(back, one), monthly_wh(Chain(weather), one), rtol=1e-12)
