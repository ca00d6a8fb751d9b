"""A year without clouds."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.sky import weather_for
from sunbot.sky.sun_height import mean_turbidity, sun_height
from sunbot.types import Place


def test_a_clear_year_is_whole_and_says_what_it_is(site_of):
    """8,760 hours from 1 January of the standard clock, closed, dark at night, with cautions."""
    weather = weather_for(site_of(source="clear-sky", file=None), years=50)
    table = weather.table
    assert weather.kind == "clear-sky"
    assert len(table) == 8760
    assert weather.times[0] == pd.Timestamp("2000-12-31T23:30Z")
    assert not table.isna().any().any()
    sun = sun_height(weather.times, 1.0, weather.place)
    assert table.loc[~sun.lit, "ghi"].max() == 0.0
    assert (table["ghi"] <= sun.extra_w_m2).all()
    assert {"clear-sky"} == {caution.code for caution in weather.cautions}


def test_a_clear_year_agrees_with_the_reference_library_minute_by_minute(site_of):
    """Hours are the means of a fine reckoning by pvlib with its own sun and turbidity, within 1 % a day."""
    weather = weather_for(site_of(source="clear-sky", file=None))
    place = pvlib.location.Location(47.3, 8.1, altitude=540.0)
    for day in ("2001-01-15", "2001-04-15", "2001-06-21", "2001-10-15"):
        times = pd.date_range(f"{day}T00:01:00Z", periods=720, freq="2min")
        # Turbidity and extraterrestrial light are passed in: by default pvlib asks pandas for a name it will drop.
        turbidity = float(mean_turbidity(times[:1], weather.place)[0])
        extra = float(pvlib.irradiance.get_extra_radiation(int(times.day_of_year[0])))
        fine = place.get_clearsky(times, linke_turbidity=turbidity, dni_extra=extra)["ghi"]
        ours = weather.table.loc[day, "ghi"]
        # 1 %: the library uses the apparent zenith and another solar constant.
        assert ours.sum() == pytest.approx(fine.sum() / 30, rel=0.01)


def test_without_a_climate_the_air_is_assumed_and_said(site_of):
    """The standard atmosphere at the height of the site stands in, with a caution."""
    weather = weather_for(site_of(source="clear-sky", file=None, climate=None))
    assert "assumed-air" in {caution.code for caution in weather.cautions}
    # Published: ISO 2533, 15 degC at sea level less 6.5 K/km: 11.49 degC at 540 m.
    assert weather.table["temp_air"].iloc[0] == pytest.approx(11.49, abs=0.01)


def test_turbidity_runs_through_the_monthly_means():
    """At the middle of a month it is the month's; the year closes on itself."""
    place = Place(47.3, 8.1, 540.0, "UTC")
    middles = pd.to_datetime([f"2001-{month:02d}-15" for month in range(1, 13)]).tz_localize("UTC")
    monthly = pvlib.clearsky.lookup_linke_turbidity(middles, 47.3, 8.1, interp_turbidity=False)
    # 3 %: months are not a twelfth of the year each.
    np.testing.assert_allclose(mean_turbidity(middles, place), monthly, rtol=0.03)
    ends = pd.DatetimeIndex(["2001-01-01T00:00Z", "2001-12-31T23:59Z"])
    assert np.ptp(mean_turbidity(ends, place)) < 0.01


@pytest.mark.parametrize("latitude", [-77.8, 0.0, 71.3])
def test_any_latitude_has_a_clear_year(site_of, latitude):
    """Polar night and polar day are weather like any other."""
    weather = weather_for(site_of(latitude, 20.0, 10.0, "Etc/GMT-1", source="clear-sky", file=None))
    assert np.isfinite(weather.table.to_numpy()).all()
    assert weather.table["ghi"].max() > 300.0
