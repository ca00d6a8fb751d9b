"""Where the sun stands."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.light.sun import sun_over, sun_position


@pytest.mark.parametrize(("latitude", "longitude"), [(52.0, 13.0), (-35.0, 149.0), (78.0, 15.0), (0.5, -100.0)])
def test_the_sun_follows_the_reference_algorithm(make_weather, latitude, longitude):
    """Steps without sunrise or sunset have the position of the full algorithm at their middle, to 0.0001 deg."""
    weather = make_weather(latitude=latitude, longitude=longitude)
    sun = sun_over(weather)
    pressure = pvlib.atmosphere.alt2pres(weather.place.altitude_m)
    truth = pvlib.solarposition.spa_python(weather.times, latitude, longitude, pressure=pressure)
    whole = (sun.lit == 0.0) | (sun.lit == 1.0)
    assert whole.sum() > 8000
    off = np.abs(sun.zenith_deg - truth["apparent_zenith"].to_numpy())[whole]
    turn = np.abs((sun.azimuth_deg - truth["azimuth"].to_numpy() + 180.0) % 360.0 - 180.0)[whole]
    assert off.max() < 1e-4
    assert (turn * np.sin(np.radians(sun.zenith_deg[whole]))).max() < 1e-4


def test_where_the_sun_rises_the_position_is_that_of_the_lit_part(make_weather):
    """In steps with a sunrise the mean of a plane's incidence while lit, seen minute by minute, is met to 1 %."""
    weather = make_weather()
    sun = sun_over(weather)
    rows = np.flatnonzero((sun.lit > 0.2) & (sun.lit < 1.0))[::40]
    assert rows.size > 10
    for row in rows:
        minutes = weather.times[row] + pd.to_timedelta(np.arange(-29.5, 30.0), unit="min")
        truth = pvlib.solarposition.spa_python(minutes, 52.0, 13.0, 0.0, pressure=pvlib.atmosphere.alt2pres(100.0))
        up = truth["apparent_zenith"].to_numpy() < 90.0
        assert sun.lit[row] == pytest.approx(up.mean(), abs=0.08)  # a sub-step is 1/13
        assert sun.zenith_deg[row] == pytest.approx(truth["apparent_zenith"][up].mean(), abs=0.15)
        # 1.3 deg: half a sub-step of the sun's way
        assert sun.azimuth_deg[row] == pytest.approx(truth["azimuth"][up].mean(), abs=1.3)


def test_in_polar_night_nothing_is_lit_and_nothing_is_missing(make_weather):
    """At 78 N the sun stays down in December and up in June; every value is a number."""
    weather = make_weather(latitude=78.0)
    sun = sun_over(weather)
    assert not sun.lit[weather.times.month == 12].any()
    assert (sun.lit[weather.times.month == 6] == 1.0).all()
    assert all(np.isfinite(values).all() for values in vars(sun).values())
    assert (sun.zenith_deg[sun.lit == 0.0] >= 90.0).all()
    assert (sun.zenith_deg[sun.lit > 0.0] < 90.0).all()


def test_years_to_come_cost_nothing(make_weather):
    """Generated years share the sun of the first."""
    one, three = sun_over(make_weather(1)), sun_over(make_weather(3))
    for name, values in vars(one).items():
        np.testing.assert_array_equal(values, getattr(three, name), err_msg=name)


def test_times_without_a_zone_are_refused():
    """A naive time is not taken for UTC."""
    with pytest.raises(ValueError, match="no zone"):
        sun_position(pd.DatetimeIndex(["2003-10-17 12:30"]), 40.0, longitude=-105.0)
