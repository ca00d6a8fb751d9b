"""Holes and slips of a reading mended as far as that is honest, and said: gaps, night light, missing columns, scale."""

from __future__ import annotations

import numpy as np
import pandas as pd

from ..calendar import standard_clock
from ..errors import Fault, InputError
from ..inputs.site import Climate, Site
from ..types import Caution, FloatArray
from .quality_checks import SHORT_GAP_H
from .readings import Reading
from .record import LIGHT, runs
from .split import LEAST_SINE, completed_light
from .sun_height import SunHeight

# Common practice: a thermopile under a clear night sky reads a few W/m2 below zero.
LEAST_W_M2 = -20.0
# Ours. Sound files have none, one whose clock is an hour off 0.2 to 0.4 % (measured on the files pvlib ships).
NIGHT_SHARE = 0.005
# Common practice: two to three hours after noon.
WARMEST_HOUR = 15.0


def mended(reading: Reading, sun: SunHeight, site: Site) -> tuple[pd.DataFrame, tuple[Caution, ...]]:
    """The reading's table with short gaps filled, missing columns worked out and the site's scale applied.

    Gaps too long to be filled stay NaN: a record loses the year, a typical year is refused by whoever called.
    """
    light, light_cautions = _mended_light(reading, sun)
    air, air_cautions = _mended_air(reading, site)
    table = pd.DataFrame({**light, **air}, index=reading.table.index)
    if reading.coded:
        counts = ", ".join(f"{column} {count}" for column, count in reading.coded.items())
        text = f"Fill codes such as 9999 or -999 were taken as missing values ({counts})."
        light_cautions += (Caution("fill-codes", reading.name, text),)
    return scaled(table, site), light_cautions + air_cautions


def scaled(table: pd.DataFrame, site: Site) -> pd.DataFrame:
    """Light times the site's ``weather.scale`` of the month."""
    scale = np.array(site.weather.scale)
    if (scale == 1.0).all():
        return table
    month = standard_clock(pd.DatetimeIndex(table.index), site.time_zone).month
    return table.assign(**{name: table[name] * scale[month - 1] for name in LIGHT})


def _mended_light(reading: Reading, sun: SunHeight) -> tuple[dict[str, FloatArray], tuple[Caution, ...]]:
    name = reading.name
    ghi, dni, dhi = (_not_negative(reading.table[column].to_numpy(dtype=np.float64)) for column in LIGHT)
    whole = [column for column, data in (("dni", dni), ("dhi", dhi)) if np.isnan(data).all()]
    ghi = np.where(np.isnan(ghi), dhi + dni * np.maximum(sun.sine, 0.0), ghi)
    dark_rows = _check_night(ghi, sun, name=name)
    ghi, filled_h = filled_light(ghi, sun, step_h=reading.step_h)
    ghi = np.where(sun.lit | np.isnan(ghi), ghi, 0.0)
    ghi, dni, dhi, split = completed_light(ghi, dni, dhi, sun)
    cautions = []
    if filled_h > 0.0:
        text = f"Gaps of up to {SHORT_GAP_H:g} h in the light, {filled_h:.1f} h in all, were filled by clearness."
        cautions.append(Caution("gaps-filled", name, text))
    if dark_rows:
        text = (
            f"Light in {dark_rows} steps whose sun is wholly below the horizon was set to 0; look at the file's clock."
        )
        cautions.append(Caution("night-light", name, text))
    if whole or split.any():
        lacks = f"lacks {' and '.join(whole)}" if whole else f"lacks dni or dhi in {int(split.sum())} lit steps"
        text = f"It {lacks}: beam and diffuse light were estimated. Steep panels are less certain than flat ones."
        cautions.append(Caution("light-split", name, text))
    return {"ghi": ghi, "dni": dni, "dhi": dhi}, tuple(cautions)


def _not_negative(data: FloatArray) -> FloatArray:
    """Light with the small negative readings of the night as 0 and large ones as missing."""
    return np.where(data < LEAST_W_M2, np.nan, np.where(data < 0.0, 0.0, data))


def _check_night(ghi: FloatArray, sun: SunHeight, *, name: str) -> int:
    """Steps with over 1 W/m² in full night; refused where they hold more light than a sound clock can leave there."""
    dark = ~sun.lit & (ghi > 0.0)
    share = float(ghi[dark].sum()) / float(np.nansum(ghi))
    if share > NIGHT_SHARE:
        wrong = f"{100 * share:.1f} % of its light falls in steps whose sun is wholly below the horizon of the site"
        remedy = "the site's true position, the right label or stamps_in, or shift_minutes under [weather]"
        raise InputError(Fault(name, wrong, remedy))
    return int((dark & (ghi > 1.0)).sum())


def filled_light(ghi: FloatArray, sun: SunHeight, *, step_h: float) -> tuple[FloatArray, float]:
    """Global light [W/m²] with dark and short gaps filled, and how many lit hours that were; longer gaps stay NaN.

    Short: at most 3 lit hours within a day. Filled with the clearness index interpolated from before and after.
    """
    missing = np.isnan(ghi)
    if not missing.any():
        return ghi, 0.0
    start, length = runs(missing)
    end = start + length
    lit_before = np.concatenate(([0], np.cumsum(sun.lit)))
    lit_h = (lit_before[end] - lit_before[start]) * step_h
    short = (lit_h == 0.0) | ((lit_h <= SHORT_GAP_H + 1e-9) & (length * step_h <= 24.0))
    rows = np.flatnonzero(missing & np.repeat(short, length)[np.cumsum(missing) - 1])
    above = sun.extra_w_m2 * np.maximum(sun.sine, 0.0)
    known = np.flatnonzero(~missing & (sun.sine > LEAST_SINE))
    if not known.size:
        return ghi, 0.0
    clearness = np.interp(rows, known, ghi[known] / above[known])
    out = ghi.copy()
    out[rows] = np.where(sun.lit[rows], clearness * above[rows], 0.0)
    return out, float(lit_h[short].sum())


def _mended_air(reading: Reading, site: Site) -> tuple[dict[str, FloatArray], tuple[Caution, ...]]:
    """Temperature and wind: short gaps joined, longer ones from [climate] where the site has it."""
    out: dict[str, FloatArray] = {}
    cautions = []
    for column in ("temp_air", "wind_speed"):
        data = reading.table[column].to_numpy(dtype=np.float64)
        if np.isnan(data).all() and site.climate is None:
            wrong = f"it has no {column}, and the site file has no [climate] to take it from"
            raise InputError(
                Fault(reading.name, wrong, f"a column {column} into the file, or a [climate] into the site file")
            )
        data, filled_h = _joined(data, step_h=reading.step_h)
        long = np.isnan(data)
        if long.any() and site.climate is not None:
            times = pd.DatetimeIndex(reading.table.index)
            data = np.where(long, climate_air(times, site.climate, site)[column], data)
            text = f"{column} of {int(long.sum())} of {len(long)} steps comes from the monthly means under [climate]."
            cautions.append(Caution("climate-air", reading.name, text))
        if filled_h > 0.0:
            text = (
                f"Gaps of up to {SHORT_GAP_H:g} h in {column}, {filled_h:.1f} h in all, were filled by straight lines."
            )
            cautions.append(Caution("gaps-filled", reading.name, text))
        out[column] = data
    return out, tuple(cautions)


def _joined(data: FloatArray, *, step_h: float) -> tuple[FloatArray, float]:
    """Short gaps joined by straight lines, and their hours."""
    missing = np.isnan(data)
    if not missing.any() or missing.all():
        return data, 0.0
    _, length = runs(missing)
    short = length * step_h <= SHORT_GAP_H + 1e-9
    rows = np.flatnonzero(missing & np.repeat(short, length)[np.cumsum(missing) - 1])
    known = np.flatnonzero(~missing)
    out = data.copy()
    out[rows] = np.interp(rows, known, data[known])
    return out, float(rows.size * step_h)


def climate_air(times: pd.DatetimeIndex, climate: Climate, site: Site) -> dict[str, FloatArray]:
    """Temperature [°C] and wind [m/s] at UTC ``times`` from monthly means: the same day all through a month.

    Common practice: a sine between the mean daily minimum and maximum, warmest three hours after solar noon.
    """
    month = standard_clock(times, site.time_zone).month - 1
    low, high = np.array(climate.temp_min_c)[month], np.array(climate.temp_max_c)[month]
    seconds = times.tz_convert("UTC").as_unit("s").asi8
    hour = (seconds / 3600.0 + site.longitude / 15.0) % 24.0
    swing = np.cos((hour - WARMEST_HOUR) * np.pi / 12.0)
    return {
        "temp_air": np.asarray((high + low) / 2 + (high - low) / 2 * swing),
        "wind_speed": np.array(climate.wind_m_s)[month],
    }
