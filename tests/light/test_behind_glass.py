"""The light on a panel behind a window, all stages together."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.errors import InputError
from sunbot.inputs.window import Window
from sunbot.light import lights_on
from sunbot.light.behind_glass import behind_glass, sun_through
from sunbot.light.carriers import Sun

ENDLESS = {
    "width_m": 50.0,
    "height_m": 50.0,
    "sill_m": 0.0,
    "panel_height_m": 25.0,
    "distance_m": 0.001,
    "panes": 0,
    "frame_share": 0.0,
    "reflectance": 0.0,
}


def indoors(robot, **window):
    """The robot behind a window; 1.4 x 1.3 m to the south unless said."""
    keys = {"azimuth_deg": 180.0, "width_m": 1.4, "height_m": 1.3} | window
    return robot.model_copy(update={"window": Window.model_validate(keys)})


def only(robot, weather, sun):
    [light] = lights_on(robot, weather, sun)
    return light


def sun_at(azimuth_deg, height_deg):
    """A sun held still, one row for each position."""
    azimuth, height = np.broadcast_arrays(np.asarray(azimuth_deg, float), np.asarray(height_deg, float))
    one = np.ones(azimuth.size)
    return Sun(90.0 - height.ravel(), azimuth.ravel().copy(), one, 1367.0 * one, one)


def seen_by(robot, azimuth_deg=180.0, height_deg=30.0):
    """The view of the robot's panel under a sun held still."""
    sun = sun_at(azimuth_deg, height_deg)
    return behind_glass(robot.panels[0], robot, sun=sun, lamp_w_m2=np.zeros(sun.lit.size))


@pytest.mark.parametrize("facing", [180.0, 95.0])
def test_upright_in_an_endless_open_wall_it_is_as_in_the_open(make_robot, year, facing):
    """A vertical panel facing out in the plane of an unglazed, unbounded opening gets the open-air light."""
    weather, sun = year
    outdoors = make_robot(90.0, heading_deg=facing)
    inside = only(indoors(outdoors, azimuth_deg=facing, **ENDLESS), weather, sun)
    outside = only(outdoors, weather, sun)
    # 1 % is asked for; the integrals hold 0.001 % but in hours with the sun in the plane of the wall
    assert inside.plane_w_m2.sum() == pytest.approx(outside.plane_w_m2.sum(), rel=1e-4)
    np.testing.assert_allclose(inside.plane_w_m2, outside.plane_w_m2, rtol=0.01, atol=0.5)
    assert inside.cells_w_m2.sum() == pytest.approx(outside.cells_w_m2.sum(), rel=0.005)
    assert inside.yearly.angle == pytest.approx(outside.yearly.angle, rel=1e-9)


def test_flat_at_an_endless_open_wall_it_sees_half_the_sky_and_no_ground(make_robot):
    """A flat panel gets half of the isotropic sky, nothing of the ground, and the sun whenever it is in front."""
    view = seen_by(indoors(make_robot(0.0), **ENDLESS), azimuth_deg=[180.0, 0.0], height_deg=[30.0, 30.0])
    assert view.plane.isotropic == pytest.approx(0.5, rel=1e-3)
    assert view.plane.ground == pytest.approx(0.0, abs=1e-6)
    assert view.plane.brightening == pytest.approx(0.0, abs=1e-6)
    assert view.plane.direct[:, 0] == pytest.approx([0.5, 0.0], abs=1e-9)


def pane_stack_pass(cosine, panes, absorbed):
    """What passes ``panes`` panes, by adding face after face (not pane after pane), for many angles."""
    inside = np.sqrt(1.0 - (1.0 - cosine**2) / 1.526**2)
    total = np.zeros_like(cosine)
    for r in (
        ((cosine - 1.526 * inside) / (cosine + 1.526 * inside)) ** 2,
        ((1.526 * cosine - inside) / (1.526 * cosine + inside)) ** 2,
    ):
        passed, back = np.ones_like(cosine), np.zeros_like(cosine)
        for face in range(2 * panes):
            if face % 2:  # a way through glass lies before this face
                kept = np.exp(-absorbed / inside)
                passed, back = passed * kept, back * kept**2
            again = 1.0 - back * r
            passed, back = passed * (1.0 - r) / again, r + (1.0 - r) ** 2 * back / again
        total += passed / 2.0
    return total


def traced(window, face, right_edge, up_edge, rng, n=1_500_000):
    """Rays from random points of the patch, by the cosine law: brightness of sky, band and ground they end in.

    Written for this test alone, in the frame right, up, out of the wall.
    """
    point = rng.uniform(-1, 1, (n, 1)) * right_edge + rng.uniform(-1, 1, (n, 1)) * up_edge
    radius, turn = np.sqrt(rng.uniform(0, 1, n)), rng.uniform(0, 2 * np.pi, n)
    one, two = right_edge / np.linalg.norm(right_edge), up_edge / np.linalg.norm(up_edge)
    ray = (radius * np.cos(turn))[:, None] * one + (radius * np.sin(turn))[:, None] * two
    ray = ray + np.sqrt(1.0 - radius**2)[:, None] * face
    out = np.maximum(ray[:, 2], 1e-12)
    hit = point + ray * ((window.distance_m - point[:, 2]) / out)[:, None]
    across, up = hit[:, 0] + window.offset_m, hit[:, 1] + window.panel_height_m
    through = (ray[:, 2] > 1e-9) & (np.abs(across) < window.width_m / 2)
    through &= (up > window.sill_m) & (up < window.sill_m + window.height_m)
    passed = through * pane_stack_pass(out, window.panes, window.extinction_per_m * window.pane_mm / 1000.0)
    passed *= window.clear_share * (1.0 - window.frame_share)
    height_deg = np.degrees(np.arcsin(np.clip(ray[:, 1], -1, 1)))
    sky = height_deg > window.obstruction_deg
    facade = (height_deg > 0) & ~sky
    return (passed * sky).mean(), (passed * (height_deg <= 0)).mean() + 0.5 * (passed * facade).mean()


def frame(azimuth_deg, height_deg, wall_deg):
    """A direction as right, up, out of a wall."""
    turn, height = np.radians(azimuth_deg - wall_deg), np.radians(height_deg)
    return np.array([np.cos(height) * np.sin(turn), np.sin(height), np.cos(height) * np.cos(turn)])


def test_a_furnished_case_followed_ray_by_ray(make_robot):
    """Two panes, frame, coating, a house opposite, a leaning panel off the middle: sky, ground and sun as traced."""
    rng = np.random.default_rng(11)
    keys = {
        "azimuth_deg": 150.0,
        "width_m": 1.2,
        "height_m": 1.4,
        "sill_m": 0.7,
        "panel_height_m": 0.95,
        "obstruction_deg": 12.0,
        "distance_m": 0.5,
        "offset_m": 0.25,
        "clear_share": 0.8,
        "frame_share": 0.2,
        "room_area_m2": 60.0,
        "reflectance": 0.6,
    }
    robot = indoors(make_robot({"tilt_deg": 35.0, "watts": 30.0}, heading_deg=190.0), **keys)
    window = robot.window
    face = frame(190.0, 55.0, 150.0)
    side = np.sqrt(30.0 / 180.0)
    right_edge = frame(280.0, 0.0, 150.0) * side / 2
    up_edge = np.cross(face, right_edge)
    azimuths, heights = (part.ravel() for part in np.meshgrid(np.arange(80.0, 221.0, 14.0), np.arange(14.0, 70.0, 8.0)))
    view = seen_by(robot, azimuths, heights)

    straight = traced(window, face, right_edge, up_edge, rng)
    # what the whole window lets in, per area, is what an upright panel just behind an endless window would see
    wide = window.model_copy(update={"width_m": 1e4, "height_m": 1e4, "sill_m": -5e3, "offset_m": 0.0})
    flux = traced(wide, np.array([0.0, 0.0, 1.0]), np.array([0.001, 0, 0]), np.array([0, 0.001, 0]), rng)
    gain = 1.2 * 1.4 * 0.6 / (60.0 * 0.4)
    for found, direct, entering in zip((view.plane.isotropic, view.plane.ground), straight, flux, strict=True):
        assert found[0, 0] == pytest.approx(direct + gain * entering, rel=0.02)

    points = rng.uniform(-1, 1, (20_000, 1)) * right_edge + rng.uniform(-1, 1, (20_000, 1)) * up_edge
    suns = []
    for azimuth, height in zip(azimuths, heights, strict=True):
        ray = frame(azimuth, height, 150.0)
        glass = float(pane_stack_pass(ray[2:], 2, 16.0 * 0.004)[0]) * 0.8 * 0.8
        hit = points + ray * ((0.5 - points[:, 2]) / ray[2])[:, None]
        inside = (np.abs(hit[:, 0] + 0.25) < 0.6) & (hit[:, 1] + 0.95 > 0.7) & (hit[:, 1] + 0.95 < 2.1)
        suns.append(glass * (max(ray @ face, 0.0) * inside.mean() + gain * ray[2]))
    found = view.plane.direct[:, 0]
    assert found.sum() == pytest.approx(np.sum(suns), rel=0.02)
    # one sun: an eighth of the patch at worst, where the edge of the light runs along it
    np.testing.assert_allclose(found, suns, atol=0.05)


def test_the_band_at_the_horizon_is_seen_through_the_window(make_robot):
    """Upright at an endless wall the band counts as in the open; a sill above the panel hides it, so does a house."""
    robot = make_robot(90.0, heading_deg=180.0)
    assert seen_by(indoors(robot, **ENDLESS)).plane.brightening == pytest.approx(1.0, rel=1e-3)
    low = {"panel_height_m": 0.2, "reflectance": 0.0}
    assert seen_by(indoors(robot, sill_m=0.9, **low)).plane.brightening == 0.0
    opposite = ENDLESS | {"obstruction_deg": 10.0}
    assert seen_by(indoors(robot, **opposite)).plane.brightening == 0.0
    half = ENDLESS | {"obstruction_deg": 3.25}
    assert seen_by(indoors(robot, **half)).plane.brightening == pytest.approx(0.5, rel=1e-3)


def test_what_stands_opposite_takes_sun_and_sky(make_robot, year):
    """A house opposite hides the sun below its edge; the site's horizon does the same and gives nothing back."""
    robot = indoors(make_robot(90.0, heading_deg=180.0), obstruction_deg=25.0, reflectance=0.0)
    view = seen_by(robot, azimuth_deg=[180.0, 180.0], height_deg=[24.0, 26.0])
    assert view.plane.direct[0, 0] == 0.0
    assert view.plane.direct[1, 0] > 0.3
    weather, sun = year
    free, behind = (
        only(indoors(make_robot(90.0, heading_deg=180.0, horizon=h)), weather, sun) for h in ((), ((0.0, 25.0),))
    )
    hidden = 90.0 - sun.zenith_deg < 25.0
    assert (behind.plane_w_m2[~hidden] <= free.plane_w_m2[~hidden] + 1e-9).all()
    dhi = weather.table["dhi"].to_numpy()
    assert (behind.plane_w_m2[hidden, 0] <= dhi[hidden] + 1e-9).all()
    assert behind.yearly.horizon < 0.8 * free.yearly.horizon


def test_a_group_of_cells_is_as_bright_as_its_darkest_cell(make_robot):
    """Half in the sun, a panel of one group has no beam that counts; with many groups half of it does."""
    edge = {"offset_m": 0.7, "distance_m": 0.4, "reflectance": 0.0}
    one, many = (
        indoors(make_robot({"tilt_deg": 90.0, "bypass_groups": n}, heading_deg=180.0), **edge) for n in (1, 100)
    )
    sun = sun_at([180.0], [20.0])
    halves = [sun_through(robot.panels[0], robot, sun=sun) for robot in (one, many)]
    for through in halves:
        assert through.share == pytest.approx([0.5], abs=0.07)
        assert through.plane > 0.25
    assert halves[0].cells == 0.0
    assert halves[1].cells == pytest.approx(halves[1].plane, rel=0.05)


def test_a_mast_counts_behind_glass_too(make_robot, year):
    """An arm between panel and window takes sun and sky; one on the room's side takes nothing."""
    weather, sun = year
    totals = []
    for sector in ((), ((-60.0, 60.0, 80.0),), ((120.0, -120.0, 80.0),)):
        robot = indoors(make_robot({"tilt_deg": 30.0, "obstructions": sector}, heading_deg=180.0))
        totals.append(only(robot, weather, sun).plane_w_m2.sum())
    bare, arm, behind = totals
    assert arm < 0.5 * bare
    assert behind == pytest.approx(bare, rel=1e-9)


def test_further_into_the_room_there_is_less(make_robot, year):
    """Every step away from the glass costs light, and far away the room's own scattered light is left."""
    weather, sun = year
    robot, depths = make_robot(90.0, heading_deg=180.0), (0.1, 0.3, 0.6, 1.0, 2.0, 5.0)
    # in the middle of the window: nearer the sill, a little distance lets more sun reach the panel's lower edge
    found = [only(indoors(robot, distance_m=d, panel_height_m=1.55), weather, sun).yearly.horizon for d in depths]
    assert (np.diff(found) < 0.0).all()
    black = only(indoors(robot, distance_m=40.0, reflectance=0.0), weather, sun).yearly.horizon
    grey = only(indoors(robot, distance_m=40.0), weather, sun).yearly.horizon
    assert black < 0.1 * grey


def test_right_is_right_seen_looking_out(make_robot):
    """East of a south window's middle, seen looking out, is left: the morning sun reaches what stands on the right."""
    left, right = (indoors(make_robot(0.0), offset_m=offset, distance_m=0.8, reflectance=0.0) for offset in (-0.9, 0.9))
    sun = {"azimuth_deg": [130.0, 230.0], "height_deg": [30.0, 30.0]}
    assert (seen_by(right, **sun).plane.direct[:, 0] > 0.0).tolist() == [True, False]
    assert (seen_by(left, **sun).plane.direct[:, 0] > 0.0).tolist() == [False, True]


def test_lamps_shine_by_the_local_clock(make_robot, year):
    """At night the lamp alone is left: lux over its efficacy, in its hours, on the plane and past the glass."""
    weather, sun = year
    lit = indoors(make_robot(0.0), lamp_lux=600.0, lamp_hours=((17.0, 22.0),))
    [dark_light], [lamp_light] = (lights_on(robot, weather, sun) for robot in (indoors(make_robot(0.0)), lit))
    extra = lamp_light.plane_w_m2[:, 0] - dark_light.plane_w_m2[:, 0]
    hour = weather.times.tz_convert("Europe/Berlin").hour
    # the rules of today on the calendar of 2001: the weeks in which the clocks change may differ
    calm = weather.times.month.isin([1, 2, 6, 7, 8, 12])
    on = (hour >= 17) & (hour < 22)
    np.testing.assert_allclose(extra[calm & on], 2.0, atol=1e-9)
    np.testing.assert_allclose(extra[calm & ~on], 0.0, atol=1e-9)
    cells = lamp_light.cells_w_m2[:, 0] - dark_light.cells_w_m2[:, 0]
    assert (cells[calm & on] < 0.97 * 2.0).all()
    assert (cells[calm & on] > 0.85 * 2.0).all()


def test_no_snow_falls_indoors(make_robot, make_weather, year):
    """Snow outside does not lie on a panel behind glass."""
    _, sun = year
    covered = np.ones(8760, dtype=bool)
    robot = indoors(make_robot(0.0))
    snowy, bare = only(robot, make_weather(snow_covered=covered), sun), only(robot, make_weather(), sun)
    np.testing.assert_array_equal(snowy.cells_w_m2, bare.cells_w_m2)


@pytest.mark.parametrize("heading", ["roams", "turns-to-sun"])
def test_a_robot_that_wanders_is_refused(make_robot, year, heading):
    """Behind glass the place decides; the message says what to write."""
    weather, sun = year
    with pytest.raises(InputError, match=f'robot file: heading: "{heading}" behind .* Write heading = "fixed"'):
        lights_on(indoors(make_robot(20.0, heading=heading)), weather, sun)


def test_many_years_and_many_panels_at_once(make_robot, make_weather, year):
    """Years that share the sun give each what it gives alone; every panel of a robot gets its own light."""
    _, sun = year
    robot = indoors(make_robot(0.0, 60.0, heading_deg=170.0))
    two, one = make_weather(2), make_weather(1)
    both, alone = lights_on(robot, two, sun), lights_on(robot, one, sun)
    for several, single in zip(both, alone, strict=True):
        np.testing.assert_allclose(several.plane_w_m2[:8760], single.plane_w_m2, rtol=1e-12)
        assert np.isfinite(several.cells_w_m2).all()
        assert (several.cells_w_m2 >= 0.0).all()
        assert (several.cells_w_m2 <= several.plane_w_m2 + 1e-12).all()
    assert both[0].yearly.horizon != pytest.approx(both[1].yearly.horizon, rel=0.05)
