"""Headings and lids that change by the hours of the local clock."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.calendar import local_clock, standard_clock
from sunbot.inputs.robot import Panel
from sunbot.light import lights_on


def light_w_m2(robot, weather, sun):
    """Light on the cells of the first panel, mean over headings [W/m2]."""
    [light] = lights_on(robot, weather, sun)
    np.testing.assert_allclose(np.broadcast_to(light.weight, light.cells_w_m2.shape).sum(axis=1), 1.0, atol=1e-12)
    return (light.cells_w_m2 * light.weight).sum(axis=1)


def before_noon(weather):
    """Steps whose middle lies before 12 on the wall clock."""
    return local_clock(weather.ref_times, weather.place.time_zone, reference=True).hour < 12.0


def test_a_heading_by_hours_is_each_fixed_heading_in_its_hours(make_robot, year):
    """East until noon and west from then on gives, hour by hour, what the two fixed robots get."""
    weather, sun = year
    rows = [(0.0, 12.0, "fixed", 90.0), (12.0, 24.0, "fixed", 270.0)]
    both = light_w_m2(make_robot(40.0, headings=rows), weather, sun)
    east, west = (light_w_m2(make_robot(40.0, heading_deg=h), weather, sun) for h in (90.0, 270.0))
    np.testing.assert_allclose(both, np.where(before_noon(weather), east, west), atol=1e-9)


def test_hours_not_named_follow_the_heading_of_the_robot(make_robot, year):
    """The rest of the day keeps ``heading``."""
    weather, sun = year
    robot = make_robot(40.0, heading_deg=180.0, headings=[(0.0, 12.0, "fixed", 90.0)])
    east, south = (light_w_m2(make_robot(40.0, heading_deg=h), weather, sun) for h in (90.0, 180.0))
    expected = np.where(before_noon(weather), east, south)
    np.testing.assert_allclose(light_w_m2(robot, weather, sun), expected, atol=1e-9)


def test_turning_to_the_sun_when_parked_beats_any_other_way_to_park(make_robot, year):
    """Each month a roaming robot that faces the sun while it stands gets more than one left at random."""
    weather, sun = year
    month = standard_clock(weather.times, weather.place.time_zone).month
    monthly = {
        parked: np.bincount(month, light_w_m2(make_robot(30.0, heading="roams", parked=parked), weather, sun))[1:]
        for parked in ("to-sun", "random", "mean", "worst")
    }
    for parked in ("random", "mean", "worst"):
        assert (monthly["to-sun"] > monthly[parked]).all(), parked


def test_a_folding_lid_is_each_tilt_in_its_hours(make_robot, year):
    """Flat until noon, upright from then on."""
    weather, sun = year
    lid = {"tilt_deg": 0.0, "tilt_hours": [(12.0, 24.0, 60.0)]}
    folding = light_w_m2(make_robot(lid, heading_deg=180.0), weather, sun)
    flat, up = (light_w_m2(make_robot(tilt, heading_deg=180.0), weather, sun) for tilt in (0.0, 60.0))
    np.testing.assert_allclose(folding, np.where(before_noon(weather), flat, up), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize(
    ("rows", "message"),
    [
        ([[0, 9, "fixed"]], "does not say where the nose points"),
        ([[0, 9, "roams", 30]], 'only "fixed" has'),
        ([[0, 9, "fixed", 90], [8, 12, "roams"]], "overlap"),
        ([[22, 6, "roams"]], "run forward"),
        ([[0, 25, "roams"]], "outside the day"),
    ],
)
def test_wrong_headings_by_hours_are_told(make_robot, rows, message):
    """Each names what is wrong and what to write."""
    with pytest.raises(ValueError, match=message):
        make_robot(10.0, headings=rows)


def test_a_tilt_past_upright_is_no_tilt():
    """The lid's tilt keeps to 0 to 90 by hours too."""
    with pytest.raises(ValueError, match="less than or equal to 90"):
        Panel(name="lid", watts=10.0, tilt_deg=0.0, tilt_hours=[(8.0, 17.0, 120.0)])
