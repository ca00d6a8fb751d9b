"""Light on a robot that moves on with the year: sun and horizon of each stop."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from sunbot.inputs.site import Stop
from sunbot.light import ground_cautions, light_on_level, lights_on, sun_field, sun_over
from sunbot.sky.weather import Stay
from sunbot.types import Place

HILLS = ((0.0, 20.0), (180.0, 12.0))


@pytest.fixture(scope="module")
def half_year(make_weather):
    """A weather whose second half of the year is spent elsewhere, and which rows that is."""
    weather = make_weather()
    stay = (np.arange(8760) >= 4380).astype(np.int64)
    north = Place(66.0, 25.0, 100.0, weather.place.time_zone)
    return replace(weather, stays=(Stay(weather.place, HILLS), Stay(north, ())), stay=stay), stay == 1


def test_the_sun_is_seen_from_each_stop(half_year, make_weather):
    """Row by row the sun of a robot that stands there all year."""
    weather, moved = half_year
    along, home = sun_over(weather), sun_over(make_weather())
    away = sun_over(make_weather(latitude=66.0, longitude=25.0))
    for name in ("zenith_deg", "azimuth_deg", "lit", "extra_w_m2"):
        expected = np.where(moved, getattr(away, name), getattr(home, name))
        np.testing.assert_allclose(getattr(along, name), expected, rtol=1e-9, atol=1e-6)


@pytest.mark.parametrize("heading", ["fixed", "roams", "turns-to-sun"])
def test_the_horizon_is_that_of_each_stop(half_year, make_robot, heading):
    """A tilted deck gets, hour by hour, what it gets behind the hills, then what it gets in the open."""
    weather, moved = half_year
    sun = sun_over(weather)
    still = replace(weather, stays=(), stay=None)
    robot = {"heading": heading, "parked": "mean"}
    [along] = lights_on(make_robot(40.0, **robot), weather, sun)
    [behind] = lights_on(make_robot(40.0, horizon=HILLS, **robot), still, sun)
    [free] = lights_on(make_robot(40.0, **robot), still, sun)
    expected = np.where(moved[:, None], free.cells_w_m2, behind.cells_w_m2)
    np.testing.assert_allclose(along.cells_w_m2, expected, rtol=1e-9, atol=1e-9)
    level = light_on_level(make_robot(0.0).site, weather, sun)
    behind_level = light_on_level(make_robot(0.0, horizon=HILLS).site, still, sun)
    np.testing.assert_allclose(level, np.where(moved, weather.table["ghi"], behind_level), rtol=1e-9, atol=1e-9)


def test_a_lid_that_opens_steeply_sheds_the_snow(make_weather, make_robot):
    """Under snow it gives nothing while it is closed, and all of its light while it stands open."""
    snowed, bare = make_weather(snow_covered=np.ones(8760, dtype=bool)), make_weather()
    lid = make_robot({"tilt_deg": 0.0, "tilt_hours": [(12.0, 24.0, 60.0)]}, heading_deg=180.0)
    [under], [free] = lights_on(lid, snowed, sun_over(snowed)), lights_on(lid, bare, sun_over(bare))
    share = under.cells_w_m2.sum() / free.cells_w_m2.sum()
    assert 0.5 < share < 0.8  # the afternoon, and steeper towards the sun than the flat morning
    lit = free.cells_w_m2 > 0.0
    kept = under.cells_w_m2[lit] / free.cells_w_m2[lit]
    assert set(np.unique(kept.round(9))) <= {0.0, 0.5, 1.0}


@pytest.mark.parametrize(
    ("tilt_deg", "snow_days", "albedo", "told"),
    [
        (90.0, 20.0, 0.2, True),
        (90.0, 20.0, 0.65, False),
        (90.0, 3.0, 0.2, False),
        (90.0, None, 0.2, False),
        (10.0, 20.0, 0.2, False),
    ],
)
def test_bare_ground_under_snow_is_told_of_steep_panels(make_robot, tilt_deg, snow_days, albedo, told):
    """Where snow lies for long, the albedo is that of soil, and the panel sees the ground."""
    robot = make_robot(tilt_deg, snow_days=snow_days, albedo=albedo)
    assert [caution.code for caution in ground_cautions(robot)] == ["snow-albedo"] * told


def test_flanks_see_the_ground_and_a_flat_deck_does_not(make_robot, year):
    """White ground adds 0.5 x 0.45 of ghi to an upright plane, and nothing to a flat one."""
    weather, sun = year
    light = {}
    for albedo in (0.2, 0.65):
        flank, deck = lights_on(make_robot(90.0, 0.0, albedo=albedo), weather, sun)
        light[albedo] = flank.plane_w_m2.sum(), deck.plane_w_m2.sum()
    added = light[0.65][0] - light[0.2][0]
    assert added == pytest.approx(0.5 * 0.45 * weather.table["ghi"].sum(), rel=1e-3)
    assert light[0.65][1] == pytest.approx(light[0.2][1], rel=1e-12)


def test_the_hours_of_sun_are_those_of_each_stop(make_robot):
    """Day by day the field of a robot that stays at the stop, or at the site's coordinates with the stop's horizon."""
    stops = (
        Stop(start="03-01", latitude=52.0, longitude=13.0, horizon=HILLS),
        Stop(start="07-01", latitude=66.0, longitude=25.0),
    )
    along = sun_field(make_robot(20.0, stop=stops))
    behind = sun_field(make_robot(20.0, horizon=HILLS))
    site = make_robot(20.0).site.model_copy(update={"latitude": 66.0, "longitude": 25.0})
    north = sun_field(make_robot(20.0).model_copy(update={"site": site}))
    first = np.arange(59, 181)
    for name in ("up", "behind_horizon"):
        expected = getattr(north, name).copy()
        expected[first] = getattr(behind, name)[first]
        np.testing.assert_array_equal(getattr(along, name), expected)
