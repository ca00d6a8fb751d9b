"""Cell temperatures as people read them: one figure a step, whatever the heading."""

from __future__ import annotations

from ..inputs.robot import Robot
from ..light.carriers import Light, mean_plane_w_m2
from ..sky.weather import Weather
from ..types import FloatArray
from .cells import cell_temp_c
from .panels import arrays_of


def mean_cell_temp_c(light: Light, weather: Weather, robot: Robot) -> FloatArray:
    """Temperature of the first panel's cells, mean over its headings [°C]; (n_times,)."""
    u0, u1 = arrays_of(robot)[0].heat_loss
    plane_w_m2 = mean_plane_w_m2(light)
    air_c, wind_m_s = (weather.table[name].to_numpy() for name in ("temp_air", "wind_speed"))
    return cell_temp_c(plane_w_m2, air_c, wind_m_s, u0=u0, u1=u1)
