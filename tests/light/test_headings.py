"""Where the nose points, and what that does to the light."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.calendar import local_clock, standard_clock
from sunbot.light import lights_on, parked_otherwise, sun_over
from sunbot.light.headings import N_HEADINGS, moving_share, noses

POLICIES = [("fixed", "random"), ("roams", "random"), ("roams", "mean"), ("roams", "worst"), ("turns-to-sun", "random")]


def monthly(light, weather):
    """Light on the cells by month, mean over headings [Wh/m2]."""
    month = standard_clock(weather.times, weather.place.time_zone).month
    return np.bincount(month, weights=(light.cells_w_m2 * light.weight).sum(axis=1), minlength=13)[1:]


@pytest.mark.parametrize(("heading", "parked"), POLICIES)
def test_a_flat_deck_does_not_care_where_the_nose_points(make_robot, year, heading, parked):
    """Every heading policy gives a flat panel the same light, under one heading."""
    weather, sun = year
    [light] = lights_on(make_robot(0.0, heading=heading, parked=parked, heading_deg=77.0), weather, sun)
    [plain] = lights_on(make_robot(0.0), weather, sun)
    assert light.weight.shape == (1, 1)
    np.testing.assert_array_equal(light.cells_w_m2, plain.cells_w_m2)


def test_roaming_lies_between_the_best_and_the_worst_fixed_heading(make_robot, year):
    """In each month, on a tilted deck."""
    weather, sun = year
    fixed = np.array(
        [monthly(lights_on(make_robot(30.0, heading_deg=h), weather, sun)[0], weather) for h in np.arange(16) * 22.5]
    )
    by_rule = {}
    for parked in ("mean", "worst", "random"):
        [light] = lights_on(make_robot(30.0, heading="roams", parked=parked), weather, sun)
        np.testing.assert_allclose(light.weight.sum(axis=1), 1.0, atol=1e-12)
        by_rule[parked] = monthly(light, weather)
        assert (by_rule[parked] < fixed.max(axis=0)).all()
        assert (by_rule[parked] > 0.999999 * fixed.min(axis=0)).all()
        # tables of many headings are in single precision, 6e-8 of a value
        np.testing.assert_allclose(by_rule["mean"], fixed.mean(axis=0), rtol=1e-7)
    # in summer the side that is poorest over the day can be the better one early and late, when this robot stands
    dark_half = [9, 10, 11, 0, 1, 2]
    assert (by_rule["worst"] < by_rule["random"])[dark_half].all()


def test_a_robot_that_never_moves_and_lies_the_wrong_way_has_the_worst_heading(make_robot, year):
    """Without duty the worst rule is each month's poorest fixed heading, no better and no worse."""
    weather, sun = year
    [light] = lights_on(make_robot(30.0, heading="roams", parked="worst", moves=False), weather, sun)
    fixed = [
        monthly(lights_on(make_robot(30.0, heading_deg=h), weather, sun)[0], weather) for h in np.arange(16) * 22.5
    ]
    # 1e-7: single precision, as above
    np.testing.assert_allclose(monthly(light, weather), np.min(fixed, axis=0), rtol=1e-7)


@pytest.mark.parametrize("azimuth_deg", [0.0, 130.0])
def test_turning_to_the_sun_beats_every_fixed_heading(make_robot, year, azimuth_deg):
    """Each month, to 0.1 %, whichever way the panel leans on the robot."""
    weather, sun = year
    panel = {"tilt_deg": 40.0, "azimuth_deg": azimuth_deg}
    [turning] = lights_on(make_robot(panel, heading="turns-to-sun"), weather, sun)
    for heading_deg in np.arange(0.0, 360.0, 30.0):
        [fixed] = lights_on(make_robot(panel, heading_deg=heading_deg), weather, sun)
        assert (monthly(turning, weather) >= 0.999 * monthly(fixed, weather)).all()


def test_the_nose_follows_the_side_the_panels_lean_to(make_robot, year):
    """With flanks in balance the first one is turned to the sun."""
    _, sun = year
    flanks = [{"tilt_deg": 70.0, "azimuth_deg": 90.0}, {"tilt_deg": 70.0, "azimuth_deg": -90.0}]
    nose = noses(make_robot(*flanks, heading="turns-to-sun"), sun)
    np.testing.assert_allclose((nose[:, 0] + 90.0 - sun.azimuth_deg + 180.0) % 360.0, 180.0, atol=1e-6)
    uneven = [flanks[0] | {"watts": 10.0}, flanks[1]]
    nose = noses(make_robot(*uneven, heading="turns-to-sun"), sun)
    np.testing.assert_allclose((nose[:, 0] - 90.0 - sun.azimuth_deg + 180.0) % 360.0, 180.0, atol=1e-6)


def test_on_duty_every_heading_counts_alike(make_robot, year):
    """While the drive is due the weights are 1/16 each; else one heading has them all, one for each local day."""
    weather, sun = year
    robot = make_robot(20.0, heading="roams")
    [light] = lights_on(robot, weather, sun)
    moving = moving_share(robot, weather)
    assert {0.0, 0.5, 1.0} == set(np.unique(moving))
    np.testing.assert_allclose(light.weight[moving == 1.0], 1.0 / N_HEADINGS)
    parked = light.weight[moving == 0.0]
    assert (parked.max(axis=1) == 1.0).all()
    day = local_clock(weather.times, "Europe/Berlin", reference=True).day
    stands = np.where(moving == 0.0, light.weight.argmax(axis=1), -1)
    assert all(np.unique(stands[(day == d) & (stands >= 0)]).size == 1 for d in np.unique(day))
    # 365 draws of 16: each comes up 23 times, give or take four standard deviations
    counts = np.bincount([stands[(day == d) & (stands >= 0)][0] for d in np.unique(day)], minlength=N_HEADINGS)
    assert counts.min() > 4
    assert counts.max() < 42


def test_two_loads_that_move_it_do_not_count_twice(make_robot, year):
    """The longer of two duties counts; loads that stand still do not."""
    weather, _ = year
    robot = make_robot(20.0, heading="roams")
    drive = robot.loads[0]
    loads = (drive, drive.model_copy(update={"hours": ((10.0, 12.0),)}), drive.model_copy(update={"moves": False}))
    both = robot.model_copy(update={"loads": loads})
    np.testing.assert_array_equal(moving_share(both, weather), moving_share(robot, weather))


@pytest.mark.parametrize("parked", ["random", "mean"])
def test_one_year_equals_the_first_of_many(make_robot, make_weather, parked):
    """Light and headings of a year do not depend on how many are asked for; another seed stands otherwise."""
    robot = make_robot(20.0, heading="roams", parked=parked)
    one, three = make_weather(1), make_weather(3)
    [short] = lights_on(robot, one, sun_over(one), seed=9)
    [long] = lights_on(robot, three, sun_over(three), seed=9)
    n = len(short.cells_w_m2)
    np.testing.assert_array_equal(short.cells_w_m2, long.cells_w_m2[:n])
    np.testing.assert_array_equal(short.weight, long.weight[: len(short.weight)])
    if parked == "random":
        assert not np.array_equal(long.weight[:n], long.weight[n : 2 * n])
        [other] = lights_on(robot, one, sun_over(one), seed=10)
        assert not np.array_equal(short.weight, other.weight)


def test_parking_otherwise_changes_only_the_weights(make_robot, year):
    """Lights parked otherwise are those of a robot with that rule."""
    weather, sun = year
    robot = make_robot(20.0, 0.0, heading="roams")
    worst = robot.model_copy(update={"parked": "worst"})
    moved = parked_otherwise(lights_on(robot, weather, sun), worst, weather)
    for light, anew in zip(moved, lights_on(worst, weather, sun), strict=True):
        np.testing.assert_array_equal(light.weight, anew.weight)
        np.testing.assert_array_equal(light.cells_w_m2, anew.cells_w_m2)


def test_panels_of_one_robot_share_its_headings(make_robot, year):
    """Two flanks of a roaming robot stand under the same headings; the worst is judged on both together."""
    weather, sun = year
    flanks = [{"tilt_deg": 60.0, "azimuth_deg": 90.0}, {"tilt_deg": 60.0, "azimuth_deg": 270.0, "watts": 5.0}]
    left, right = lights_on(make_robot(*flanks, heading="roams", parked="worst", moves=False), weather, sun)
    assert left.weight is right.weight
    # the strong flank looks away from the sun
    june = standard_clock(weather.times, "Europe/Berlin").month == 6
    assert monthly(left, weather)[11] < monthly(right, weather)[11]
    assert np.unique(left.weight[june].argmax(axis=1)).size == 1
