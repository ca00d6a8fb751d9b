"""How the light of a day falls over its hours, and how much of it is beam."""

from __future__ import annotations

import numpy as np
import pvlib

from ..types import FloatArray
from .reference_sky import ReferenceSky

HOUR_KEEP = 0.54
"""Published: Graham & Hollands, Solar Energy 44 (1990) 333: correlation of one hour's deviation with the next."""

LEAST_OF_TREND = 0.25
"""An hour keeps this share of its trend however dark its deviation; ours."""

BEAM_OVER_CLEAR = 1.1
"""The beam is at most this much of the clean clear sky's; common practice."""


def hourly_trend(day_clearness: FloatArray, airmass: FloatArray) -> FloatArray:
    """Expected clearness of an hour from that of its day and its air mass; broadcast of both.

    Source
    ------
    Published: Graham & Hollands, Solar Energy 44 (1990) 333.
    """
    k = np.clip(day_clearness, 1e-3, 1.0)
    floor = k - 1.167 * k**3 * (1.0 - k)
    return np.asarray(floor + 0.979 * (1.0 - k) * np.exp(-1.141 * (1.0 - k) / k * airmass))


def hourly_spread(day_clearness: FloatArray) -> FloatArray:
    """Standard deviation of an hour's clearness about its trend; source as `hourly_trend`."""
    return np.asarray(0.16 * np.sin(np.pi * np.clip(day_clearness / 0.90, 0.0, 1.0)))


def hours_of_days(day_wh_m2: FloatArray, noise: FloatArray, sky: ReferenceSky, *, clear_w_m2: FloatArray) -> FloatArray:
    """Light on the level in each hour [W/m²], (n, 365, 24); the hours of a day add to its light.

    day_wh_m2 : (n, 365), at most the day's sum of clear_w_m2. noise : (n, 365, 24) standard normal.
    clear_w_m2 : (365, 24) what no hour exceeds.
    """
    above_wh_m2 = sky.level_w_m2.sum(axis=1)
    day_clearness = day_wh_m2 / np.where(above_wh_m2 > 0.0, above_wh_m2, 1.0)
    trend = hourly_trend(day_clearness[..., None], sky.airmass)
    wish = np.empty_like(noise)
    deviation = noise[..., 0]
    for hour in range(noise.shape[-1]):
        if hour:
            deviation = HOUR_KEEP * deviation + np.sqrt(1.0 - HOUR_KEEP**2) * noise[..., hour]
        wish[..., hour] = deviation
    wish *= hourly_spread(day_clearness)[..., None]
    wish += trend
    np.maximum(wish, LEAST_OF_TREND * trend, out=wish)
    wish *= sky.level_w_m2
    return closed_days(day_wh_m2, wish, limit=clear_w_m2)


def closed_days(total: FloatArray, wish: FloatArray, *, limit: FloatArray) -> FloatArray:
    """``wish`` times one factor a day, cut at ``limit``, such that the hours of each day add to ``total``.

    total : (n, n_days), at most the day's sum of limit. wish : (n, n_days, n_hours), above 0 where limit is.
    limit : (n_days, n_hours).
    Newton on a concave function from below: it rises to the root and, being piecewise linear, reaches it.
    """
    limits = np.broadcast_to(limit, wish.shape).reshape(-1, wish.shape[-1])
    wishes, totals = wish.reshape(limits.shape), total.ravel()
    sums = wishes.sum(axis=1)
    factor = totals / np.where(sums > 0.0, sums, 1.0)
    hours = np.minimum(factor[:, None] * wishes, limits)
    left = np.flatnonzero(totals - hours.sum(axis=1) > 1e-9 * totals)
    while left.size:
        free = hours[left] < limits[left]
        room = (wishes[left] * free).sum(axis=1)
        missing = totals[left] - hours[left].sum(axis=1)
        factor[left] += missing / np.where(room > 0.0, room, 1.0)
        hours[left] = np.minimum(factor[left, None] * wishes[left], limits[left])
        left = left[(totals[left] - hours[left].sum(axis=1) > 1e-9 * totals[left]) & (room > 0.0)]
    return hours.reshape(wish.shape)


def beam_and_diffuse(ghi: FloatArray, sky: ReferenceSky) -> tuple[FloatArray, FloatArray]:
    """Beam dni and diffuse dhi [W/m²] of hourly light on the level, (n, 365, 24); ghi = dni x cosine + dhi.

    While the sun is down at the middle of the hour all its light is diffuse.

    Source
    ------
    Published: Erbs, Klein & Duffie, Solar Energy 28 (1982) 293, in the smooth form of Driesse, Jensen & Perez, Solar
    Energy 267 (2024) 112093, as in pvlib.
    """
    dni = np.zeros_like(ghi)
    up = (sky.sun_up > 0.0) & (sky.lit > 0.0)
    light, cosine = ghi[:, up], sky.cosine[up]
    zenith = np.broadcast_to(np.degrees(np.arccos(cosine)), light.shape)
    lit_light = light / sky.lit[up]
    split = pvlib.irradiance.erbs_driesse(lit_light, zenith, dni_extra=np.broadcast_to(sky.extra_w_m2[up], light.shape))
    beam = (lit_light - np.asarray(split["dhi"])) / cosine * sky.lit[up]
    dni[:, up] = np.clip(beam, 0.0, BEAM_OVER_CLEAR * sky.clear_beam_w_m2[up])
    return dni, np.maximum(ghi - dni * sky.cosine, 0.0)
