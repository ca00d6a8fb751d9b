"""Where the sun stands at the middle of each step, or over the lit part of steps in which it rises or sets."""

from __future__ import annotations

import numpy as np
import pandas as pd
from pvlib import atmosphere, irradiance, spa
from scipy.interpolate import CubicSpline

from ..sky.weather import Weather
from ..types import FloatArray, Place
from .carriers import Sun

_DELTA_T_S = 67.0  # terrestrial less universal time; ten seconds more move the sun by 0.0001 deg
_REFRACTION_AT_HORIZON_DEG = 0.5667  # Published: Reda & Andreas, NREL/TP-560-34302 (2008), section 3.11
_SIDEREAL_DEG_S = 360.98564736629 / 86400.0
_NODE_S = 6 * 3600.0  # right ascension and declination between six-hourly nodes: within 0.00001 deg
_SUB_STEPS = 13  # odd: the middle is one of them
_EARTH_RATE_DEG_H = 15.05
_EDGE_DEG = 1.2  # refraction, the sun's own motion and the curvature of its path near the horizon
_TEMP_C = 12.0  # of the air, common practice; 30 K off, refraction at the horizon is 0.06 deg off


def sun_over(weather: Weather) -> Sun:
    """The sun over the reference rows of ``weather``, at the middles of the steps.

    On a route each row is seen from the stop it belongs to. Where the sun rises or sets within a step, zenith and
    azimuth are those of its mean direction while it is up. Where it stays down the zenith is above 90.

    Source
    ------
    Published: Reda & Andreas, NREL/TP-560-34302 (2008), by pvlib; air mass Kasten & Young, Applied Optics 28 (1989)
    4735; extraterrestrial irradiance Spencer, Search 2 (1971) 172, with 1366.1 W/m².
    """
    if weather.stay is None:
        return _sun_at(weather.ref_times, weather.place, weather.step_h)
    along: dict[str, FloatArray] = {}
    for number, stay in enumerate(weather.stays):
        rows = np.flatnonzero(weather.stay == number)
        if rows.size:
            for name, values in vars(_sun_at(weather.ref_times[rows], stay.place, weather.step_h)).items():
                along.setdefault(name, np.empty(weather.stay.size))[rows] = values
    return Sun(**along)


def _sun_at(times: pd.DatetimeIndex, place: Place, step_h: float) -> Sun:
    """The sun at one place, over steps of ``step_h`` around ``times``."""
    seconds = times.as_unit("s").asi8.astype(np.float64)
    path = _SunPath(seconds[0] - 86400.0, seconds[-1] + 86400.0)
    pressure_pa = float(atmosphere.alt2pres(place.altitude_m))

    def position(at: FloatArray) -> tuple[FloatArray, FloatArray]:
        return path.seen_from(at, place.latitude, longitude=place.longitude, pressure_pa=pressure_pa)

    zenith_deg, azimuth_deg = position(seconds)
    lit = (zenith_deg < 90.0).astype(np.float64)
    reach_deg = _EARTH_RATE_DEG_H * np.cos(np.radians(place.latitude)) * step_h / 2 + _EDGE_DEG
    edge = np.flatnonzero(np.abs(zenith_deg - 90.0) < reach_deg)
    inside = ((np.arange(_SUB_STEPS) + 0.5) / _SUB_STEPS - 0.5) * step_h * 3600.0
    parts = position((seconds[edge, None] + inside).ravel())
    shape = (edge.size, _SUB_STEPS)
    share, up_zenith, up_azimuth = _mean_while_up(parts[0].reshape(shape), parts[1].reshape(shape))
    lit[edge] = share
    part = (share > 0.0) & (share < 1.0)
    zenith_deg[edge[part]], azimuth_deg[edge[part]] = up_zenith[part], up_azimuth[part]
    extra_w_m2 = irradiance.get_extra_radiation(times.day_of_year.to_numpy(), method="spencer")
    return Sun(
        zenith_deg=zenith_deg,
        azimuth_deg=azimuth_deg,
        lit=lit,
        extra_w_m2=np.asarray(extra_w_m2, dtype=np.float64),
        airmass=np.asarray(atmosphere.get_relative_airmass(np.minimum(zenith_deg, 90.0)), dtype=np.float64),
    )


def sun_position(
    times: pd.DatetimeIndex,
    latitude: float,
    *,
    longitude: float,
    pressure_pa: float = 101325.0,
    temp_air_c: float = _TEMP_C,
) -> tuple[FloatArray, FloatArray]:
    """Apparent zenith and azimuth (from north, clockwise) of the sun at the instants ``times`` [deg].

    Parameters
    ----------
    times : (n_times,)
        Zone-aware instants; ``ValueError`` where they carry no zone.
    latitude, longitude : float
        Degrees, north and east positive.
    pressure_pa, temp_air_c : float
        Of the air, for refraction.

    Source
    ------
    Published: Reda & Andreas, NREL/TP-560-34302 (2008), by pvlib.
    """
    if times.tz is None:
        raise ValueError("times carry no zone; localize them first")
    seconds = times.as_unit("s").asi8.astype(np.float64)
    path = _SunPath(float(seconds.min()) - 86400.0, float(seconds.max()) + 86400.0)
    return path.seen_from(seconds, latitude, longitude=longitude, pressure_pa=pressure_pa, temp_air_c=temp_air_c)


class _SunPath:
    """The sun among the stars over a span of time: smooth, so it is worked out at nodes and joined by splines."""

    def __init__(self, first_s: float, last_s: float) -> None:
        nodes = np.arange(first_s, last_s + 4 * _NODE_S, _NODE_S)
        sidereal, ascension, declination = spa.solar_position_numpy(
            nodes, 0.0, 0.0, 0.0, 1013.25, _TEMP_C, _DELTA_T_S, _REFRACTION_AT_HORIZON_DEG, 1, sst=True
        )
        self._first_s = first_s
        # hour angle at longitude 0, less the steady turning of the earth
        slow = np.unwrap(sidereal - ascension - _SIDEREAL_DEG_S * (nodes - first_s), period=360.0)
        self._smooth = CubicSpline(nodes - first_s, np.column_stack([slow, declination]))

    def seen_from(
        self,
        seconds: FloatArray,
        latitude: float,
        *,
        longitude: float,
        pressure_pa: float,
        temp_air_c: float = _TEMP_C,
    ) -> tuple[FloatArray, FloatArray]:
        """Apparent zenith and azimuth [deg] at ``seconds`` since 1970-01-01 UTC."""
        since = seconds - self._first_s
        slow, declination = self._smooth(since).T
        hour_angle = (slow + _SIDEREAL_DEG_S * since + longitude) % 360.0
        parallax = spa.equatorial_horizontal_parallax(1.0)  # the distance moves it by 0.00004 deg
        u = spa.uterm(latitude)
        x, y = spa.xterm(u, latitude, 0.0), spa.yterm(u, latitude, 0.0)
        shift = spa.parallax_sun_right_ascension(x, parallax, hour_angle, declination)
        declination = spa.topocentric_sun_declination(declination, x, y, parallax, shift, hour_angle)
        hour_angle = spa.topocentric_local_hour_angle(hour_angle, shift)
        true_deg = spa.topocentric_elevation_angle_without_atmosphere(latitude, declination, hour_angle)
        refraction_deg = spa.atmospheric_refraction_correction(
            pressure_pa / 100.0, temp_air_c, true_deg, _REFRACTION_AT_HORIZON_DEG
        )
        south_deg = spa.topocentric_astronomers_azimuth(hour_angle, declination, latitude)
        return 90.0 - (true_deg + refraction_deg), (south_deg + 180.0) % 360.0


def _mean_while_up(zenith_deg: FloatArray, azimuth_deg: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Share of the sub-steps (last axis) with the sun up, and zenith and azimuth of its mean direction then [deg]."""
    zenith, azimuth = np.radians(zenith_deg), np.radians(azimuth_deg)
    up = zenith_deg < 90.0
    east = np.sum(np.sin(zenith) * np.sin(azimuth), axis=-1, where=up)
    north = np.sum(np.sin(zenith) * np.cos(azimuth), axis=-1, where=up)
    height = np.sum(np.cos(zenith), axis=-1, where=up)
    mean_zenith = np.degrees(np.arctan2(np.hypot(east, north), height))
    return up.mean(axis=-1), mean_zenith, np.degrees(np.arctan2(east, north)) % 360.0
