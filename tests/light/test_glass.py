"""Glass, dirt and snow on the panel."""

from __future__ import annotations

import numpy as np
import pytest
from pvlib import iam

from sunbot.light.glass import beam_pass, diffuse_pass, dirt_pass, snow_pass


def test_the_table_holds_the_curve():
    """The table of the beam gives what the formula gives, to 0.00001, at every angle; nothing passes at grazing."""
    angle = np.random.default_rng(2).uniform(0.0, 90.0, 5000)
    np.testing.assert_allclose(beam_pass(np.cos(np.radians(angle))), iam.physical(angle), atol=1e-5)
    assert beam_pass(np.array([0.0, 1.0])) == pytest.approx([0.0, 1.0])


@pytest.mark.parametrize("tilt_deg", [0.0, 20.0, 45.0, 60.0, 90.0])
def test_diffuse_light_passes_as_beam_at_its_equivalent_angle(tilt_deg):
    """Sky and ground light pass the glass like beam at the published equivalent angles."""
    # Published: Brandemuehl & Beckman, Solar Energy 24 (1980) 511 (also Duffie & Beckman, 4th ed. 2013, eq. 5.4.1-2).
    sky_deg = 59.7 - 0.1388 * tilt_deg + 0.001497 * tilt_deg**2
    ground_deg = 90.0 - 0.5788 * tilt_deg + 0.002693 * tilt_deg**2
    passed = diffuse_pass(tilt_deg)
    # 0.02: fits to covers with other glass; near grazing the ground's angle stands for a steep curve
    assert passed.sky == pytest.approx(float(beam_pass(np.cos(np.radians(sky_deg)))), abs=0.02)
    if tilt_deg > 0.0:
        assert passed.ground == pytest.approx(float(beam_pass(np.cos(np.radians(ground_deg)))), abs=0.04)


def test_upright_sky_and_ground_are_mirror_images():
    """A vertical panel passes ground light as it passes sky light."""
    passed = diffuse_pass(90.0)
    # 0.005: the sum over the sphere leaves out one of its 180 rings
    assert passed.sky == pytest.approx(passed.ground, abs=0.005)
    assert passed.horizon > passed.sky


def test_dirt_is_that_of_the_month():
    """Each step loses the dirt of its month."""
    loss = tuple(i / 100 for i in range(12))
    np.testing.assert_allclose(dirt_pass(loss, np.array([1, 12, 6])), [1.0, 0.89, 0.95])


def test_snow_lies_only_on_panels_flatter_than_40_degrees():
    """Steep panels shed it, flat ones give nothing while it lies."""
    covered = np.array([True, False])
    np.testing.assert_array_equal(snow_pass(39.9, covered), [0.0, 1.0])
    assert snow_pass(40.0, covered) == 1.0
    assert snow_pass(0.0, None) == 1.0
