"""A first climate anywhere on land, and a plain no elsewhere."""

from __future__ import annotations

from zoneinfo import ZoneInfo

import numpy as np
import pytest

from sunbot.errors import InputError
from sunbot.inputs.site import Climate, Site
from sunbot.sky.climate import generated_weather
from sunbot.sky.world import first_climate, monthly_extraterrestrial_kwh, suggested_zone

ON_LAND = {
    "Utrecht": (52.1, 5.1),
    "Fairbanks": (64.8, -147.7),
    "Tromso": (69.6, 19.0),
    "Nairobi": (-1.3, 36.8),
    "La Paz": (-16.5, -68.1),
    "Ushuaia": (-54.8, -68.3),
    "Delhi": (28.6, 77.2),
    "Perth": (-31.9, 115.9),
    "Phoenix": (33.4, -112.0),
    "Suva": (-18.1, 178.4),
}


@pytest.mark.parametrize("name", ON_LAND)
def test_a_first_climate_makes_weather(name):
    """Ten places on six continents and an island: twelve sensible months that the generator takes as they are."""
    latitude, longitude = ON_LAND[name]
    first = first_climate(latitude, longitude)
    climate = Climate(ghi_kwh_m2_day=first.ghi_kwh_m2_day, temp_min_c=first.temp_min_c, temp_max_c=first.temp_max_c)
    zone = suggested_zone(longitude)
    place = {"latitude": latitude, "longitude": longitude, "altitude_m": first.altitude_m, "time_zone": zone}
    weather = generated_weather(Site(name=name, climate=climate, **place), years=1, seed=1)
    assert weather.table["ghi"].max() < 1300.0
    assert "MERRA-2" in first.source
    assert "13 %" in first.uncertainty
    warmest = np.argmax(first.temp_max_c)
    assert warmest == (6 if latitude > 0 else 0)


@pytest.mark.parametrize(
    ("latitude", "longitude", "words"),
    [
        (40.0, -40.0, "lies in the sea"),
        (55.0, 3.0, "lies in the sea"),
        (89.0, 0.0, "lies in the sea"),
        (72.0, -40.0, "ice sheets"),
        (-78.0, 166.7, "nearest data lie|lies in the sea"),
        (21.3, -157.85, "nearest data lie"),
    ],
)
def test_no_data_over_sea_and_ice(latitude, longitude, words):
    """There it says that there is no data, why, and what to give instead."""
    with pytest.raises(InputError, match=f"no data for it: (it )?.*({words}).*--from-weather"):
        first_climate(latitude, longitude)


def test_yearly_light_of_known_places():
    """The order of the year's light is that of the world: desert over tropics over the North Sea's coast."""
    # From memory: Phoenix about 5.6 to 5.8, Nairobi 5.4 to 5.8, Utrecht 2.7 to 2.9 kWh/m2 a day; table good to 13 %
    for name, low, high in (("Phoenix", 5.0, 6.3), ("Nairobi", 5.0, 6.3), ("Utrecht", 2.5, 3.1)):
        assert low < np.mean(first_climate(*ON_LAND[name]).ghi_kwh_m2_day) < high


def test_neighbours_join_smoothly_and_the_date_line_is_no_edge():
    """A tenth of a degree changes no month by more than a tenth, across cells and across 180 degrees."""
    for (lat_a, lon_a), (lat_b, lon_b) in (((49.45, 7.5), (49.55, 7.5)), ((-17.8, 178.9), (-17.8, 179.0))):
        a, b = (np.array(first_climate(*at).ghi_kwh_m2_day) for at in ((lat_a, lon_a), (lat_b, lon_b)))
        assert a == pytest.approx(b, rel=0.1)
    west, east = (np.array(first_climate(66.5, lon).ghi_kwh_m2_day) for lon in (-179.95, 179.95))
    assert west == pytest.approx(east, rel=0.05, abs=0.01)


def test_zones_exist_and_follow_the_sun():
    """Every longitude has a zone that Python knows, within half an hour of its mean sun."""
    from datetime import datetime

    for longitude in range(-180, 181, 5):
        offset = ZoneInfo(suggested_zone(float(longitude))).utcoffset(datetime(2001, 1, 1))
        assert abs(offset.total_seconds() / 240.0 - longitude) <= 7.5


def test_light_above_the_air_agrees_with_a_printed_table():
    """Monthly mean daily light above the air at 45 N."""
    # Published: Duffie & Beckman, 4th ed. 2013, Table 1.10.1, MJ/m2. 0.65: one day stands for the month there, and its
    # one-term declination is off by up to a degree in autumn; months around the solstices agree within 0.3
    printed = np.array([12.2, 17.4, 25.1, 33.2, 39.2, 41.7, 40.4, 35.3, 27.8, 19.6, 13.3, 10.7])
    found = monthly_extraterrestrial_kwh(45.0) * 3.6
    assert found == pytest.approx(printed, abs=0.65)
    assert found[[0, 4, 5, 6, 11]] == pytest.approx(printed[[0, 4, 5, 6, 11]], abs=0.3)
