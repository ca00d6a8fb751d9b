"""The room behind the window: air and light."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.window import Window
from sunbot.light import room_air_c, weather_in_room
from sunbot.light.room import lamp_w_m2, scattered_share

WINDOW = Window(azimuth_deg=180.0, width_m=1.5, height_m=1.0, room_area_m2=75.0, reflectance=0.5)


def test_what_a_surface_takes_of_all_light_is_all_that_entered():
    """In the balance of the room what its surfaces swallow is what came in: light on them x A (1 - R) + first hit."""
    flux = 37.0
    on_surfaces = flux / 1.5 * scattered_share(WINDOW) * 75.0
    assert on_surfaces * (1.0 - 0.5) + flux * (1.0 - 0.5) == pytest.approx(flux)
    black = WINDOW.model_copy(update={"reflectance": 0.0})
    assert scattered_share(black) == 0.0


def test_the_room_follows_the_air_outside_within_its_band(make_weather):
    """Heating holds the lower end, airing the upper one, between them it is as outside."""
    weather = make_weather()
    weather.table["temp_air"] = np.linspace(-20.0, 40.0, 8760)
    air = room_air_c(weather, WINDOW)
    assert air.min() == 18.0
    assert air.max() == 24.0
    between = (weather.table["temp_air"] > 18.0) & (weather.table["temp_air"] < 24.0)
    np.testing.assert_array_equal(air[between], weather.table["temp_air"][between])


def test_weather_in_the_room_changes_the_air_alone(make_weather):
    """No wind, no snow, the room's air; light, clock and the weather handed in stay as they are."""
    weather = make_weather(snow_covered=np.ones(8760, dtype=bool))
    inside = weather_in_room(weather, WINDOW)
    assert (inside.table["wind_speed"] == 0.0).all()
    assert (inside.table["temp_air"] == 18.0).all()  # it is 10 degrees outside all year
    assert inside.snow_covered is None
    assert inside.digest == weather.digest
    np.testing.assert_array_equal(inside.table[["ghi", "dni", "dhi"]], weather.table[["ghi", "dni", "dhi"]])
    assert (weather.table["temp_air"] == 10.0).all()
    assert weather_in_room(weather, None) is weather


def test_a_room_without_lamps_is_dark_at_night(make_weather):
    """No lamp_lux, no lamp light."""
    weather = make_weather()
    assert not lamp_w_m2(WINDOW, weather).any()
    lit = WINDOW.model_copy(update={"lamp_lux": 300.0, "lamp_hours": ((8.0, 18.0),), "lamp_lm_per_w": 150.0})
    # ten hours a day of 2 W/m²
    assert lamp_w_m2(lit, weather).sum() == pytest.approx(365 * 10 * 2.0, rel=1e-3)
