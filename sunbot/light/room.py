"""The room behind the window: light its surfaces scatter, its lamps, its air."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..calendar import local_clock, share_in_hours
from ..inputs.window import Window
from ..sky.weather import Weather
from ..types import FloatArray


def scattered_share(window: Window) -> float:
    """Light on every surface of the room over the flux per area of the opening.

    The flux comes back R/(1-R) times, after the first surface it meets, and spreads evenly over all of the room.

    Source
    ------
    Published: the integrating sphere; the same balance stands behind the average daylight factor of BS 8206-2.
    """
    opening_m2 = window.width_m * window.height_m
    return opening_m2 * window.reflectance / (window.room_area_m2 * (1.0 - window.reflectance))


def lamp_w_m2(window: Window, weather: Weather) -> FloatArray:
    """Lamp light on the panel over the reference rows [W/m²]; (n_rows,)."""
    if window.lamp_lux <= 0.0:
        return np.zeros(len(weather.ref_times))
    clock = local_clock(weather.ref_times, weather.place.time_zone, reference=weather.kind != "record")
    on = share_in_hours(clock.hour, window.lamp_hours, weather.step_h)
    return on * (window.lamp_lux / window.lamp_lm_per_w)


def room_air_c(weather: Weather, window: Window) -> FloatArray:
    """Air of the room [°C], (n_times,): that outside, held within what heating and airing allow.

    Source
    ------
    Common practice.
    """
    outside_c = weather.table["temp_air"].to_numpy(dtype=np.float64)
    return np.asarray(np.clip(outside_c, window.room_min_c, window.room_max_c))


def weather_in_room(weather: Weather, window: Window | None) -> Weather:
    """The weather as cells and battery feel it: the room's air, no wind, no snow; without a window as it is.

    Light and digest stay those of the weather outside.
    """
    if window is None:
        return weather
    table = weather.table.assign(temp_air=room_air_c(weather, window), wind_speed=0.0)
    return replace(weather, table=table, snow_covered=None)
