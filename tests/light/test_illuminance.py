"""Lux beside W/m²."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.light.illuminance import illuminance_lux


# Published: Littlefair, Lighting Research & Technology 17 (1985) 162: the ranges of measured means.
@pytest.mark.parametrize(
    ("direct", "diffuse", "share", "low", "high"),
    [(0.0, 200.0, 1.0, 110, 115), (0.0, 100.0, 0.15, 130, 144), (680.0, 120.0, 0.15, 105, 109)],
    ids=["overcast", "clear without sun", "clear global"],
)
def test_efficacy_of_daylight_lies_in_the_published_ranges(direct, diffuse, share, low, high):
    """Overcast, clear diffuse and global light have the lumens per watt that were measured."""
    lux = illuminance_lux(np.array([direct]), np.array([diffuse]), diffuse_share=np.array([share]))
    assert low <= float(lux[0]) / (direct + diffuse) <= high


def test_no_light_no_lux_and_twice_the_light_twice_the_lux():
    """Illuminance is linear in the light."""
    one, two = (
        illuminance_lux(k * np.array([0.0, 100.0]), k * np.array([0.0, 50.0]), diffuse_share=np.array([1.0, 0.4]))
        for k in (1.0, 2.0)
    )
    assert one[0] == 0.0
    np.testing.assert_allclose(two, 2.0 * one)
