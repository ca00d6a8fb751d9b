"""A first climate for any place on land, from a table in the package: no network needed."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from importlib.resources import files

import numpy as np
import pandas as pd
import pvlib

from ..calendar import REFERENCE_YEAR
from ..errors import Fault, InputError
from ..inputs.site_checks import etc_zone
from ..types import FloatArray, Place
from .reference_sky import DAY_MONTH, MONTH_DAYS
from .sun_arc import sun_arc

DAILY_RANGE_K = 9.0
"""Between a day's lowest and highest temperature; common practice."""

REACH_KM = 450.0
"""A place without data around it takes the nearest cell within this distance; ours: under two cells of 3 degrees."""

ALWAYS_DARK_KWH = 0.15
"""A cell with less light above the air than this tells nothing of the month's clearness."""

KM_PER_DEG = 111.2
SOURCE = (
    "NASA MERRA-2 reanalysis 2011-2015 (Gelaro et al. 2017) on a 3-degree grid, pulled towards the records of 67 "
    "ground stations; temperature from NASA GLDAS, its yearly course a cosine, its daily range 9 K"
)
UNCERTAINTY = (
    "leaving a station out, 80 % of the months lie within 13 % of the record, single months on coasts and in mountains "
    "up to 36 % off; a first look only, use a record of the place for a decision"
)
FAR_UNCERTAINTY = "the nearest data lie {km:.0f} km away; " + UNCERTAINTY


@dataclass(frozen=True)
class FirstClimate:
    """Twelve monthly means of a place, January first, and what to say of them.

    altitude_m : of the map that pvlib ships, 0 on coasts it leaves out. source, uncertainty : one sentence each.
    """

    ghi_kwh_m2_day: tuple[float, ...]
    temp_min_c: tuple[float, ...]
    temp_max_c: tuple[float, ...]
    altitude_m: float
    source: str
    uncertainty: str


@dataclass(frozen=True, eq=False)
class _World:
    """The table: clearness (n_lat, n_lon, 12), NaN in dark months; the rest (n_lat, n_lon); axes in degrees."""

    lat_deg: FloatArray
    lon_deg: FloatArray
    clearness: FloatArray
    mean_c: FloatArray
    swing_k: FloatArray
    there: FloatArray


def first_climate(latitude: float, longitude: float) -> FirstClimate:
    """The climate of a place on land from the cells around it, weighted by nearness.

    Between cells it is the clearness that is joined, not the light, so that latitude acts in full.

    Raises
    ------
    InputError
        The place is at sea, on an ice sheet, or too far from any cell with data.
    """
    world = _world()
    if not -90.0 <= latitude <= 90.0 or not -180.0 <= longitude <= 180.0:
        raise InputError(_no_data(latitude, longitude, "it is no place on Earth"))
    if not _on_land(latitude, longitude):
        raise InputError(_no_data(latitude, longitude, "it lies in the sea, or beyond the map of land"))
    weights, km = _weights(world, latitude, longitude)
    clear = np.array([_mean(world.clearness[..., month], weights) for month in range(12)])
    ghi = clear * monthly_extraterrestrial_kwh(latitude)
    mean_c, swing_k = _mean(world.mean_c, weights), _mean(world.swing_k, weights)
    warmest = 6 if latitude >= 0 else 0
    month_c = mean_c + swing_k * np.cos(2.0 * np.pi * (np.arange(12) - warmest) / 12.0)
    return FirstClimate(
        ghi_kwh_m2_day=_rounded(ghi, 3),
        temp_min_c=_rounded(month_c - DAILY_RANGE_K / 2.0, 1),
        temp_max_c=_rounded(month_c + DAILY_RANGE_K / 2.0, 1),
        altitude_m=float(pvlib.location.lookup_altitude(latitude, longitude)),
        source=SOURCE,
        uncertainty=FAR_UNCERTAINTY.format(km=km) if km > 0.0 else UNCERTAINTY,
    )


def suggested_zone(longitude: float) -> str:
    """A zone of fixed offset by the longitude, e.g. ``Etc/GMT-1`` at 8 E: close to the sun, no daylight saving."""
    return etc_zone(round(longitude / 15.0))


def monthly_extraterrestrial_kwh(latitude: float) -> FloatArray:
    """Daily light above the air on the level, mean of each month [kWh/m²]; (12,).

    Source
    ------
    Published: Duffie & Beckman, Solar Engineering of Thermal Processes, 4th ed. 2013, eq. 1.10.3.
    """
    noons = pd.date_range(f"{REFERENCE_YEAR}-01-01 12:00", periods=365, freq="D", tz="UTC")
    arc = sun_arc(noons, Place(float(np.clip(latitude, -89.99, 89.99)), 0.0, 0.0, "UTC"))
    sunset = np.arccos(np.clip(-arc.rise / arc.swing, -1.0, 1.0))
    daily = 24.0 / np.pi * arc.extra_w_m2 * (arc.swing * np.sin(sunset) + sunset * arc.rise) / 1000.0
    return np.asarray(np.bincount(DAY_MONTH, weights=daily) / MONTH_DAYS)


@lru_cache(maxsize=1)
def _world() -> _World:
    with files("sunbot.sky").joinpath("data/world-climate.npz").open("rb") as file, np.load(file) as data:
        light = data["ghi_wh_m2_day"].astype(np.float64) / 1000.0
        lat, lon = data["lat_deg"].astype(np.float64), data["lon_deg"].astype(np.float64)
        mean_c, swing_k = data["temp_mean_c"].astype(np.float64), data["temp_swing_k"].astype(np.float64)
    there = (light > 0.0).any(axis=2).astype(np.float64)
    above = np.array([monthly_extraterrestrial_kwh(row) for row in lat])[:, None, :]
    bright = (above > ALWAYS_DARK_KWH) & (there[..., None] > 0.0)
    clear = np.where(bright, light / np.maximum(above, ALWAYS_DARK_KWH), np.nan)
    # a month dark in its cell takes the least of the others, for places a little nearer to the equator
    least = np.nanmin(np.where(there[..., None] > 0.0, clear, 0.0), axis=2, keepdims=True)
    return _World(lat, lon, np.where(np.isnan(clear), least, clear), mean_c, swing_k, there)


def _weights(world: _World, latitude: float, longitude: float) -> tuple[FloatArray, float]:
    """Weight of each cell, sum 1, and how far off the data are [km], 0 where cells with data surround the place."""
    north = np.maximum(0.0, 1.0 - np.abs(world.lat_deg - latitude) / 3.0)
    east_deg = np.abs((world.lon_deg - longitude + 180.0) % 360.0 - 180.0)
    near = north[:, None] * np.maximum(0.0, 1.0 - east_deg / 3.0) * world.there
    if near.sum() > 0.1:
        return near / near.sum(), 0.0
    km = np.where(world.there > 0.0, _distance_km(world, latitude, east_deg), np.inf)
    nearest = np.unravel_index(np.argmin(km), km.shape)
    if km[nearest] > REACH_KM:
        wrong = f"the nearest data lie {km[nearest]:.0f} km away (ice sheets and small islands have none)"
        raise InputError(_no_data(latitude, longitude, wrong))
    weights = np.zeros(km.shape)
    weights[nearest] = 1.0
    return weights, float(km[nearest])


def _distance_km(world: _World, latitude: float, east_deg: FloatArray) -> FloatArray:
    """Along great circles."""
    here, there = np.radians(latitude), np.radians(world.lat_deg)[:, None]
    cosine = np.sin(here) * np.sin(there) + np.cos(here) * np.cos(there) * np.cos(np.radians(east_deg))
    return np.asarray(np.degrees(np.arccos(np.clip(cosine, -1.0, 1.0))) * KM_PER_DEG)


def _on_land(latitude: float, longitude: float) -> bool:
    """Some land on the altitude map within 0.2 degrees; the map has no value at sea, which reads as exactly 0."""
    near = (-0.2, -0.1, 0.0, 0.1, 0.2)
    heights = (
        pvlib.location.lookup_altitude(
            float(np.clip(latitude + north, -89.9, 89.9)), (longitude + east + 180.0) % 360.0 - 180.0
        )
        for north in near
        for east in near
    )
    return any(height != 0 for height in heights)


def _no_data(latitude: float, longitude: float, wrong: str) -> Fault:
    remedy = (
        "a place on land, or a site file whose [climate] holds twelve monthly means of your own, "
        "or --from-weather with a record"
    )
    return Fault(f"{latitude:g}, {longitude:g}: first climate", f"there is no data for it: {wrong}", remedy)


def _mean(values: FloatArray, weights: FloatArray) -> float:
    used = weights > 0.0
    return float((values[used] * weights[used]).sum())


def _rounded(values: FloatArray, digits: int) -> tuple[float, ...]:
    return tuple(round(float(value), digits) for value in values)
