"""The air of generated years: temperature by the hour, wind by the month, days with snow on the panels."""

from __future__ import annotations

import numpy as np
from scipy.special import ndtri

from ..inputs.site import Climate
from ..types import BoolArray, FloatArray
from .draws import Draws, persistent
from .reference_sky import DAY_MONTH, MONTH_DAYS

DAY_KEEP = 0.75
"""Correlation of a day's temperature with that of the day before: 0.57 to 0.87, most near 0.75, in the months of five
records (of Europe, Korea and the Levant, see the tests of generated years at stations)."""

COLD_MONTH_C, WARM_MONTH_C = 5.0, 15.0
COLD_MONTH_WITH_LIGHT, WARM_MONTH_WITH_LIGHT = -0.35, 0.45
"""Correlation of a day's temperature with its light: clear winter days are cold, clear summer days warm. Common
practice; the same records have -0.21 to -0.43 in months below 5 degC, 0.44 to 0.62 in July but for the Levant."""

SPREAD_AT_ZERO_K, SPREAD_PER_K, LEAST_SPREAD_K = 4.3, -0.09, 1.2
SPREAD_WITHOUT_SEASONS_K, SPREAD_PER_SEASON = 1.0, 0.45
"""Spread of a day's mean temperature: the colder the month the wider, and little where seasons differ little. Fitted
to these records, which it meets to two fifths: 4.0 to 4.9 K in Januaries near 0 degC, 2.0 at 15, 1.2 to 3.3 in July."""

COLD_MONTH_RANGE, WARM_MONTH_RANGE = 0.35, 0.75
"""Growth of the daily range with clearness, both relative to their means; fitted to the same record."""

MAXIMUM_AFTER_NOON_H = 2.5
SHORTEST_MORNING_H, LONGEST_MORNING_H = 3.0, 9.0
"""Minimum at sunrise, maximum two to three hours after noon; common practice."""

SNOW_COLD, SNOW_DARK, SNOW_KEEP = 0.6, 0.3, 0.95
"""Weights of cold and dark in the score of a snow day, and the persistence of the rest: spells of about three days."""


def daily_course(monthly: FloatArray) -> FloatArray:
    """Course over the 365 days, linear between mid-months, whose monthly means are those given; (12,) -> (365,)."""
    middles = np.cumsum(MONTH_DAYS) - MONTH_DAYS / 2.0
    nodes = np.concatenate([[middles[-1] - 365.0], middles, [middles[0] + 365.0]])
    days = np.arange(365) + 0.5
    hats = np.array([np.interp(days, nodes, np.eye(12)[m][[-1, *range(12), 0]]) for m in range(12)])
    means = np.array([[hat[month == DAY_MONTH].mean() for hat in hats] for month in range(12)])
    return np.asarray(np.linalg.solve(means, monthly) @ hats)


def between_months(mean_c: FloatArray, *, cold: float, warm: float) -> FloatArray:
    """``cold`` in months whose mean is below 5 degC, ``warm`` above 15 degC, linear between; (12,)."""
    return np.asarray(np.interp(mean_c, [COLD_MONTH_C, WARM_MONTH_C], [cold, warm]))


def daily_spread_k(mean_c: FloatArray) -> FloatArray:
    """Standard deviation of a day's mean temperature about its month's, by month; (12,) -> (12,) [K]."""
    half_range_k = (mean_c.max() - mean_c.min()) / 2.0
    by_cold = np.maximum(SPREAD_AT_ZERO_K + SPREAD_PER_K * mean_c, LEAST_SPREAD_K)
    return np.asarray(np.minimum(by_cold, SPREAD_WITHOUT_SEASONS_K + SPREAD_PER_SEASON * half_range_k))


def warmth_scores(climate: Climate, scores: FloatArray, draws: Draws) -> FloatArray:
    """Standard normal deviation of each day's temperature, correlated with the day's light ``scores``; (n, 365)."""
    mean_c = _mean_c(climate)
    link = between_months(mean_c, cold=COLD_MONTH_WITH_LIGHT, warm=WARM_MONTH_WITH_LIGHT)[DAY_MONTH]
    own = persistent(draws.warmth, np.full(365, DAY_KEEP))
    return np.asarray(link * scores + np.sqrt(1.0 - link**2) * own)


def daily_extremes_c(climate: Climate, warmth: FloatArray, relative_light: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Lowest and highest temperature of each day [degC], each (n, 365); their means are the climate's.

    warmth : (n, 365) standard normal. relative_light : (n, 365) clearness of the day over its month's mean.
    """
    mean_c, span_k = _mean_c(climate), np.subtract(climate.temp_max_c, climate.temp_min_c)
    growth = between_months(mean_c, cold=COLD_MONTH_RANGE, warm=WARM_MONTH_RANGE)[DAY_MONTH]
    # a linear growth keeps the mean of the range; it cannot reach 0, since no clearness is below 0
    half_k = daily_course(span_k) / 2.0 * (1.0 + growth * (relative_light - 1.0))
    middle_c = daily_course(mean_c) + daily_spread_k(mean_c)[DAY_MONTH] * warmth
    return middle_c - half_k, middle_c + half_k


def hourly_temperature_c(low_c: FloatArray, high_c: FloatArray, *, noon_h: float, daylight_h: FloatArray) -> FloatArray:
    """Temperature in the middle of each hour, half cosines between the day's extremes; (n, 365) -> (n, 365, 24).

    noon_h : standard clock at solar noon. daylight_h : (365,) hours between sunrise and sunset.
    """
    days = np.arange(-1, 366)
    inside = np.clip(days, 0, 364)
    morning_h = np.clip(daylight_h / 2.0, SHORTEST_MORNING_H, LONGEST_MORNING_H)[inside]
    at_low, at_high = days * 24.0 + noon_h - morning_h, days * 24.0 + noon_h + MAXIMUM_AFTER_NOON_H
    hours = np.arange(365 * 24) + 0.5
    day_low = np.searchsorted(at_low, hours, side="right") - 1
    day_high = np.searchsorted(at_high, hours, side="right") - 1
    rising = at_low[day_low] >= at_high[day_high]
    start = np.where(rising, at_low[day_low], at_high[day_high])
    end_low, end_high = np.minimum(day_low + 1, len(days) - 1), np.minimum(day_high + 1, len(days) - 1)
    end = np.where(rising, at_high[end_high], at_low[end_low])
    passed = (1.0 - np.cos(np.pi * (hours - start) / (end - start))) / 2.0
    high_share = np.where(rising, passed, 1.0 - passed)
    low_day = inside[np.where(rising, day_low, end_low)]
    high_day = inside[np.where(rising, end_high, day_high)]
    temperature = low_c[:, low_day] * (1.0 - high_share) + high_c[:, high_day] * high_share
    return np.asarray(temperature.reshape(-1, 365, 24))


def snow_days(climate: Climate, days: FloatArray, *, scores: FloatArray, warmth: FloatArray, draws: Draws) -> BoolArray:
    """Days with snow on panels flatter than 40 deg, in spells on cold, dark days; (n, 365).

    days : (12,) mean number a month. scores, warmth : (n, 365) of light and temperature, standard normal.
    """
    link = between_months(_mean_c(climate), cold=COLD_MONTH_WITH_LIGHT, warm=WARM_MONTH_WITH_LIGHT)[DAY_MONTH]
    rest = persistent(draws.snow, np.full(365, SNOW_KEEP))
    weight = np.sqrt(1.0 - SNOW_COLD**2 - SNOW_DARK**2 - 2.0 * SNOW_COLD * SNOW_DARK * link)
    score = weight * rest - SNOW_COLD * warmth - SNOW_DARK * scores
    share = np.clip(days / MONTH_DAYS, 0.0, 1.0)
    return np.asarray(score > ndtri(1.0 - share)[DAY_MONTH])


def _mean_c(climate: Climate) -> FloatArray:
    return np.add(climate.temp_min_c, climate.temp_max_c) / 2.0
