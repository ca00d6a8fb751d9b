"""The carrier of the sky: weather above the site, step by step."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import Literal

import numpy as np
import pandas as pd

from ..types import BoolArray, Caution, IntArray, Place


@dataclass(frozen=True)
class Stay:
    """Where a robot on a route is for a part of the year, with the horizon there: (azimuth, elevation) [deg]."""

    place: Place
    horizon: tuple[tuple[float, float], ...]


@dataclass(frozen=True, eq=False)
class Weather:
    """Weather above the site; whole years that form a ring.

    table : one row per step. Index: UTC, tz-aware, middle of the step, whole seconds (``datetime64[s, UTC]``).
        Columns ghi, dni, dhi [W/m2], temp_air [degC], wind_speed [m/s]; no NaN.
    step_h : length of every step [h].
    place : where it was taken to be.
    row : (n_times,) which row of the reference calendar a step shares its sun and clock with. The first n_rows entries
        are 0..n_rows-1, so that ``ref_times`` is the head of the index. A record has a row of its own for each step;
        generated years share 8,760.
    kind : "generated" | "typical" | "record" | "clear-sky". All but "record" live in the calendar of 2001.
    origin : one line for people that says where the weather comes from.
    digest : short hex digest of the table.
    snow_covered : (n_times,) or None; true where panels flatter than 40 deg lie under snow.
    cautions : what to know before trusting it.
    stays : where the robot is through the year, on a route; else empty. ``place`` then is that of the site: its clock.
    stay : (n_rows,) which of ``stays`` each reference row belongs to; None without a route.
    """

    table: pd.DataFrame
    step_h: float
    place: Place
    row: IntArray
    kind: Literal["generated", "typical", "record", "clear-sky"]
    origin: str
    digest: str
    snow_covered: BoolArray | None = None
    cautions: tuple[Caution, ...] = ()
    stays: tuple[Stay, ...] = ()
    stay: IntArray | None = None

    @cached_property
    def times(self) -> pd.DatetimeIndex:
        """Middles of the steps, UTC."""
        return pd.DatetimeIndex(self.table.index)

    @cached_property
    def ref_times(self) -> pd.DatetimeIndex:
        """The times whose sun and clock the steps share; (n_rows,)."""
        return self.times[: int(np.max(self.row)) + 1]

    @property
    def n_years(self) -> int:
        """Whole years in the table."""
        return round(len(self.table) * self.step_h / 8766.0)
