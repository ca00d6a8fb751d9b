"""A weather record on its full grid of steps, as the audit looks at it."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pandas as pd

from ..types import BoolArray, FloatArray, IntArray, Place
from .sun_arc import SunArc, sun_arc

LIGHT = ("ghi", "dni", "dhi")


@dataclass(frozen=True, eq=False)
class Record:
    """Columns of a record under the sun of its place.

    times : middles of the steps, UTC, regular.
    columns : (n_times,) each, NaN where missing: ghi and any of dni, dhi [W/m2], temp_air [degC], wind_speed [m/s].
    arc : the sun over the times.
    """

    times: pd.DatetimeIndex
    step_h: float
    place: Place
    columns: dict[str, FloatArray]
    arc: SunArc

    @property
    def ghi(self) -> FloatArray:
        return self.columns["ghi"]

    @property
    def beam_and_diffuse(self) -> tuple[FloatArray, FloatArray] | None:
        """Columns dni and dhi, where the record has both."""
        return (self.columns["dni"], self.columns["dhi"]) if {"dni", "dhi"} <= self.columns.keys() else None

    def but(self, **columns: FloatArray) -> Record:
        """The record with some columns exchanged."""
        return replace(self, columns=self.columns | columns)

    def under_shifted_clock(self, shift_min: float) -> Record:
        """The record as if its clock were ``shift_min`` later."""
        return replace(self, arc=self.arc.shifted(shift_min)) if shift_min else self

    def when(self, mask: BoolArray) -> str:
        """For people: first time at which ``mask`` holds."""
        return stamp(self.times[int(np.argmax(mask))])


def record_of(raw: pd.DataFrame, *, step_h: float, place: Place) -> Record:
    """Lay a sorted table with unique UTC middles on its full grid; stamps that are not there become NaN."""
    times = pd.DatetimeIndex(raw.index).as_unit("s")
    grid = pd.date_range(times[0], times[-1], freq=pd.Timedelta(seconds=round(step_h * 3600.0)), unit="s")
    table = raw.set_axis(times)
    if not times.equals(grid):
        table = table.reindex(grid, method="nearest", tolerance=pd.Timedelta(seconds=round(step_h * 1800.0) - 1))
    known = [name for name in (*LIGHT, "temp_air", "wind_speed") if name in table and table[name].notna().any()]
    columns = {name: table[name].to_numpy(dtype=np.float64) for name in known}
    columns.setdefault("ghi", np.full(len(grid), np.nan))
    return Record(grid, step_h, place, columns, sun_arc(grid, place))


def runs(mask: BoolArray) -> tuple[IntArray, IntArray]:
    """Starts and lengths of the stretches in which ``mask`` holds."""
    edges = np.diff(np.concatenate(([0], mask.astype(np.int8), [0])))
    starts = np.flatnonzero(edges == 1)
    return starts, np.flatnonzero(edges == -1) - starts


def stamp(time: pd.Timestamp) -> str:
    """A time for people."""
    return f"{time:%Y-%m-%d %H:%M} UTC"
