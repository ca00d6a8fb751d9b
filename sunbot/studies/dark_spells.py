"""Dark spells: how little light or harvest n days in a row bring, and how often so little comes back."""

from __future__ import annotations

import math
from dataclasses import dataclass
from datetime import date
from typing import Any

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from ..calendar import Lanes, standard_clock
from ..types import FloatArray, IntArray

DateArray = NDArray[np.datetime64]

SPELL_DAYS = (1, 3, 5, 10, 20, 30)
"""Lengths looked at; common practice."""

FEWEST_YEARS = 5
"""Fewer years say nothing about how often a spell comes back."""

_EULER = 0.5772156649015329
_DRAWS = 400


@dataclass(frozen=True)
class DarkSpell:
    """The darkest stretch of some length.

    days : its length. wh : what it brings in all. start : its first day. return_years : a year as dark comes once in
    so many; None where the years do not tell. low, high : 95 % interval of the level that comes once in return_years.
    """

    days: int
    wh: float
    start: date
    return_years: float | None
    low: float | None
    high: float | None

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        return {
            "days": self.days,
            "wh": self.wh,
            "from": self.start.isoformat(),
            "return_years": self.return_years,
            "low": self.low,
            "high": self.high,
        }


def lowest_sums(daily_wh: FloatArray, days: int, *, ring: bool = True) -> tuple[FloatArray, IntArray]:
    """Least sum of ``days`` days in a row that begin in each year.

    Parameters
    ----------
    daily_wh : (n_years, n_days)
        Energy of each day, NaN where a year has no such day (a February without its 29th).
    days : int
        Length of the spell, at most that of a year.
    ring : bool
        A spell may run on into the next year, and from the last into the first; else it stays within its year.

    Returns
    -------
    Lowest sum of each year [Wh], and the index within the year of the day it starts; (n_years,) each.

    Raises
    ------
    ValueError
        days is below 1 or longer than a year.
    """
    n_years, n_days = daily_wh.shape
    there = ~np.isnan(daily_wh)
    if not 1 <= days <= there.sum(axis=1).min():
        raise ValueError(f"a spell of {days} days does not fit into a year of {n_days} days")
    flat = daily_wh[there]
    total = np.concatenate(([0.0], np.cumsum(np.concatenate((flat, flat[: days - 1])))))
    sums = np.full((n_years, n_days), np.inf)
    sums[there] = total[days:] - total[:-days]
    if not ring:
        left = np.cumsum(there[:, ::-1], axis=1)[:, ::-1]  # days from each one to the end of its year
        sums[left < days] = np.inf
    start = np.argmin(sums, axis=1)
    return np.maximum(sums[np.arange(n_years), start], 0.0), start.astype(np.int64)


def low_of_return(mean: FloatArray | float, sd: FloatArray | float, years: float) -> FloatArray:
    """The yearly low that is undercut once in ``years`` on average, at least 0, by Gumbel's law for minima.

    Parameters
    ----------
    mean, sd : broadcastable
        Mean and standard deviation of the yearly lows.
    years : float
        Return period, above 1.

    Source
    ------
    Published: Gumbel, Statistics of Extremes (1958); moments fit, mirrored for minima.
    """
    return np.maximum(np.asarray(mean) + np.asarray(sd) * _gumbel_factor(years), 0.0)


def fitted_low(lows: FloatArray, years: float) -> FloatArray:
    """The low of return period ``years`` from yearly lows along the last axis; the axes before it stay.

    Light has a lower end that Gumbel's law lacks: on short spells of generated years its 20-year low comes out 14 to
    45 % too dark, that of Weibull's law (Gumbel's for the logarithms) under 14 %, under 9 % from three days on. So
    the logarithms are fitted where all lows are above 0, and the lows themselves elsewhere.

    Source
    ------
    Published: Weibull, J. Appl. Mech. 18 (1951) 293; as the third law of extremes in Gumbel (1958).
    """
    if not (lows > 0.0).all():
        return low_of_return(lows.mean(axis=-1), lows.std(axis=-1, ddof=1), years)
    logs = np.log(lows)
    return np.asarray(np.exp(logs.mean(axis=-1) + logs.std(axis=-1, ddof=1) * _gumbel_factor(years)))


def return_period(lows: FloatArray, low: float) -> float:
    """Years between years as dark as ``low``, by plain ranks: (n + 1) / (years at or below it), inf where none is.

    Source
    ------
    Published: Weibull's plotting position, as in Gumbel, Statistics of Extremes (1958).
    """
    rank = int(np.count_nonzero(lows <= low))
    return math.inf if rank == 0 else (len(lows) + 1) / rank


def low_interval(lows: FloatArray, years: float, *, seed: int) -> tuple[float, float]:
    """95 % interval of the low with a return period of ``years``: drawing the years again, with replacement.

    Raises
    ------
    ValueError
        Fewer than 5 years, or a return period past twice the years at hand: no sample tells that.
    """
    if len(lows) < FEWEST_YEARS or years > 2 * len(lows):
        raise ValueError(f"{len(lows)} years do not tell what comes once in {years:g}")
    drawn = np.random.default_rng(seed).choice(lows, size=(_DRAWS, len(lows)))
    low, high = np.quantile(fitted_low(drawn, years), (0.025, 0.975))
    return float(low), float(high)


def days_of(watts: FloatArray, times: pd.DatetimeIndex, lanes: Lanes, *, zone: str) -> tuple[FloatArray, DateArray]:
    """Energy of each day of the energy years, and its date on the site's standard clock.

    Parameters
    ----------
    watts : (n_steps, n_years)
        Light [W/m2] or harvest [W] in the steps of the lanes.
    times : (n_times,)
        Middles of the weather's steps, UTC.
    lanes : Lanes
        Energy years of whole days.
    zone : str
        Of the site.

    Returns
    -------
    Energy [Wh/m2 or Wh], NaN where a year has no such day, and dates; (n_years, n_days) each.
    """
    per_day = round(24.0 / float(lanes.step_h.max()))
    n_years = lanes.row.shape[1]
    shape = (-1, per_day, n_years)
    energy = (watts * lanes.step_h).reshape(shape).sum(axis=1)
    there = lanes.step_h.reshape(shape).sum(axis=1) > 0.0
    day = standard_clock(times, zone).day[lanes.row].reshape(shape)[:, 0]
    return np.where(there, energy, np.nan).T, day.T.astype("datetime64[D]")


def dark_spells(
    daily_wh: FloatArray,
    dates: DateArray,
    *,
    lengths: tuple[int, ...] = SPELL_DAYS,
    seed: int = 1,
    ring: bool = True,
) -> tuple[DarkSpell, ...]:
    """The darkest spells of each length over some years, with how often a year as dark comes back.

    Parameters
    ----------
    daily_wh, dates : (n_years, n_days)
        Energy and date of each day, as `days_of` gives them.
    lengths : tuple of int
        Lengths of the spells [days].
    seed : int
        Of the interval.
    ring : bool
        Whether spells may run on from year to year, as in `lowest_sums`.

    Returns
    -------
    One spell for each length. The darkest of n years has rank 1, hence a return period of n + 1 years; with fewer than
    5 years return_years, low and high are None.
    """
    spells = []
    for days in lengths:
        lows, starts = lowest_sums(daily_wh, days, ring=ring)
        year = int(np.argmin(lows))
        lowest = float(lows[year])
        period = return_period(lows, lowest) if len(lows) >= FEWEST_YEARS else None
        low: float | None = None
        high: float | None = None
        if period is not None:
            low, high = low_interval(lows, max(period, 2.0), seed=seed)
            low, high = min(low, lowest), max(high, lowest)
        spells.append(DarkSpell(days, lowest, dates[year, starts[year]].item(), period, low, high))
    return tuple(spells)


def _gumbel_factor(years: float) -> float:
    """Standard deviations from the mean to the low of return period ``years``, by Gumbel's law for minima."""
    if not years > 1.0:
        raise ValueError(f"a return period of {years} years is not above 1")
    return math.sqrt(6.0) / math.pi * (_EULER + math.log(-math.log1p(-1.0 / years)))
