"""The sun's arc for audits."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.sky.sun_arc import sun_arc
from sunbot.types import Place

PLACES = [Place(36.1, -79.95, 270.0, "UTC"), Place(-33.9, 151.2, 5.0, "UTC"), Place(62.97, -141.9, 522.0, "UTC")]


@pytest.mark.parametrize("place", PLACES, ids=["mid", "south", "north"])
def test_height_agrees_with_the_full_solar_position(place: Place):
    """The arc's zenith angle lies within 0.02 degrees of the NREL solar position algorithm, 1960 to 2049."""
    times = pd.date_range("1960-01-01", "2049-12-31", freq="41h17min", tz="UTC", unit="s")
    # Published: Reda & Andreas, NREL/TP-560-34302, as in pvlib; 0.01 degrees is what the short formula promises.
    full = pvlib.solarposition.get_solarposition(times, place.latitude, place.longitude)["zenith"].to_numpy()
    assert np.abs(np.degrees(np.arccos(sun_arc(times, place).cos_zenith())) - full).max() < 0.02


def test_light_above_the_air_agrees_with_the_full_distance():
    """Extraterrestrial light lies within 0.05 % of the one from the NREL algorithm's sun distance."""
    times = pd.date_range("2001-01-01", periods=365, freq="D", tz="UTC", unit="s")
    full = pvlib.irradiance.get_extra_radiation(times, solar_constant=1361.0, method="nrel").to_numpy()
    assert sun_arc(times, PLACES[0]).extra_w_m2 == pytest.approx(full, rel=5e-4)


def test_a_shift_of_the_clock_is_the_sun_of_another_time():
    """The arc shifted by 90 minutes equals the arc of times 90 minutes later, up to what the declination moves."""
    times = pd.date_range("2001-03-20", periods=48, freq="h", tz="UTC", unit="s")
    later = sun_arc(times + pd.Timedelta(minutes=90), PLACES[0]).cos_zenith()
    arc = sun_arc(times, PLACES[0])
    assert arc.cos_zenith(90.0) == pytest.approx(later, abs=6e-4)  # 0.4 degrees a day x 1.5 h = 0.025 degrees
    assert arc.shifted(90.0).cos_zenith() == pytest.approx(arc.cos_zenith(90.0), abs=1e-12)


def test_highest_in_is_at_noon_inside_a_long_step():
    """The highest sun of a step is at least that of its middle, and at its later end in the morning."""
    times = pd.date_range("2001-06-21", periods=24, freq="h", tz="UTC", unit="s")
    arc = sun_arc(times, PLACES[0])
    morning = (arc.hour_angle_rad > -2.0) & (arc.hour_angle_rad < -0.5)
    assert (arc.highest_in(1.0) >= arc.cos_zenith()).all()
    assert arc.highest_in(1.0)[morning] == pytest.approx(arc.cos_zenith(30.0)[morning])
