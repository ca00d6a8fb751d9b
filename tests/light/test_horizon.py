"""Horizon and the robot's own masts."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.light.horizon import AZIMUTHS_DEG, beam_lost, horizon_at, obstruction_at, sky_shares
from sunbot.light.plane import normal


def test_the_horizon_is_joined_linearly_and_closed():
    """Between points it runs straight, across north too; below level it is level."""
    horizon = ((350.0, 10.0), (30.0, 20.0), (180.0, -5.0))
    at = horizon_at(horizon, np.array([350.0, 10.0, 30.0, 180.0, 105.0]))
    np.testing.assert_allclose(at, [10.0, 15.0, 20.0, 0.0, 7.5])
    np.testing.assert_array_equal(horizon_at((), np.array([1.0, 2.0])), 0.0)
    np.testing.assert_array_equal(horizon_at(((77.0, 8.0),), np.array([0.0, 200.0])), 8.0)


@pytest.mark.parametrize("height_deg", [0.0, 5.0, 30.0, 60.0, 90.0])
def test_an_even_horizon_leaves_what_the_closed_forms_say(height_deg):
    """A flat plane keeps cos²h of its sky, a vertical one 1 - (2h + sin 2h)/pi: integrals done by hand."""
    faces = np.stack([normal(0.0, 0.0), normal(90.0, 77.0)], axis=1)
    sky, _ = sky_shares(faces, np.full((1, AZIMUTHS_DEG.size), height_deg))
    h = np.radians(height_deg)
    np.testing.assert_allclose(sky, [np.cos(h) ** 2, 1.0 - (2 * h + np.sin(2 * h)) / np.pi], atol=1e-5)


@pytest.mark.parametrize("tilt_deg", [15.0, 50.0, 90.0, 115.0])
def test_a_ragged_horizon_agrees_with_counting_rays(tilt_deg):
    """The share of the sky left agrees with a plain sum over rays, for planes that face up, out and down."""
    horizon = ((0.0, 5.0), (90.0, 40.0), (180.0, 3.0), (270.0, 60.0))
    face = normal(tilt_deg, 70.0)
    sky, _ = sky_shares(face[:, None], horizon_at(horizon, AZIMUTHS_DEG)[None, :])
    rng = np.random.default_rng(1)
    azimuth, height = rng.uniform(0.0, 360.0, 400_000), rng.uniform(0.0, 1.0, 400_000)  # even over the hemisphere
    level = np.sqrt(1 - height**2)
    cosine = level * np.sin(np.radians(azimuth)) * face[0] + level * np.cos(np.radians(azimuth)) * face[1]
    cosine = np.maximum(cosine + height * face[2], 0.0)
    left = np.degrees(np.arcsin(height)) >= horizon_at(horizon, azimuth)
    assert sky[0] == pytest.approx((cosine * left).sum() / cosine.sum(), abs=0.005)  # three errors of the count


def test_the_bright_band_goes_as_the_horizon_rises():
    """All of the band is left over a level horizon, none over high hills, half where they fill half of its view."""
    south = normal(90.0, 180.0)[:, None]
    level = np.zeros((1, AZIMUTHS_DEG.size))
    assert sky_shares(south, level)[1] == pytest.approx([1.0])
    assert sky_shares(south, level + 20.0)[1] == pytest.approx([0.0], abs=1e-9)
    east_hidden = np.where(AZIMUTHS_DEG < 180.0, 20.0, 0.0)[None, :]
    assert sky_shares(south, east_hidden)[1] == pytest.approx([0.5], abs=1e-6)


def test_obstructions_hide_a_sector_clockwise_from_the_nose():
    """A sector may cross the nose; the higher of two counts."""
    angles = np.array([-10.0, 5.0, 355.0, 15.0, 180.0])
    at = obstruction_at(((350.0, 10.0, 30.0), (0.0, 20.0, 50.0)), angles)
    np.testing.assert_array_equal(at, [30.0, 50.0, 30.0, 50.0, 0.0])
    np.testing.assert_array_equal(obstruction_at(((0.0, 360.0, 15.0),), angles), 15.0)


def test_one_bypass_group_loses_all_the_beam_more_lose_a_step():
    """A mast in front of the sun stops a panel of one group, and takes a third of a panel of three."""
    mast = ((80.0, 100.0, 45.0),)
    sun, angle = np.array([30.0, 60.0, 30.0]), np.array([90.0, 90.0, 120.0])
    one = beam_lost(mast, angle, sun_elevation_deg=sun, bypass_groups=1)
    three = beam_lost(mast, angle, sun_elevation_deg=sun, bypass_groups=3)
    np.testing.assert_allclose(one, [1.0, 0.0, 0.0])
    np.testing.assert_allclose(three, [1 / 3, 0.0, 0.0])


def test_a_wall_takes_every_group_and_two_masts_take_two():
    """What fills a quarter turn shades the whole panel; masts add up, and never past all of it."""
    angle, sun = np.array([90.0]), np.array([10.0])
    assert beam_lost(((0.0, 180.0, 45.0),), angle, sun_elevation_deg=sun, bypass_groups=3) == pytest.approx([1.0])
    masts = ((80.0, 95.0, 45.0), (85.0, 100.0, 45.0))
    assert beam_lost(masts, angle, sun_elevation_deg=sun, bypass_groups=3) == pytest.approx([2 / 3])
    assert beam_lost(masts, angle, sun_elevation_deg=sun, bypass_groups=1) == pytest.approx([1.0])
