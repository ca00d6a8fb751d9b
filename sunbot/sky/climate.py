"""Many years of weather from twelve monthly means."""

from __future__ import annotations

import numpy as np
import pandas as pd

from ..calendar import standard_offset_h
from ..errors import Fault, InputError
from ..inputs.site import Climate, Site
from ..types import MONTHS, BoolArray, Caution, FloatArray, Place
from .air import daily_extremes_c, hourly_temperature_c, snow_days, warmth_scores
from .daily_light import MonthLight, daily_scores, month_light, shares_of_clear
from .digest import table_digest
from .draws import Draws, draw_years
from .hourly_light import beam_and_diffuse, hours_of_days
from .reference_sky import DAY_MONTH, HOURS_A_YEAR, MONTH_DAYS, ReferenceSky, generated_times, reference_sky
from .weather import Weather

WINTER_KEEP, SUMMER_KEEP = 0.29, 0.40
"""Correlation of a day's clearness with the day before. Published: Graham, Hollands & Unny, Solar Energy 40 (1988) 83,
0.29 (from memory); a Dutch record of 24 years has 0.23 to 0.36 from October to March, 0.34 to 0.49 from April on."""

TROPICS_DEG = 23.4
MOST_OF_CLEAR, BEYOND_CLEAR = 0.97, 1.10
"""A month's mean reaches 0.97 of the clean clear sky at most: up to 1.10 the sky is made cleaner, beyond is refused."""

LOW_SUN_KWH, LOW_SUN_MOST, LOW_SUN_CLEARNESS = 0.3, 0.75, 0.7
"""Where a clear day brings less than 0.3 kWh/m2 the clear-sky model runs low (a sun under some 5 degrees); there the
mean reaches 0.75 of the clear sky at most, so that dark days remain, and a mean clearness of 0.7 is let pass. Ours."""

DARKEST_MONTH = 0.05
"""No month has a lower mean clearness; common practice."""

DARK_KWH, TWILIGHT_KWH = 0.02, 0.05
"""A month whose clear days bring less is polar night: up to 0.05 in its climate is twilight, which no panel can use."""


def generated_weather(site: Site, *, years: int, seed: int, skip: int = 0) -> Weather:
    """Hourly weather of ``years`` years drawn from the site's climate; the seed's first ``skip`` years are left out.

    Year y of a seed is the same whatever the number asked for. Each month's long-term mean light is the climate's, no
    hour is brighter than under a clean clear sky, the hours of a day add to its light. Times are numbered from 2001.

    Raises
    ------
    InputError
        No climate, or monthly light that no sky gives. ``ValueError``: years below 1, skip or seed below 0.
    """
    if years < 1 or skip < 0 or seed < 0:
        raise ValueError("years is at least 1, skip and seed are at least 0")
    climate = _climate_of(site)
    place = Place(site.latitude, site.longitude, site.altitude_m, site.time_zone)
    sky = reference_sky(place)
    clear_w_m2, brighter = clear_limit(climate, sky)
    months = light_months(climate, sky, clear_w_m2, latitude=site.latitude)
    draws = draw_years(seed, first=skip + 1, years=years)
    scores = daily_scores(months, draws)
    day_wh_m2 = shares_of_clear(months, scores) * clear_w_m2.sum(axis=1)
    ghi = hours_of_days(day_wh_m2, draws.hours, sky, clear_w_m2=clear_w_m2)
    dni, dhi = beam_and_diffuse(ghi, sky)
    warmth = warmth_scores(climate, scores, draws)
    noon_h = 12.0 + standard_offset_h(site.time_zone) - site.longitude / 15.0
    temp_c = _temperature(climate, warmth, months, day_wh_m2, sky=sky, noon_h=noon_h)
    table = _table(site, climate, {"ghi": ghi, "dni": dni, "dhi": dhi}, temp_c)
    return Weather(
        table=table,
        step_h=1.0,
        place=place,
        row=np.tile(np.arange(HOURS_A_YEAR), years),
        kind="generated",
        origin=f"generated from the monthly climate of {site.name}: years {skip + 1} to {skip + years} of seed {seed}",
        digest=table_digest(table),
        snow_covered=_snow(site, climate, scores=scores, warmth=warmth, draws=draws),
        cautions=_cautions(site, climate, months, brighter),
    )


def clear_limit(climate: Climate, sky: ReferenceSky) -> tuple[FloatArray, tuple[int, ...]]:
    """What no hour exceeds [W/m²], (365, 24), and the months (0-11) whose climate needs it above the clean clear sky.

    Raises ``InputError`` naming every month whose mean no sky gives.
    """
    clear_kwh, above_kwh = monthly_kwh(sky.clear_w_m2), monthly_kwh(sky.level_w_m2)
    faults, brighter = [], []
    factor = np.ones(12)
    for month, wish in enumerate(climate.ghi_kwh_m2_day):
        where = f"site.toml: climate: ghi_kwh_m2_day: {MONTHS[month]}"
        clear = clear_kwh[month]
        if clear < DARK_KWH and 0.0 <= wish <= TWILIGHT_KWH:
            continue
        low_sun = clear < LOW_SUN_KWH
        most = LOW_SUN_MOST if low_sun else MOST_OF_CLEAR
        if wish > max(BEYOND_CLEAR * clear, LOW_SUN_CLEARNESS * above_kwh[month] if low_sun else 0.0):
            wrong = f"{wish:g} is above what a clean clear sky gives there, {clear:.3g} kWh/m2 a day"
            faults.append(Fault(where, wrong, "kWh/m2 per day (MJ divided by 3.6), and check latitude and altitude"))
        elif wish < DARKEST_MONTH * above_kwh[month]:
            wrong = (
                f"{wish:g} is darker than any month under cloud ({DARKEST_MONTH * above_kwh[month]:.2g} kWh/m2 a day)"
            )
            faults.append(Fault(where, wrong, "the monthly mean in kWh/m2 per day"))
        elif wish > most * clear:
            factor[month] = wish / (most * clear)
            if not low_sun:
                brighter.append(month)
    if faults:
        raise InputError(faults)
    return sky.clear_w_m2 * factor[DAY_MONTH][:, None], tuple(brighter)


def light_months(
    climate: Climate, sky: ReferenceSky, clear_w_m2: FloatArray, *, latitude: float
) -> tuple[MonthLight, ...]:
    """The spread, sequence and shock of the days of each month."""
    above_kwh, clear_kwh = monthly_kwh(sky.level_w_m2), monthly_kwh(clear_w_m2)
    summer = range(3, 9) if latitude > TROPICS_DEG else (0, 1, 2, 9, 10, 11) if latitude < -TROPICS_DEG else ()
    out = []
    for month, wish in enumerate(climate.ghi_kwh_m2_day):
        dark = clear_kwh[month] < DARK_KWH
        above = max(above_kwh[month], 1e-9)
        keep = SUMMER_KEEP if month in summer else WINTER_KEEP
        mean, clear = (0.0, 0.0) if dark else (wish / above, clear_kwh[month] / above)
        weights = clear_w_m2.sum(axis=1)[month == DAY_MONTH]
        variation = None if climate.year_to_year is None else climate.year_to_year[month]
        out.append(month_light(mean, clear, weights, keep=keep, variation=variation))
    return tuple(out)


def monthly_kwh(hourly_w_m2: FloatArray) -> FloatArray:
    """Mean daily sum of each month [kWh/m²] of a course over the year, (365, 24) -> (12,)."""
    return np.asarray(np.bincount(DAY_MONTH, weights=hourly_w_m2.sum(axis=1)) / MONTH_DAYS / 1000.0)


def _climate_of(site: Site) -> Climate:
    if site.climate is None:
        remedy = "a [climate] part with ghi_kwh_m2_day, temp_min_c and temp_max_c, or another weather source"
        raise InputError(Fault("site.toml: climate", "it is missing, and the weather is to come from it", remedy))
    return site.climate


def _temperature(
    climate: Climate,
    warmth: FloatArray,
    months: tuple[MonthLight, ...],
    day_wh_m2: FloatArray,
    *,
    sky: ReferenceSky,
    noon_h: float,
) -> FloatArray:
    """Air temperature by the hour; days without any light count as days of mean clearness."""
    mean_share = np.array(climate.ghi_kwh_m2_day) * [month.clear > 0.0 for month in months]
    expected = (mean_share / np.maximum(monthly_kwh(sky.clear_w_m2), 1e-9))[DAY_MONTH] * sky.clear_w_m2.sum(axis=1)
    lit = expected > 0.0
    relative = np.ones_like(day_wh_m2)
    relative[:, lit] = day_wh_m2[:, lit] / expected[lit]
    low_c, high_c = daily_extremes_c(climate, warmth, relative)
    return hourly_temperature_c(low_c, high_c, noon_h=noon_h, daylight_h=sky.lit.sum(axis=1))


def _table(site: Site, climate: Climate, light: dict[str, FloatArray], temp_c: FloatArray) -> pd.DataFrame:
    """One row per hour; the site's factor on all light is applied here, after the closure of the days."""
    scale = np.array(site.weather.scale)[DAY_MONTH][:, None]
    columns = {name: (values * scale).ravel() for name, values in light.items()}
    wind = np.repeat(np.array(climate.wind_m_s)[DAY_MONTH], 24)
    years = len(temp_c)
    columns |= {"temp_air": temp_c.ravel(), "wind_speed": np.tile(wind, years)}
    return pd.DataFrame(columns, index=generated_times(years, site.time_zone))


def _snow(site: Site, climate: Climate, *, scores: FloatArray, warmth: FloatArray, draws: Draws) -> BoolArray | None:
    if site.snow_days is None or not any(site.snow_days):
        return None
    days = snow_days(climate, np.array(site.snow_days), scores=scores, warmth=warmth, draws=draws)
    return np.repeat(days.ravel(), 24)


def _cautions(
    site: Site, climate: Climate, months: tuple[MonthLight, ...], brighter: tuple[int, ...]
) -> tuple[Caution, ...]:
    out = []
    wishes = climate.year_to_year or ()
    small = [m for m, wish in enumerate(wishes) if months[m].clear > 0.0 and wish < months[m].floor]
    if small:
        text = (
            f"Days alone already make monthly means vary more than the year_to_year asked for in {_named(small)} "
            f"(there {months[small[0]].floor:.2f}); those months vary that much, which is the safe side."
        )
        out.append(Caution("variation-floor", "climate", text))
    if brighter:
        text = (
            f"The light of {_named(list(brighter))} needs a sky cleaner than the cleanest assumed; check the figures."
        )
        out.append(Caution("above-clear-sky", "climate", text))
    freezing = [m for m, low in enumerate(climate.temp_min_c) if low < 0.0]
    if site.snow_days is None and freezing:
        text = (
            f"Nights freeze in {_named(freezing)} and no snow_days are given: panels flatter than 40 deg are taken to "
            "be free of snow. Write how many days a month they lie under it."
        )
        out.append(Caution("snow-not-given", "site", text))
    return tuple(out)


def _named(months: list[int]) -> str:
    return ", ".join(MONTHS[month] for month in months)
