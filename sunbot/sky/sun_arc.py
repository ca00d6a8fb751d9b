"""Height of the sun over long series and shifted clocks, cheaply: for audits, not for harvests."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pandas as pd

from ..calendar import equation_of_time_min
from ..types import FloatArray, IntArray, Place

SOLAR_CONSTANT_W_M2 = 1361.0
"""Published: Kopp & Lean, Geophys. Res. Lett. 38 (2011) L01706."""

_DAY_S = 86400


@dataclass(frozen=True, eq=False)
class SunArc:
    """The sun's daily arc at each time, kept so that any shift of the clock is one cosine; arrays (n_times,).

    rise, swing : cos(zenith) = rise + swing cos(hour_angle). hour_angle_rad : 0 at solar noon, negative before.
    extra_w_m2 : extraterrestrial normal irradiance. day : number of the solar day, from 0.
    """

    rise: FloatArray
    swing: FloatArray
    hour_angle_rad: FloatArray
    extra_w_m2: FloatArray
    day: IntArray

    def cos_zenith(self, shift_min: float = 0.0) -> FloatArray:
        """Cosine of the true zenith angle, negative below the horizon, ``shift_min`` after the times."""
        return np.asarray(self.rise + self.swing * np.cos(self.hour_angle_rad + np.radians(shift_min / 4.0)))

    def highest_in(self, step_h: float, *, shift_min: float = 0.0) -> FloatArray:
        """Largest cosine of the zenith angle within each step, judged at its start, middle and end."""
        half = step_h * 30.0
        ends = np.maximum(self.cos_zenith(shift_min - half), self.cos_zenith(shift_min + half))
        return np.maximum(ends, self.cos_zenith(shift_min))

    def take(self, rows: IntArray) -> SunArc:
        """The arc at some of its times; ``rows`` of any shape."""
        return SunArc(*(getattr(self, name)[rows] for name in self.__dataclass_fields__))

    def shifted(self, shift_min: float) -> SunArc:
        """The arc as clocks that are ``shift_min`` behind would have met it; the solar days stay."""
        return replace(self, hour_angle_rad=self.hour_angle_rad + np.radians(shift_min / 4.0))


def sun_arc(times: pd.DatetimeIndex, place: Place) -> SunArc:
    """The sun's arc over ``place`` at UTC ``times``; within 0.02 degrees of a full solar position, 1950 to 2050.

    Source
    ------
    Published: The Astronomical Almanac, low-precision formulas for the Sun (page C5), from memory; held against the
    solar position algorithm of NREL/TP-560-34302 in the tests.
    """
    seconds = np.asarray(times.tz_convert("UTC").as_unit("s").asi8, dtype=np.int64)
    # The slow parts, once a day and joined linearly: declination moves by under 0.5 degrees a day.
    days = np.arange(seconds.min() // _DAY_S, seconds.max() // _DAY_S + 2) * _DAY_S
    since_2000 = (days - 946_728_000) / _DAY_S
    anomaly = np.radians(357.528 + 0.9856003 * since_2000)
    longitude = np.radians(280.460 + 0.9856474 * since_2000) + np.radians(
        1.915 * np.sin(anomaly) + 0.020 * np.sin(2.0 * anomaly)
    )
    sin_declination = np.sin(np.radians(23.439 - 4e-7 * since_2000)) * np.sin(longitude)
    distance_au = 1.00014 - 0.01671 * np.cos(anomaly) - 0.00014 * np.cos(2.0 * anomaly)
    latitude = np.radians(place.latitude)
    solar_s = np.interp(seconds, days, 60.0 * equation_of_time_min(days)) + place.longitude * 240.0 + seconds
    sin_dec = np.interp(seconds, days, sin_declination)
    day = np.floor(solar_s / _DAY_S).astype(np.int64)
    return SunArc(
        rise=np.asarray(np.sin(latitude) * sin_dec),
        swing=np.asarray(np.cos(latitude) * np.sqrt(1.0 - sin_dec**2)),
        hour_angle_rad=np.asarray((solar_s / _DAY_S - day - 0.5) * 2.0 * np.pi),
        extra_w_m2=np.asarray(np.interp(seconds, days, SOLAR_CONSTANT_W_M2 / distance_au**2)),
        day=day - day.min(),
    )
