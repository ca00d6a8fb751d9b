"""Clocks and years: the site's standard clock, local and solar time, and energy years laid side by side."""

from __future__ import annotations

from dataclasses import dataclass

import pandas as pd

from .types import FloatArray, IntArray

REFERENCE_YEAR = 2001
"""Generated and typical years are numbered from here."""


@dataclass(frozen=True, eq=False)
class Clock:
    """What a clock shows at each time: year, month 1-12, day of the month, whole days since 1970-01-01 of that
    clock, hour of the day as a fraction (0 to below 24), weekday 0 = Monday. All (n_times,).
    """

    year: IntArray
    month: IntArray
    day_of_month: IntArray
    day: IntArray
    hour: FloatArray
    weekday: IntArray


@dataclass(frozen=True, eq=False)
class Lanes:
    """Energy years side by side, aligned by month.

    row : (n_steps, n_years) index into the weather's steps (any valid index where step_h is 0)
    step_h : (n_steps, n_years) hours of each step; 0 = padding at the end of a month (a February without its 29th)
    month : (n_steps,) calendar month 1-12 of the step, the same in all lanes
    before : (n_years,) whose end state starts this lane; -1 = starts at start_soc (deployments)
    first_month : the month energy years start with
    """

    row: IntArray
    step_h: FloatArray
    month: IntArray
    before: IntArray
    first_month: int


def standard_offset_h(zone: str) -> float:
    """Hours the site's standard clock is ahead of UTC."""
    raise NotImplementedError


def standard_clock(times: pd.DatetimeIndex, zone: str) -> Clock:
    """The site's clock without daylight saving, at UTC ``times``."""
    raise NotImplementedError


def local_clock(times: pd.DatetimeIndex, zone: str, *, reference: bool) -> Clock:
    """The site's clock on the wall, daylight saving included; ``reference``: times are of the 2001 calendar."""
    raise NotImplementedError


def solar_clock(times: pd.DatetimeIndex, longitude: float) -> Clock:
    """Apparent solar time: 12 when the sun is due south (north)."""
    raise NotImplementedError


def share_in_hours(hour: FloatArray, spans: tuple[tuple[float, float], ...], step_h: float) -> FloatArray:
    """Share of each step, centred on ``hour``, that lies in the spans of the day; (n_times,), 0 to 1."""
    raise NotImplementedError


def energy_years(
    times: pd.DatetimeIndex,
    *,
    step_h: float,
    zone: str,
    first_month: int,
    deployment: tuple[tuple[int, int], tuple[int, int]] | None = None,
) -> Lanes:
    """Cut a ring of whole years into energy years that start on the first of ``first_month``."""
    raise NotImplementedError
