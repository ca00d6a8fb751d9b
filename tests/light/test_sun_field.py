"""When the sun is up, and what stands before it."""

import numpy as np
import pytest

from sunbot.inputs.robot import Robot
from sunbot.inputs.site import Site
from sunbot.light import sun_field


def robot_at(latitude, *, horizon=(), obstructions=(), heading="fixed", bypass_groups=1):
    """A flat panel somewhere on the meridian of its own clock."""
    site = Site(name="Invented", latitude=latitude, longitude=0.0, time_zone="UTC", horizon=horizon)
    panel = {"name": "deck", "watts": 20.0, "vmp_v": 18.0, "tilt_deg": 0.0, "obstructions": obstructions}
    return Robot(
        name="r",
        site=site,
        heading=heading,
        panel=[panel | {"bypass_groups": bypass_groups}],
        battery={"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 10.0},
        rail=[{"name": "logic", "kind": "step-down", "volts": 5.0}],
        load=[{"name": "computer", "rail": "logic", "watts": 1.0}],
    )


@pytest.mark.parametrize("latitude", [0.0, 46.0, -60.0])
def test_day_length_agrees_with_the_sunrise_equation(latitude):
    """Hours with the sun up, day by day, are those of cos w = -tan(latitude) tan(declination)."""
    # Published: Cooper, Solar Energy 12 (1969) 333, declination 23.45 deg sin(360 (284 + n) / 365).
    declination = np.radians(23.45 * np.sin(2 * np.pi * (284 + np.arange(1, 366)) / 365))
    # The sun counts as up from 0.57 deg below the horizon, where refraction lifts it to it.
    cos_w = (np.sin(np.radians(-0.57)) - np.sin(np.radians(latitude)) * np.sin(declination)) / (
        np.cos(np.radians(latitude)) * np.cos(declination)
    )
    hours = sun_field(robot_at(latitude)).up.sum(axis=1) / 6.0
    # 0.4 h: steps of 10 minutes at both ends, and half a degree of error in that declination.
    assert hours == pytest.approx(2.0 * np.degrees(np.arccos(cos_w)) / 15.0, abs=0.4)


def test_the_sun_is_highest_near_noon_of_the_clock():
    """On the clock's own meridian the day is centred on 12, to the equation of time (16 min) and a step."""
    field = sun_field(robot_at(46.0))
    centre = (field.up * field.hour).sum(axis=1) / field.up.sum(axis=1)
    assert np.abs(centre - 12.0).max() < (16.5 + 5.0) / 60.0


def test_a_horizon_all_round_takes_the_hours_below_it():
    """Walls to the zenith take all sun; 10 deg all round take what a lower one took and more."""
    everything = sun_field(robot_at(46.0, horizon=[[0, 89.9]]))
    assert (everything.behind_horizon == everything.up).all()
    low, high = (sun_field(robot_at(46.0, horizon=[[0, angle]])) for angle in (5, 10))
    assert (high.behind_horizon >= low.behind_horizon).all()
    assert not sun_field(robot_at(46.0)).behind_horizon.any()
    lost = low.hours_a_day(low.behind_horizon)
    # At the equinox the sun climbs 15 deg cos(latitude) an hour: 5 deg take 0.48 h at both ends of the day.
    assert lost[2] == pytest.approx(2 * 5.0 / (15.0 * np.cos(np.radians(46.0))), abs=0.15)


def test_what_stands_on_the_robot_takes_its_share():
    """All round to the zenith: all; a fixed mast to the south at noon only; one of two groups: half."""
    round_about = sun_field(robot_at(46.0, obstructions=[[0, 360, 90]]))
    assert (round_about.behind_robot == round_about.up).all()
    mast = sun_field(robot_at(46.0, obstructions=[[170, 190, 80]]))
    winter = mast.behind_robot[0]
    assert winter[np.abs(mast.hour - 12.05) < 0.3].min() == 1.0
    assert winter[(mast.hour < 11) | (mast.hour > 13)].max() == 0.0
    halved = sun_field(robot_at(46.0, obstructions=[[170, 190, 80]], bypass_groups=2))
    assert halved.behind_robot == pytest.approx(mast.behind_robot / 2)


def test_a_roaming_robot_meets_its_mast_from_all_sides():
    """A mast over 36 of 360 deg that hides any sun takes one or two of 16 headings at every instant."""
    field = sun_field(robot_at(46.0, obstructions=[[0, 36, 90]], heading="roams"))
    shares = set(np.unique(field.behind_robot[field.up]).tolist())
    assert shares <= {1 / 16, 2 / 16}
    assert field.behind_robot[field.up].mean() == pytest.approx(0.1, abs=0.01)
    assert field.behind_robot[~field.up].max() == 0.0
