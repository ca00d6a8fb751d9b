"""The parts of sky light and what bare planes take of them."""

from __future__ import annotations

import numpy as np
import pytest
from pvlib import irradiance

from sunbot.light.carriers import Sun
from sunbot.light.plane import angles_of, cos_incidence, direction, normal, on_slope, sky_parts


def random_sky(n=400):
    """Invented skies of every kind with the sun up."""
    rng = np.random.default_rng(3)
    zenith = rng.uniform(0.0, 89.5, n)
    airmass = 1.0 / np.cos(np.radians(zenith * 0.97))
    sun = Sun(zenith, rng.uniform(0.0, 360.0, n), np.ones(n), np.full(n, 1361.0), airmass)
    dhi, dni = rng.uniform(0.0, 500.0, n) * np.cos(np.radians(zenith)), rng.uniform(0.0, 900.0, n)
    dni[::7], dhi[::11] = 0.0, 0.0
    return sun, dni, dhi


@pytest.mark.parametrize("tilt_deg", [0.0, 25.0, 60.0, 90.0])
def test_the_parts_make_up_the_sky_model(tilt_deg):
    """Beam, isotropic and brightening on a plane are the diffuse light of the reference library plus the beam."""
    sun, dni, dhi = random_sky()
    ghi = dni * np.cos(np.radians(sun.zenith_deg)) + dhi
    parts = sky_parts(ghi, dni, dhi=dhi, sun=sun, albedo=np.full(ghi.shape, 0.2))
    rays = direction(sun.azimuth_deg, 90.0 - sun.zenith_deg)
    tilt = np.radians(tilt_deg)
    plane = parts.direct * cos_incidence(rays, normal(tilt_deg, 110.0)[:, None])
    plane += parts.isotropic * (1 + np.cos(tilt)) / 2 + parts.brightening * np.sin(tilt)
    lit = dhi > 0.0
    truth = np.zeros_like(dhi)
    truth[lit] = irradiance.perez_driesse(
        tilt_deg, 110.0, dhi[lit], dni[lit], 1361.0, sun.zenith_deg[lit], sun.azimuth_deg[lit], sun.airmass[lit]
    )
    truth += dni * np.maximum(irradiance.aoi_projection(tilt_deg, 110.0, sun.zenith_deg, sun.azimuth_deg), 0.0)
    high = sun.zenith_deg < 85.0
    np.testing.assert_allclose(plane[high], truth[high], atol=1e-8)
    # lower down the model drops some circumsolar light, which is kept here as sky light
    assert (plane >= truth - 1e-8).all()
    assert (plane - truth <= dhi + 1e-8).all()
    if tilt_deg == 0.0:
        np.testing.assert_allclose(plane, ghi, atol=1e-9)


def test_while_the_sun_is_down_all_light_is_diffuse():
    """Twilight is kept: the level plane gets ghi, whatever the file calls beam."""
    zenith = np.array([91.0, 95.0])
    sun = Sun(zenith, zenith, np.zeros(2), np.full(2, 1361.0), np.full(2, 37.9))
    ghi, dni, dhi = np.array([6.0, 1.0]), np.array([90.0, 0.0]), np.array([2.0, 1.0])
    parts = sky_parts(ghi, dni, dhi=dhi, sun=sun, albedo=np.zeros(2))
    np.testing.assert_array_equal(parts.isotropic, [6.0, 1.0])
    np.testing.assert_array_equal(parts.direct, 0.0)


def test_no_light_gives_none():
    """Night is exactly 0."""
    sun, dni, dhi = random_sky(5)
    parts = sky_parts(0 * dhi, 0 * dni, dhi=0 * dhi, sun=sun, albedo=np.ones(5))
    assert all(not values.any() for values in vars(parts).values())


def test_a_slope_tilts_what_stands_on_it():
    """Flat on a slope of 20 deg down to the south is tilted 20 deg south; a face across the slope keeps its azimuth."""
    flat = on_slope(normal(0.0, 0.0), 20.0, aspect_deg=180.0)
    np.testing.assert_allclose(flat, normal(20.0, 180.0), atol=1e-12)
    np.testing.assert_allclose(on_slope(normal(90.0, 90.0), 20.0, aspect_deg=180.0), normal(90.0, 90.0), atol=1e-12)
    some = direction(np.array([10.0, 200.0, 305.0]), np.array([-20.0, 5.0, 70.0]))
    there = on_slope(some, 33.0, aspect_deg=71.0)
    np.testing.assert_allclose(on_slope(there, -33.0, aspect_deg=71.0), some, atol=1e-12)
    np.testing.assert_allclose((there**2).sum(axis=0), 1.0)


def test_angles_come_back_from_vectors():
    """Azimuth and elevation survive the way there and back."""
    azimuth, elevation = angles_of(direction(np.array([0.0, 359.0, 123.0]), np.array([0.0, -45.0, 89.0])))
    np.testing.assert_allclose(azimuth, [0.0, 359.0, 123.0], atol=1e-9)
    np.testing.assert_allclose(elevation, [0.0, -45.0, 89.0], atol=1e-9)
