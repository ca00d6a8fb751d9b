"""`sky`: what light and temperature a place offers, its darkest spells, and whether the weather is believable."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import pandas as pd

from .. import __version__
from ..calendar import Clock, energy_years, standard_clock
from ..inputs.site import Site
from ..light import light_on_level, sun_over
from ..sky import Weather, audit_of, reading_for, weather_for, weather_of
from ..sky.quality import AUDITED, AuditCheck, audit_record, merged
from ..types import Caution, FloatArray
from .cautions import coarse_climate
from .dark_spells import DarkSpell, DateArray, dark_spells, days_of
from .inputs_used import InputsUsed, inputs_used
from .plain import plain

SURVEY_DAYS = (1, 3, 5, 10, 30)
"""Lengths of the dark spells shown."""

_AUDITED_YEARS = 5
_FROM_FILE = ("file", "nasa-power")


@dataclass(frozen=True, eq=False)
class SurveyResult:
    """The answer of `survey`.

    months : DataFrame by month 1-12: ghi_wh_m2_day, plane_wh_m2_day (flat, under the site's horizon), their darkest and
    brightest month of all years as ghi_lowest_wh_m2_day and ghi_highest_wh_m2_day; temp_mean_c, temp_min_c and
    temp_max_c (mean daily minimum and maximum), temp_lowest_c and temp_highest_c.
    dark_spells : on the flat plane [Wh/m2]. audit : one verdict per check.
    daily_wh_m2, dates : (n_years, n_days) light on the flat plane by energy year, NaN where a year has no such day.
    """

    site: Site
    weather: Weather
    inputs: InputsUsed
    months: pd.DataFrame
    dark_spells: tuple[DarkSpell, ...]
    audit: tuple[AuditCheck, ...]
    cautions: tuple[Caution, ...]
    daily_wh_m2: FloatArray
    dates: DateArray

    @property
    def met(self) -> bool:
        """Whether every check of the audit passed."""
        return all(check.passed for check in self.audit)

    def to_dict(self) -> dict[str, Any]:
        """The JSON document of ``sunbot sky --json``."""
        return plain(  # type: ignore[no-any-return]
            {
                "tool": {"name": "sunbot", "version": __version__},
                "inputs": self.inputs.to_dict(),
                "months": self.months.reset_index().to_dict(orient="records"),
                "dark_spells": [spell.to_dict() for spell in self.dark_spells],
                "audit": [{"code": c.code, "passed": c.passed, "text": c.text} for c in self.audit],
                "cautions": [caution.__dict__ for caution in self.cautions],
            }
        )


def survey(site: Site, *, weather: Weather | None = None, years: int = 50, seed: int = 1) -> SurveyResult:
    """What does ``site`` offer a robot, and is its weather believable?

    Parameters
    ----------
    site : Site
        The place, and where its weather comes from.
    weather : Weather, optional
        Weather to look at; left out, that of the site, audited as its file has it before anything is mended.
    years, seed : int
        Weather years, and the seed of everything drawn.

    Raises
    ------
    InputError
        The weather cannot be used, or the audit finds what no answer could be trusted on: then every such fault.
    """
    weather, audit = _weather_and_audit(site, weather, years=years, seed=seed)
    clock = standard_clock(weather.times, weather.place.time_zone)
    level_w_m2 = light_on_level(site, weather, sun_over(weather))
    months = _months(weather, level_w_m2, clock)
    brightest = int(months["plane_wh_m2_day"].to_numpy().argmax()) + 1
    lanes = energy_years(
        weather.times, step_h=weather.step_h, zone=weather.place.time_zone, first_month=brightest % 12 + 1
    )
    daily_wh_m2, dates = days_of(level_w_m2[lanes.row], weather.times, lanes, zone=weather.place.time_zone)
    n_years = daily_wh_m2.shape[0]
    return SurveyResult(
        site=site,
        weather=weather,
        inputs=inputs_used(site, weather, years=n_years, seed=seed, first_month=lanes.first_month),
        months=months,
        dark_spells=dark_spells(daily_wh_m2, dates, lengths=SURVEY_DAYS, seed=seed),
        audit=audit,
        cautions=(*_not_audited(weather), *coarse_climate(site, weather)),
        daily_wh_m2=daily_wh_m2,
        dates=dates,
    )


def _not_audited(weather: Weather) -> tuple[Caution, ...]:
    """The weather's cautions but for the audit's findings, which the survey tells by themselves."""
    return tuple(caution for caution in weather.cautions if not caution.code.startswith(AUDITED))


def _weather_and_audit(
    site: Site, weather: Weather | None, *, years: int, seed: int
) -> tuple[Weather, tuple[AuditCheck, ...]]:
    """A file is audited as it was read; any other weather as it is used."""
    if weather is None and site.weather.source in _FROM_FILE:
        reading = reading_for(site)
        return weather_of(reading, site, years=years), audit_of(reading, site)
    weather = weather_for(site, years=years, seed=seed) if weather is None else weather
    return weather, _audit_as_used(weather)


def _audit_as_used(weather: Weather) -> tuple[AuditCheck, ...]:
    """The audit of the table itself: of generated years the first few, each under the sun it was made for.

    On a route there is none: an audit asks whether clock and place fit, and there are many places.
    """
    if weather.stays:
        return ()
    table, n_rows = weather.table, len(weather.ref_times)
    starts = range(0, min(len(table), _AUDITED_YEARS * n_rows), n_rows)
    parts = [table.iloc[first : first + n_rows].set_axis(weather.ref_times) for first in starts]
    return merged(audit_record(part, step_h=weather.step_h, place=weather.place) for part in parts)


def _months(weather: Weather, level_w_m2: FloatArray, clock: Clock) -> pd.DataFrame:
    """Monthly figures over all years, months and days of the standard clock."""
    air_c = weather.table["temp_air"].to_numpy(dtype=np.float64)
    steps = pd.DataFrame(
        {
            "year": clock.year,
            "month": clock.month,
            "day": clock.day,
            "ghi_wh_m2_day": weather.table["ghi"].to_numpy(dtype=np.float64) * weather.step_h,
            "plane_wh_m2_day": level_w_m2 * weather.step_h,
            "temp_mean_c": air_c,
        }
    )
    by_day = steps.groupby("day", sort=True)
    days = by_day[["ghi_wh_m2_day", "plane_wh_m2_day"]].sum()
    days[["year", "month"]] = by_day[["year", "month"]].first()
    days["temp_mean_c"] = by_day["temp_mean_c"].mean()
    days["temp_min_c"] = by_day["temp_mean_c"].min()
    days["temp_max_c"] = by_day["temp_mean_c"].max()
    by_month = days.groupby("month")
    months = by_month[["ghi_wh_m2_day", "plane_wh_m2_day", "temp_mean_c", "temp_min_c", "temp_max_c"]].mean()
    each = days.groupby(["year", "month"])["ghi_wh_m2_day"].mean().groupby("month")
    months["ghi_lowest_wh_m2_day"], months["ghi_highest_wh_m2_day"] = each.min(), each.max()
    months["temp_lowest_c"], months["temp_highest_c"] = by_month["temp_min_c"].min(), by_month["temp_max_c"].max()
    return months
