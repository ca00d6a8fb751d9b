"""The climate of a record."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from sunbot.inputs.site import Climate, Site
from sunbot.sky.climate import generated_weather
from sunbot.sky.climate_of_record import climate_from_record

LOW = (-2.0, -1.0, 2.0, 5.0, 9.0, 12.0, 14.0, 14.0, 11.0, 7.0, 3.0, 0.0)
CLIMATE = Climate(
    ghi_kwh_m2_day=(0.8, 1.5, 2.7, 4.0, 5.0, 5.4, 5.5, 4.7, 3.3, 1.9, 1.0, 0.7),
    temp_min_c=LOW,
    temp_max_c=tuple(value + 9.0 for value in LOW),
    wind_m_s=(3.0,) * 12,
    year_to_year=(0.3,) * 12,
)
SITE = Site(name="Ridge", latitude=47.0, longitude=8.0, altitude_m=500.0, time_zone="Europe/Zurich", climate=CLIMATE)


def test_climate_goes_round():
    """Years drawn from a climate, taken as a record, give that climate back within the luck of the draw."""
    found = climate_from_record(generated_weather(SITE, years=60, seed=8), SITE)
    # 12 %: three standard errors of a mean that varies by 0.3, over 60 years
    assert found.ghi_kwh_m2_day == pytest.approx(CLIMATE.ghi_kwh_m2_day, rel=0.12)
    assert found.temp_min_c == pytest.approx(CLIMATE.temp_min_c, abs=1.2)
    assert found.temp_max_c == pytest.approx(CLIMATE.temp_max_c, abs=1.2)
    assert found.wind_m_s == CLIMATE.wind_m_s
    assert np.mean(found.year_to_year) == pytest.approx(0.3, rel=0.1)


def test_monthly_light_is_that_of_the_table():
    """Each month's mean is the mean of its steps by the site's standard clock, in kWh/m2 a day."""
    weather = generated_weather(SITE, years=2, seed=8)
    found = climate_from_record(weather, SITE)
    ghi = weather.table["ghi"].to_numpy().reshape(2, 365, 24)
    assert found.ghi_kwh_m2_day[0] == pytest.approx(ghi[:, :31].mean() * 0.024, abs=5e-4)
    assert found.ghi_kwh_m2_day[11] == pytest.approx(ghi[:, 334:].mean() * 0.024, abs=5e-4)


def test_few_years_and_typical_years_tell_no_variation():
    """Under 5 years, or a typical year, year_to_year stays open."""
    weather = generated_weather(SITE, years=6, seed=8)
    assert climate_from_record(weather, SITE).year_to_year is not None
    assert climate_from_record(replace(weather, kind="typical"), SITE).year_to_year is None
    assert climate_from_record(generated_weather(SITE, years=4, seed=8), SITE).year_to_year is None
