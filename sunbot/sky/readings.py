"""What a weather file says, brought onto one regular grid of interval middles and not yet mended."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

import numpy as np
import pandas as pd

from ..errors import Fault, InputError
from ..types import IntArray, Place
from .record import LIGHT

COLUMNS = (*LIGHT, "temp_air", "wind_speed")
# Common practice: the codes loggers and typical-year files write where nothing was measured.
FILL_CODES = (9999.0, 99999.0, -9999.0, -9900.0, -999.0)
SHORTEST_S, LONGEST_S, DAY_S = 60, 3600, 86400


@dataclass(frozen=True, eq=False)
class Reading:
    """A weather file on a regular grid.

    table : index UTC, middles of the steps, whole seconds, no step left out; columns `COLUMNS`, NaN where missing.
        A typical year lies in the calendar of 2001 of the site's standard clock, a record in its own years.
    step_h : length of a step [h].
    kind : one typical year, or a record.
    header : where the file says it was taken, if it says.
    name : what to call the file in messages.
    coded : rows in which a column held a fill code.
    left_out : rows that have no place in a typical year of 365 days (29 February).
    """

    table: pd.DataFrame
    step_h: float
    kind: Literal["typical", "record"]
    header: Place | None
    name: str
    coded: dict[str, int] = field(default_factory=dict)
    left_out: int = 0


def numbers_of(raw: pd.DataFrame, *, name: str, first_line: int) -> pd.DataFrame:
    """The columns as floats; a cell that is no number is a fault that names its line."""
    out = {}
    faults = []
    for column in raw.columns:
        values = pd.to_numeric(raw[column], errors="coerce")
        bad = values.isna() & raw[column].notna()
        if bad.any():
            row = int(np.argmax(bad.to_numpy()))
            wrong = f"{raw[column].iloc[row]!r} is not a number ({int(bad.sum())} such cells)"
            where = f"{name}: line {first_line + row}: {column}"
            faults.append(Fault(where, wrong, "numbers with a decimal point, and nothing where the value is missing"))
        out[column] = values.to_numpy(dtype=np.float64, copy=True)
    if faults:
        raise InputError(faults)
    return pd.DataFrame(out)


def without_codes(
    values: pd.DataFrame, extra: dict[str, tuple[float, ...]] | None = None
) -> tuple[pd.DataFrame, dict[str, int]]:
    """``values`` with fill codes and infinities as NaN, all of `COLUMNS` there, and how many were codes."""
    coded: dict[str, int] = {}
    out = {}
    for column in COLUMNS:
        if column not in values:
            out[column] = np.full(len(values), np.nan)
            continue
        data = values[column].to_numpy(dtype=np.float64, copy=True)
        bad = np.isin(data, FILL_CODES + (extra or {}).get(column, ())) | np.isinf(data)
        if bad.any():
            coded[column] = int(bad.sum())
            data[bad] = np.nan
        out[column] = data
    return pd.DataFrame(out), coded


def stamp_text(seconds: int | np.int64) -> str:
    """A UTC instant for people."""
    return f"{pd.Timestamp(int(seconds), unit='s'):%Y-%m-%d %H:%M} UTC"


def step_of(seconds: IntArray, *, name: str) -> int:
    """The constant step of rising stamps [s]; faults name the first row that breaks the order."""
    if len(seconds) < 2:
        raise InputError(Fault(name, "it holds fewer than two rows", "a weather file of at least one whole year"))
    gaps = np.diff(seconds)
    order = "one row for each interval, in the order of time"
    if (gaps < 0).any():
        row = int(np.argmax(gaps < 0)) + 1
        before, after = stamp_text(seconds[row - 1]), stamp_text(seconds[row])
        raise InputError(Fault(f"{name}: data row {row + 1}", f"it goes back in time, from {before} to {after}", order))
    if (gaps == 0).any():
        row = int(np.argmax(gaps == 0)) + 1
        wrong = f"{stamp_text(seconds[row])} stands twice ({int((gaps == 0).sum())} such rows)"
        clock = f"{order}; where a clock went back in autumn, stamps with an offset"
        raise InputError(Fault(f"{name}: data row {row + 1}", wrong, clock))
    lengths, counts = np.unique(gaps, return_counts=True)
    step = int(lengths[np.argmax(counts)])
    if not SHORTEST_S <= step <= LONGEST_S or DAY_S % step or step % 2:
        wrong = f"its step is {step / 60:g} min"
        raise InputError(Fault(name, wrong, "a constant step from 1 to 60 min that divides the day"))
    if (gaps % step).any():
        row = int(np.argmax(gaps % step != 0)) + 1
        wrong = f"{stamp_text(seconds[row])} is off the grid of its {step / 60:g} min steps"
        raise InputError(
            Fault(f"{name}: data row {row + 1}", wrong, "stamps a constant step apart; gaps may be left out")
        )
    return step


def on_grid(seconds: IntArray, values: pd.DataFrame, *, name: str) -> tuple[pd.DataFrame, int]:
    """Rows at rising UTC ``seconds`` (middles) as a table without left-out steps, and its step [s]."""
    step = step_of(seconds, name=name)
    place = (seconds - seconds[0]) // step
    size = int(place[-1]) + 1
    if size > 4 * len(seconds) + 100_000:
        wrong = f"from {stamp_text(seconds[0])} to {stamp_text(seconds[-1])} most steps are missing"
        raise InputError(Fault(name, wrong, "a file whose rows follow each other; look for a mistyped year"))
    if size == len(seconds):
        full = values
    else:
        full = pd.DataFrame({column: np.full(size, np.nan) for column in values})
        full.iloc[place] = values.to_numpy()
    return full.set_axis(utc_index(seconds[0] + step * np.arange(size, dtype=np.int64)), axis=0), step


def utc_index(seconds: IntArray) -> pd.DatetimeIndex:
    """UTC times in whole seconds."""
    return pd.DatetimeIndex(seconds.astype("datetime64[s]")).tz_localize("UTC")
