"""The weather along a route is, day by day, that of the stop the robot is at."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.errors import InputError
from sunbot.inputs.site import Climate, Site, Stop, WeatherSource
from sunbot.sky import weather_for
from sunbot.sky.legs import MOST_LEGS, distance_km, legs_of
from sunbot.sky.other_years import other_years
from sunbot.sky.stop_climate import climate_at
from sunbot.sky.world import monthly_extraterrestrial_kwh

HOME = Climate(
    ghi_kwh_m2_day=[0.6, 1.2, 2.4, 4.0, 5.2, 5.5, 5.2, 4.5, 3.1, 1.8, 0.8, 0.5], temp_min_c=4.0, temp_max_c=12.0
)
AWAY = Climate(
    ghi_kwh_m2_day=[0.3, 0.9, 2.2, 3.9, 5.1, 5.5, 5.2, 4.2, 2.6, 1.3, 0.4, 0.15], temp_min_c=-9.0, temp_max_c=-3.0
)


def site_with(*stops, **keys):
    base = {"latitude": 54.2, "longitude": 10.1, "time_zone": "Europe/Berlin", "climate": HOME, "snow_days": 5.0}
    return Site(name="Bay", **(base | keys), stop=stops)


def stop(start, latitude=54.2, longitude=10.1, **keys):
    return Stop(start=start, latitude=latitude, longitude=longitude, **keys)


def test_a_route_that_stays_is_no_route():
    """Stops at the site itself give the site's own weather, value by value, snow included."""
    plain, route = weather_for(site_with(), years=3), weather_for(site_with(stop("03-01"), stop("09-01")), years=3)
    np.testing.assert_array_equal(route.table.to_numpy(), plain.table.to_numpy())
    np.testing.assert_array_equal(route.snow_covered, plain.snow_covered)
    assert route.digest == plain.digest


def test_each_day_is_that_of_the_stop():
    """In every year, by the dates of the standard clock; before the first date it is still at the last stop."""
    north = {"latitude": 60.0, "climate": AWAY, "altitude_m": 300.0}
    site = site_with(stop("03-01"), stop("09-10", **north))
    route = weather_for(site, years=2)
    home, away = weather_for(site_with(), years=2), weather_for(site_with(**north), years=2)
    days = (np.arange(8760) // 24)[route.row]
    at_home = (days >= 59) & (days < 59 + 193)  # 1 March is day 59, 10 September 193 days later
    np.testing.assert_array_equal(route.stay, np.where((days >= 59) & (days < 252), 0, 1)[:8760])
    np.testing.assert_array_equal(route.table.to_numpy()[at_home], home.table.to_numpy()[at_home])
    np.testing.assert_array_equal(route.table.to_numpy()[~at_home], away.table.to_numpy()[~at_home])
    np.testing.assert_array_equal(route.snow_covered[~at_home], away.snow_covered[~at_home])
    assert [stay.place.latitude for stay in route.stays] == [54.2, 60.0]
    assert route.place.latitude == 54.2


def test_other_years_go_on_along_the_route():
    """Years 3 and 4 of a route of four, none of the first two."""
    site = site_with(stop("03-01"), stop("09-10", 56.0, 11.0, climate=AWAY))
    two, four = weather_for(site, years=2), weather_for(site, years=4)
    more = other_years(two, site, seed=1)
    assert more is not None
    np.testing.assert_array_equal(more.table.to_numpy(), four.table.to_numpy()[len(two.table) :])


def test_a_clear_sky_follows_the_route_without_a_climate():
    """Brighter in June at the northern stop's long days, darker in December."""
    clear = {"weather": WeatherSource(source="clear-sky"), "climate": None, "snow_days": None}
    stops = (stop("01-01"), stop("06-01", 64.0), stop("07-01"), stop("12-01", 64.0))
    route, plain = weather_for(site_with(*stops, **clear)), weather_for(site_with(**clear))
    month = np.repeat(np.arange(12), np.array([31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31]) * 24)
    ratio = np.bincount(month, route.table["ghi"]) / np.bincount(month, plain.table["ghi"])
    np.testing.assert_allclose(ratio[[0, 1, 2, 3, 4, 6, 7, 8, 9, 10]], 1.0, rtol=1e-12)
    assert ratio[11] < 0.3
    assert "clear-sky" in [caution.code for caution in route.cautions]


def test_weather_of_one_place_is_refused_for_a_route():
    """A file cannot follow the robot."""
    site = site_with(stop("03-01"))
    elsewhere = site.model_copy(update={"weather": WeatherSource(source="file", file="a.csv")})
    with pytest.raises(InputError, match='"file" is the weather of one place'):
        weather_for(elsewhere)


def test_files_beside_a_site_must_have_been_read():
    """A site made in Python with the name of a file is a caller's mistake, not a site without a horizon."""
    with pytest.raises(ValueError, match="read by load_site"):
        weather_for(site_with(horizon_file="skyline.csv"))


def test_a_stop_near_the_site_has_its_clearness():
    """Within 200 km the light differs by the latitude alone."""
    near = stop("03-01", 55.5, 10.1)
    climate, cautions = climate_at(site_with(near), near)
    light = np.array(HOME.ghi_kwh_m2_day) / monthly_extraterrestrial_kwh(54.2) * monthly_extraterrestrial_kwh(55.5)
    np.testing.assert_allclose(climate.ghi_kwh_m2_day, light, rtol=1e-12)
    assert climate.temp_min_c == HOME.temp_min_c
    assert cautions == ()


def test_a_stop_far_off_reads_the_world_table_on_land_and_the_site_at_sea():
    """Both say so; without any climate at sea it is refused, naming the stop."""
    inland, at_sea = stop("03-01", 48.0, 12.0), stop("05-01", 45.0, -30.0, name="Mid ocean")
    for where, code in ((inland, "coarse-stop"), (at_sea, "climate-from-afar")):
        _, cautions = climate_at(site_with(where), where)
        assert [caution.code for caution in cautions] == [code]
    with pytest.raises(InputError, match=r"Mid ocean: climate: .*it lies in the sea.*Write \[stop\.climate\]"):
        weather_for(site_with(at_sea, climate=None))


def test_light_that_no_sky_gives_names_the_stop():
    """The climate of a southern summer does not fit a northern December."""
    bright = HOME.model_copy(update={"ghi_kwh_m2_day": (6.0,) * 12})
    with pytest.raises(InputError, match=r"North: .*ghi_kwh_m2_day: January"):
        weather_for(site_with(stop("03-01", 60.0, climate=bright, name="North")))


def test_a_long_track_is_taken_in_legs():
    """At most 24, each standing on the track, every day within the reach that the caution tells."""
    days = [f"{month:02d}-{day:02d}" for month in range(1, 13) for day in range(1, 29)]
    track = tuple(stop(day, 40.0 + 0.05 * k, 10.0 + 0.03 * k) for k, day in enumerate(days))
    legs, [caution] = legs_of(track)
    assert MOST_LEGS / 2 <= len(legs) <= MOST_LEGS
    assert caution.code == "track-in-legs"
    points = {(one.latitude, one.longitude) for one in track}
    assert all((leg.latitude, leg.longitude) in points for leg in legs)
    assert [leg.start for leg in legs] == sorted(leg.start for leg in legs)
    assert legs[0].start == "01-01"
    starts = [leg.start for leg in legs]
    for one in track:
        leg = legs[np.searchsorted(starts, one.start, side="right") - 1]
        assert distance_km(one, leg) < 130.0  # 24 legs of 2,000 km


def test_stops_with_a_climate_of_their_own_are_never_joined():
    """However many there are."""
    many = tuple(stop(f"{1 + k // 28:02d}-{1 + k % 28:02d}", climate=HOME if k % 2 else None) for k in range(60))
    legs, _ = legs_of(many)
    assert len(legs) == 60


def test_a_degree_of_latitude_has_its_length():
    """A great circle. Published: the metre was made so that a quarter of a meridian is 10,000 km."""
    assert distance_km(stop("01-01", 0.0, 0.0), stop("01-01", 90.0, 0.0)) == pytest.approx(10_000.0, rel=2e-3)
