"""The 8,760 hours that all generated years share: their sun, and the cleanest sky they can have."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import pandas as pd
import pvlib

from ..calendar import REFERENCE_YEAR, standard_offset_h
from ..types import FloatArray, IntArray, Place

HOURS_A_YEAR = 8760
PARTS = 12
"""An hour is looked at in parts of five minutes: light of the hour of sunrise comes from its lit parts alone."""

CLEAN_TURBIDITY = 2.0
"""Linke turbidity of clean, dry air; common practice."""

MONTH_DAYS = np.array([31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31])
DAY_MONTH: IntArray = np.repeat(np.arange(12), MONTH_DAYS)
"""Month 0-11 of each of the 365 days."""


@dataclass(frozen=True, eq=False)
class ReferenceSky:
    """Means over each hour of the year 2001 of the standard clock; each (365, 24).

    level_w_m2 : extraterrestrial light on the level. extra_w_m2 : on a plane that faces the sun.
    clear_w_m2, clear_beam_w_m2 : light on the level, and beam, under a clean clear sky.
    lit : share of the hour with the sun's centre above the level horizon, refraction left out.
    cosine : of the apparent zenith angle at the middle, or mean over the lit part where the sun rises or sets; 1 where
        there is none. airmass : at that angle.
    sun_up : the sun's centre is above the horizon at the middle.
    """

    level_w_m2: FloatArray
    extra_w_m2: FloatArray
    clear_w_m2: FloatArray
    clear_beam_w_m2: FloatArray
    lit: FloatArray
    cosine: FloatArray
    airmass: FloatArray
    sun_up: FloatArray


def generated_times(years: int, zone: str) -> pd.DatetimeIndex:
    """Middles of the hours of years from 2001 on without 29 February, UTC, from 1 January of the standard clock."""
    days = np.arange(f"{REFERENCE_YEAR}-01-01", f"{REFERENCE_YEAR + years}-01-01", dtype="datetime64[D]")
    in_month = (days - days.astype("datetime64[M]")).astype(np.int64)
    leap_day = (days.astype("datetime64[M]").astype(np.int64) % 12 == 1) & (in_month == 28)
    start_s = days[~leap_day].astype("datetime64[s]").astype(np.int64)
    middle_s = np.arange(24) * 3600 + 1800 - round(standard_offset_h(zone) * 3600.0)
    seconds = (start_s[:, None] + middle_s).ravel()
    return pd.DatetimeIndex(seconds.astype("datetime64[s]")).tz_localize("UTC")


def reference_sky(place: Place) -> ReferenceSky:
    """Sun and clean clear sky over the hours of 2001.

    Source
    ------
    Published: sun by Reda & Andreas, NREL/TP-560-34302; clear sky by Ineichen & Perez, Solar Energy 73 (2002) 151, both
    as in pvlib. Refraction by Saemundsson, Sky & Telescope 72 (1986) 70.
    """
    times = generated_times(1, place.time_zone)
    true_cos, middle = _cosine_in_parts(times, place)
    lit = true_cos > 0.0
    zenith = _apparent_zenith_deg(true_cos[lit])
    extra = np.asarray(pvlib.irradiance.get_extra_radiation(np.repeat(np.arange(1, 366), 24)), dtype=np.float64)
    extra_lit = np.broadcast_to(extra[:, None], lit.shape)[lit]
    pressure = pvlib.atmosphere.alt2pres(place.altitude_m)
    airmass = pvlib.atmosphere.get_absolute_airmass(pvlib.atmosphere.get_relative_airmass(zenith), pressure)
    clear = pvlib.clearsky.ineichen(zenith, airmass, CLEAN_TURBIDITY, altitude=place.altitude_m, dni_extra=extra_lit)

    def mean(values: FloatArray) -> FloatArray:
        parts = np.zeros(lit.shape)
        parts[lit] = values
        return np.asarray(parts.mean(axis=1).reshape(365, 24))

    share = mean(np.ones(extra_lit.size))
    cosine = np.where(share > 0.0, mean(np.cos(np.radians(zenith))) / np.where(share > 0.0, share, 1.0), 1.0)
    # Whoever turns beam into light on a plane takes the sun of the middle where all of the hour is lit.
    at_middle = np.cos(np.radians(_apparent_zenith_deg(middle))).reshape(365, 24)
    cosine = np.where(share > 1.0 - 0.5 / PARTS, at_middle, cosine)
    return ReferenceSky(
        level_w_m2=mean(extra_lit * true_cos[lit]),
        extra_w_m2=extra.reshape(365, 24),
        clear_w_m2=mean(np.asarray(clear["ghi"])),
        clear_beam_w_m2=mean(np.asarray(clear["dni"])),
        lit=share,
        cosine=cosine,
        airmass=np.asarray(pvlib.atmosphere.get_relative_airmass(np.degrees(np.arccos(cosine)))),
        sun_up=(middle > 0.0).astype(np.float64).reshape(365, 24),
    )


def _apparent_zenith_deg(true_cosine: FloatArray) -> FloatArray:
    """Zenith angle with refraction, from the cosine of the true one; at most that of the level horizon."""
    elevation = np.degrees(np.arcsin(np.clip(true_cosine, 0.0, 1.0)))
    apparent = elevation + 1.02 / 60.0 / np.tan(np.radians(elevation + 10.3 / (elevation + 5.11)))
    return np.asarray(90.0 - np.minimum(apparent, 90.0))


def _cosine_in_parts(times: pd.DatetimeIndex, place: Place) -> tuple[FloatArray, FloatArray]:
    """Cosine of the true zenith angle in the parts of each hour, (8760, PARTS), and at its middle, (8760,).

    A parabola through start, middle and end: within an hour it is off by under 0.0001.
    """
    half_s = 1800
    first = times.as_unit("s").asi8[0] - half_s
    halves = pd.DatetimeIndex((first + half_s * np.arange(2 * len(times) + 1)).astype("datetime64[s]"), tz="UTC")
    position = pvlib.solarposition.spa_python(halves, place.latitude, place.longitude, altitude=place.altitude_m)
    cosine = np.cos(np.radians(position["zenith"].to_numpy()))
    start, middle, end = cosine[:-1:2, None], cosine[1::2, None], cosine[2::2, None]
    at = (2.0 * np.arange(PARTS) + 1.0) / PARTS - 1.0
    parts = middle + at * (end - start) / 2.0 + at**2 * ((start + end) / 2.0 - middle)
    # a step dark at both ends and in the middle is dark throughout, whatever the parabola does between
    dark = (start <= 0.0) & (middle <= 0.0) & (end <= 0.0)
    return np.where(dark, -1.0, parts), middle[:, 0]
