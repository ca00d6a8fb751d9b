"""Mending: gaps, night light, missing columns, scale."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.errors import InputError
from sunbot.sky import weather_for
from sunbot.sky.mend import climate_air, filled_light
from sunbot.sky.sun_height import sun_height
from sunbot.types import Place


@pytest.fixture
def year(site_of, invented_record):
    return invented_record(site_of(), "2018-12-31T23:00", "2019-12-31T23:00")


def _codes(weather) -> dict[str, str]:
    return {caution.code: caution.text for caution in weather.cautions}


def test_nights_left_out_of_a_file_are_dark_not_missing(site_of, year, write_csv):
    """A logger that sleeps at night loses no light: dark gaps are 0, and nothing is counted as filled light."""
    asleep = year[year["ghi"] > 0.0]
    weather = weather_for(site_of(file=write_csv(asleep.drop(columns="temp_air")), label="start"))
    ghi = weather.table["ghi"].reindex(year.index)
    assert ghi.sum() == pytest.approx(year["ghi"].sum(), rel=1e-3)
    assert "climate-air" in _codes(weather)


@pytest.mark.parametrize(("hours", "filled"), [(1, True), (3, True), (4, False), (30, False)])
def test_gaps_up_to_three_lit_hours_are_filled(hours, filled):
    """A clear day with a hole about noon: filled along the sun's height within 2 %, or left for others to judge."""
    times = pd.date_range("2019-06-20T00:30Z", periods=96, freq="h", unit="s")
    sun = sun_height(times, 1.0, Place(47.3, 8.1, 540.0, "UTC"))
    true = 0.7 * sun.extra_w_m2 * np.maximum(sun.sine, 0.0)
    ghi = true.copy()
    ghi[34 : 34 + hours] = np.nan
    out, filled_h = filled_light(ghi, sun, step_h=1.0)
    assert np.isnan(out).any() == (not filled)
    if filled:
        assert filled_h == hours
        # The clearness is the same all day, so that the sun's height is all there is to follow.
        np.testing.assert_allclose(out, true, atol=1e-9)


def test_short_holes_day_after_day_are_one_long_gap():
    """A fortnight missing in a polar spring has few lit hours a day; it is still a fortnight."""
    times = pd.date_range("2019-02-01T00:30Z", periods=24 * 20, freq="h", unit="s")
    sun = sun_height(times, 1.0, Place(69.6, 18.9, 10.0, "UTC"))
    ghi = np.where(sun.lit, 5.0, 0.0)
    ghi[48 : 48 + 24 * 14] = np.nan
    out, _ = filled_light(ghi, sun, step_h=1.0)
    assert np.isnan(out).sum() == 24 * 14


def test_small_negative_readings_of_the_night_are_zero(site_of, year, write_csv):
    """Thermopile offsets are no light; nothing below 0 and nothing in the dark is left."""
    cold = year.copy()
    cold.loc[cold["ghi"] == 0.0, ["ghi", "dhi"]] = -3.0
    weather = weather_for(site_of(file=write_csv(cold), label="start"))
    assert weather.table["ghi"].min() == 0.0
    assert weather.table["ghi"].sum() == pytest.approx(year["ghi"].sum(), rel=1e-3)


def test_light_in_full_night_is_taken_out_and_said(site_of, year, write_csv):
    """A lamp of 8 W/m² in 30 night hours is no sun."""
    lamp = year.copy()
    lamp.iloc[24 * np.arange(30) + 2, 0] = 8.0
    weather = weather_for(site_of(file=write_csv(lamp), label="start"))
    assert "in 30 steps" in _codes(weather)["night-light"]
    sun = sun_height(weather.times, 1.0, weather.place)
    assert weather.table.loc[~sun.lit, ["ghi", "dni", "dhi"]].to_numpy().max() == 0.0


def test_light_of_sunrise_is_never_dropped(site_of, year, write_csv):
    """Steps in which the sun only just rises keep what was measured; estimated light there is all diffuse."""
    measured = weather_for(site_of(file=write_csv(year), label="start")).table
    np.testing.assert_allclose(measured[["ghi", "dni", "dhi"]], year[["ghi", "dni", "dhi"]], atol=1e-9)
    weather = weather_for(site_of(file=write_csv(year.drop(columns=["dni", "dhi"])), label="start"))
    table = weather.table
    down = (sun_height(weather.times, 1.0, weather.place).sine <= 0.0) & (table["ghi"].to_numpy() > 0.0)
    assert down.sum() > 50
    assert (table["dni"].to_numpy()[down] == 0.0).all()
    np.testing.assert_array_equal(table["dhi"].to_numpy()[down], table["ghi"].to_numpy()[down])
    assert table["ghi"].sum() == pytest.approx(year["ghi"].sum(), rel=1e-9)


def test_scale_applies_to_all_light_by_month_of_the_site(site_of, year, write_csv):
    """Twelve factors, months of the standard clock; the air is left alone."""
    factors = tuple(0.5 + 0.1 * month for month in range(12))
    name = write_csv(year)
    plain = weather_for(site_of(file=name, label="start")).table
    scaled = weather_for(site_of(file=name, label="start", scale=factors)).table
    month = (plain.index + pd.Timedelta("1h")).month.to_numpy() - 1
    for column in ("ghi", "dni", "dhi"):
        np.testing.assert_allclose(scaled[column], plain[column] * np.array(factors)[month])
    pd.testing.assert_series_equal(scaled["temp_air"], plain["temp_air"])


def test_missing_air_without_a_climate_is_refused(site_of, year, write_csv):
    """No temperature anywhere: the message names the two ways out."""
    name = write_csv(year.drop(columns=["temp_air"]))
    with pytest.raises(InputError, match=r"no temp_air.*a \[climate\] into the site file"):
        weather_for(site_of(file=name, label="start", climate=None))


def test_air_from_the_climate_has_its_means_and_extremes(site_of):
    """Daily minimum and maximum are the month's, the warmest hour three hours after solar noon."""
    site = site_of(longitude=15.0, time_zone="Etc/GMT-1")
    times = pd.date_range("2001-07-01T00:00+01:00", periods=31 * 144, freq="10min", unit="s").tz_convert("UTC")
    air = climate_air(pd.DatetimeIndex(times), site.climate, site)
    assert air["temp_air"].min() == pytest.approx(14.0, abs=0.01)
    assert air["temp_air"].max() == pytest.approx(25.0, abs=0.01)
    assert air["temp_air"].mean() == pytest.approx(19.5, abs=0.01)
    assert np.argmax(air["temp_air"][:144]) / 6 == pytest.approx(15.0)
    assert (air["wind_speed"] == 2.5).all()


def test_no_light_at_all_is_refused(site_of, year, write_csv):
    """A column of zeros is a dead sensor, not a dark year."""
    dark = year.assign(ghi=0.0, dni=0.0, dhi=0.0)
    with pytest.raises(InputError, match="ghi holds no light at all"):
        weather_for(site_of(file=write_csv(dark), label="start"))
