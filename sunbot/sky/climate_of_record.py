"""The climate of a place from a record of its weather."""

from __future__ import annotations

import numpy as np
import pandas as pd

from ..calendar import standard_clock
from ..inputs.site import Climate, Site
from .weather import Weather

LEAST_YEARS = 5
"""Fewer years say too little of how months vary from year to year; common practice."""


def climate_from_record(weather: Weather, site: Site) -> Climate:
    """Twelve monthly means of a record or a typical year, by the standard clock of ``site``.

    The light is that of the table: divide by the site's factor on light first, if it has one. ``year_to_year`` is the
    sample standard deviation of a month's mean over its long-term mean; None with fewer than 5 years.
    """
    clock = standard_clock(weather.times, site.time_zone)
    table = weather.table[["ghi", "temp_air", "wind_speed"]].to_numpy()
    steps = pd.DataFrame(table, columns=["ghi", "temp_air", "wind_speed"])
    by_day = steps.groupby(clock.day)
    days = pd.DataFrame({"low": by_day["temp_air"].min(), "high": by_day["temp_air"].max()})
    days["month"] = pd.Series(clock.month).groupby(clock.day).first()
    monthly = days.groupby("month")[["low", "high"]].mean()
    means = steps.groupby(clock.month)[["ghi", "wind_speed"]].mean()
    by_year = steps["ghi"].groupby([clock.year, clock.month]).mean().unstack()
    several = weather.n_years >= LEAST_YEARS and weather.kind != "typical"
    spread = by_year.std(ddof=1) / by_year.mean().where(by_year.mean() > 0.0, np.inf)
    return Climate(
        ghi_kwh_m2_day=_rounded(means["ghi"] * 0.024, 3),
        temp_min_c=_rounded(monthly["low"], 1),
        temp_max_c=_rounded(monthly["high"], 1),
        wind_m_s=_rounded(means["wind_speed"], 1),
        year_to_year=_rounded(spread, 3) if several else None,
    )


def _rounded(values: pd.Series, digits: int) -> tuple[float, ...]:
    return tuple(round(float(values.loc[month]), digits) for month in range(1, 13))
