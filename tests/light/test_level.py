"""Light on the level under a horizon."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from sunbot.inputs.site import Site, WeatherSource
from sunbot.light import light_on_level, sun_over
from sunbot.sky import weather_for

# An invented place.
SITE = Site(
    name="Test meadow",
    latitude=47.3,
    longitude=8.1,
    altitude_m=540.0,
    time_zone="Europe/Zurich",
    weather=WeatherSource(source="clear-sky"),
)


def level(horizon: tuple[tuple[float, float], ...]) -> np.ndarray:
    weather = weather_for(SITE)
    return light_on_level(SITE.model_copy(update={"horizon": horizon}), weather, sun_over(weather))


def test_an_open_horizon_leaves_ghi():
    """With no skyline given the light on the level is the ghi of the weather."""
    assert level(()) == pytest.approx(weather_for(SITE).table["ghi"].to_numpy())


def test_a_level_horizon_takes_nothing():
    """A horizon of 0 degrees all round hides under 0.1 % (the refracted sun on the skyline)."""
    assert level(((0.0, 0.0), (180.0, 0.0))).sum() == pytest.approx(level(()).sum(), rel=1e-3)


def test_a_higher_horizon_never_adds_light():
    """Law: light falls step by step as the skyline rises, and never below 0."""
    lights = [level(((0.0, h), (180.0, h))) for h in (5.0, 15.0, 30.0, 60.0)]
    for low, high in pairwise(lights):
        assert (high <= low + 1e-9).all()
    assert lights[-1].min() >= 0.0


def test_a_wall_all_round_leaves_the_sky_overhead():
    """Behind 89 degrees of wall next to nothing is left, behind 30 in December only diffuse light from above it."""
    # 0.5 %: what is hidden is summed from beam and diffuse light, which meet ghi within 0.3 % over the year.
    assert level(((0.0, 89.0), (180.0, 89.0))).sum() < 0.005 * level(()).sum()
    december = np.asarray(weather_for(SITE).times.month == 12)
    walled = level(((0.0, 30.0), (180.0, 30.0)))[december].sum()
    diffuse = weather_for(SITE).table["dhi"].to_numpy()[december].sum()
    # The isotropic sky above 30 degrees gives a flat plane cos(30)^2 = 0.75 of what it has.
    assert walled < 0.75 * diffuse
