"""The light on a robot's panels, all stages together."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.window import Terrain
from sunbot.light import lights_on, sun_over
from sunbot.light.glass import diffuse_pass


def only(robot, weather, sun):
    [light] = lights_on(robot, weather, sun)
    return light


def test_a_level_plane_returns_what_falls_on_the_level(make_robot, year):
    """Flat in the open the plane gets the ghi of every step back."""
    weather, sun = year
    plane, ghi = only(make_robot(0.0), weather, sun).plane_w_m2[:, 0], weather.table["ghi"].to_numpy()
    np.testing.assert_allclose(plane, ghi, atol=1e-9)


def test_night_is_dark_and_no_light_is_negative(make_robot, year):
    """Where ghi is 0 the cells get 0; nowhere less; nothing is NaN."""
    weather, sun = year
    robot = make_robot(90.0, 35.0, heading="roams", horizon=((0.0, 5.0), (180.0, 25.0)))
    night = weather.table["ghi"].to_numpy() == 0.0
    for light in lights_on(robot, weather, sun):
        for values in (light.plane_w_m2, light.cells_w_m2):
            assert np.isfinite(values).all()
            assert (values >= 0.0).all()
            assert not values[night].any()
        assert (light.cells_w_m2 <= light.plane_w_m2 + 1e-12).all()


def test_behind_hills_to_the_zenith_it_is_dark(make_robot, year):
    """A horizon of 90 deg all round leaves nothing, not even light from the ground."""
    weather, sun = year
    light = only(make_robot(70.0, horizon=((0.0, 90.0),)), weather, sun)
    assert light.plane_w_m2.max() == pytest.approx(0.0, abs=1e-9)
    assert light.yearly.angle > 0.0


def test_a_hill_takes_the_beam_while_the_sun_is_behind_it(make_robot, year):
    """A horizon of 30 deg in the south-west leaves only diffuse light in those hours, and all beam in the others."""
    weather, sun = year
    hill = ((179.0, 0.0), (180.0, 30.0), (270.0, 30.0), (271.0, 0.0))
    free, shaded = (only(make_robot(30.0, heading_deg=180.0, horizon=h), weather, sun) for h in ((), hill))
    behind = (sun.azimuth_deg > 180.0) & (sun.azimuth_deg < 270.0) & (sun.zenith_deg > 60.0) & (sun.lit > 0.0)
    clear_of_it = (sun.azimuth_deg < 179.0) | (sun.azimuth_deg > 271.0)
    clear_of_it &= sun.lit > 0.0
    dhi = weather.table["dhi"].to_numpy()
    assert (shaded.plane_w_m2[behind, 0] <= dhi[behind] * 1.05).all()
    lost = free.plane_w_m2 - shaded.plane_w_m2
    # the hill hides the lower sky and the bright band of a quarter turn all day
    assert (lost[clear_of_it, 0] <= 0.3 * dhi[clear_of_it] + 1e-9).all()
    assert shaded.yearly.horizon < 0.97 * shaded.yearly.angle


def test_a_mast_turns_with_the_robot(make_robot, year):
    """A flat panel with a mast to the right, heading south, sees what one with the mast ahead sees heading west."""
    weather, sun = year
    right = {"tilt_deg": 0.0, "obstructions": ((80.0, 100.0, 50.0),)}
    ahead = {"tilt_deg": 0.0, "obstructions": ((-10.0, 10.0, 50.0),)}
    one = only(make_robot(right, heading_deg=180.0), weather, sun)
    other = only(make_robot(ahead, heading_deg=270.0), weather, sun)
    np.testing.assert_allclose(one.cells_w_m2, other.cells_w_m2, atol=1e-9)
    assert one.yearly.horizon < one.yearly.angle
    roaming = only(make_robot(right, heading="roams"), weather, sun)
    assert roaming.cells_w_m2.shape[1] == 16  # a mast makes the heading of a flat panel matter


def test_a_mast_costs_a_turning_robot_what_it_costs_at_that_heading(make_robot, year):
    """Diffuse shares read from the table of headings agree with those worked out for the heading itself."""
    weather, sun = year
    panel = {"tilt_deg": 30.0, "obstructions": ((90.0, 130.0, 60.0),)}
    hills = {"horizon": ((0.0, 5.0), (200.0, 35.0))}
    turning = only(make_robot(panel, heading="turns-to-sun", **hills), weather, sun)
    row = int(np.flatnonzero(sun.lit == 1.0)[2000])
    fixed = only(make_robot(panel, heading_deg=float(sun.azimuth_deg[row]), **hills), weather, sun)
    assert turning.plane_w_m2[row, 0] == pytest.approx(fixed.plane_w_m2[row, 0], rel=1e-3)


def test_more_bypass_groups_never_harm(make_robot, year):
    """The more groups a panel has, the less a mast takes."""
    weather, sun = year
    mast = {"tilt_deg": 20.0, "obstructions": ((160.0, 200.0, 60.0),)}
    one, three, nine = (only(make_robot(mast | {"bypass_groups": n}), weather, sun) for n in (1, 3, 9))
    assert (one.cells_w_m2 <= three.cells_w_m2).all()
    assert one.yearly.snow < three.yearly.snow < nine.yearly.snow < nine.yearly.angle


def test_a_slope_tilts_the_deck(make_robot, year):
    """Flat on a slope to the south is a panel tilted south, whichever way the nose points."""
    weather, sun = year
    robot = make_robot(0.0, heading="roams")
    terrain = Terrain(slope_deg=20.0, aspect_deg=180.0)
    hill = robot.model_copy(update={"site": robot.site.model_copy(update={"terrain": terrain})})
    on_hill, tilted = only(hill, weather, sun), only(make_robot(20.0, heading_deg=180.0), weather, sun)
    assert on_hill.cells_w_m2.shape[1] == 1
    np.testing.assert_allclose(on_hill.cells_w_m2, tilted.cells_w_m2, atol=1e-9)


def test_snow_buries_flat_panels_only(make_robot, make_weather):
    """While snow lies a flat panel gives nothing, a steep one what it gives without; the plane's own light stays."""
    covered = np.zeros(8760, dtype=bool)
    covered[:1000] = True
    snowy, bare = make_weather(snow_covered=covered), make_weather()
    sun = sun_over(bare)
    flat, steep = lights_on(make_robot(10.0, 60.0), snowy, sun)
    flat_bare, steep_bare = lights_on(make_robot(10.0, 60.0), bare, sun)
    assert not flat.cells_w_m2[covered].any()
    np.testing.assert_array_equal(flat.cells_w_m2[~covered], flat_bare.cells_w_m2[~covered])
    np.testing.assert_array_equal(flat.plane_w_m2, flat_bare.plane_w_m2)
    np.testing.assert_array_equal(steep.cells_w_m2, steep_bare.cells_w_m2)
    assert flat.yearly.snow < flat.yearly.dirt == flat_bare.yearly.dirt


def test_the_yearly_stages_follow_the_light(make_robot, make_weather):
    """Each stage takes something and its last is what the cells get, mean over years and headings."""
    weather = make_weather(2)
    robot = make_robot(35.0, heading="roams", horizon=((0.0, 10.0),))
    light = only(robot, weather, sun_over(weather))
    stages = light.yearly
    assert stages.angle > stages.horizon > stages.glass > stages.dirt == stages.snow > 0.0
    assert stages.level == pytest.approx(weather.table["ghi"].sum() / 2)
    # tables of many headings are in single precision, 6e-8 of a value
    plane, cells = ((table * light.weight).sum(dtype=np.float64) for table in (light.plane_w_m2, light.cells_w_m2))
    assert stages.horizon == pytest.approx(plane / 2, rel=1e-7)
    assert stages.snow == pytest.approx(cells / 2, rel=1e-7)
    assert stages.dirt == pytest.approx(0.97 * stages.glass)


def test_albedo_counts_by_month(make_robot, year):
    """Snow on the ground in January lights a wall in January only."""
    weather, sun = year
    plain = only(make_robot(90.0), weather, sun).plane_w_m2[:, 0]
    white = only(make_robot(90.0, albedo=(0.7,) + (0.2,) * 11), weather, sun).plane_w_m2[:, 0]
    january = weather.times.tz_convert("Etc/GMT-1").month == 1
    np.testing.assert_array_equal(plain[~january], white[~january])
    gain = 0.5 * 0.5 * weather.table["ghi"].to_numpy()[january]
    np.testing.assert_allclose(white[january] - plain[january], gain, atol=1e-9)


def test_under_an_overcast_sky_the_glass_passes_what_it_passes_of_the_sky(make_robot, make_weather):
    """With diffuse light alone a flat panel's cells get the sky's share through glass and dirt."""
    weather = make_weather()
    weather.table["dni"] = 0.0
    weather.table["ghi"] = weather.table["dhi"]
    light = only(make_robot({"tilt_deg": 0.0, "dirt_loss": 0.1}), weather, sun_over(weather))
    share = light.cells_w_m2.sum() / light.plane_w_m2.sum()
    # the sky model calls a little of the brightest overcast light circumsolar
    assert share == pytest.approx(0.9 * diffuse_pass(0.0).sky, rel=0.02)


def test_a_slope_adds_to_the_tilt_of_the_panel_heading_by_heading(make_robot, year):
    """Tilted 20 deg on a southern slope of 20 deg: facing downhill it is a 40 deg panel, facing uphill a flat one."""
    weather, sun = year
    terrain = Terrain(slope_deg=20.0, aspect_deg=180.0)
    light = only(make_robot(20.0, heading="roams", terrain=terrain), weather, sun)
    steep, flat = only(make_robot(40.0, heading_deg=180.0), weather, sun), only(make_robot(0.0), weather, sun)
    np.testing.assert_allclose(light.plane_w_m2[:, 8], steep.plane_w_m2[:, 0], atol=1e-9)
    np.testing.assert_allclose(light.plane_w_m2[:, 0], flat.plane_w_m2[:, 0], atol=1e-9)
    turning = only(make_robot(20.0, heading="turns-to-sun", terrain=terrain), weather, sun)
    row = int(np.flatnonzero(sun.lit == 1.0)[1500])
    fixed = only(make_robot(20.0, heading_deg=float(sun.azimuth_deg[row]), terrain=terrain), weather, sun)
    assert turning.cells_w_m2[row, 0] == pytest.approx(fixed.cells_w_m2[row, 0], rel=1e-3)
