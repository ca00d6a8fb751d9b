"""The user's own CSV: stamps with an offset (or a named clock), light and whatever else was measured."""

from __future__ import annotations

import re
import warnings
from datetime import timedelta, timezone, tzinfo
from pathlib import Path
from typing import Any, Literal
from zoneinfo import ZoneInfo

import numpy as np
import pandas as pd

from ..errors import Fault, InputError
from ..types import BoolArray, FloatArray, IntArray
from .own_csv_faults import ragged, refuse_no_text, titles_of
from .readings import COLUMNS, Reading, numbers_of, on_grid, step_of, without_codes

Label = Literal["start", "middle", "end"]
_MIDDLE = {"start": 0.5, "middle": 0.0, "end": -0.5}
_OFFSET = re.compile(r"^([+-])(\d\d):(\d\d)$")
_ZONED = r"(?:[Zz]|[+-]\d\d(?::?\d\d)?)$"
_CLOCKS = 'stamps_in = "UTC", an offset such as "+01:00", or a zone such as "Europe/Zurich"'


def read_own_csv(path: Path, *, name: str, label: Label | None, stamps_in: str | None, shift_s: int) -> Reading:
    """Rows of a CSV with columns time, ghi and any of dni, dhi, temp_air, wind_speed, as a record.

    Raises
    ------
    InputError
        No ``label``; no column time or ghi; cells that are no numbers; stamps without an offset and no ``stamps_in``;
        stamps out of order, twice, or off a constant step.
    """
    if label is None:
        choice = 'label = "start", "middle" or "end": which instant of its interval a time stamp names'
        raise InputError(Fault("site.toml: weather: label", f"it is missing, and {name} needs it", choice))
    raw, first_line = _table(path, name=name)
    stamps = _utc_seconds(raw["time"], name=name, stamps_in=stamps_in, first_line=first_line)
    seconds = stamps + round(_MIDDLE[label] * step_of(stamps, name=name)) + shift_s
    values = numbers_of(raw.drop(columns="time"), name=name, first_line=first_line)
    values, coded = without_codes(values)
    table, step = on_grid(seconds, values, name=name)
    return Reading(table, step / 3600, "record", None, name, coded)


def _table(path: Path, *, name: str) -> tuple[pd.DataFrame, int]:
    """The columns we know, the stamps as text, and the line of the file on which the first row stands."""
    refuse_no_text(path, name=name)
    above = 1
    try:
        with path.open(encoding="utf-8-sig") as file:
            line = file.readline()
            while line and (not line.strip() or line.startswith("#")):  # notes above the titles
                above, line = above + 1, file.readline()
            titles = titles_of(line, where=f"{name}: line {above}")
            options: dict[str, Any] = {"header": None, "names": titles, "index_col": False, "skipinitialspace": True}
            with warnings.catch_warnings():
                warnings.simplefilter("error", pd.errors.ParserWarning)  # a first row with more cells than titles
                raw = pd.read_csv(file, dtype={"time": str}, **options)
    except UnicodeDecodeError:
        raise InputError(Fault(name, "it is not UTF-8 text", "the table saved as CSV in UTF-8")) from None
    except (pd.errors.ParserError, pd.errors.ParserWarning) as error:
        raise InputError(ragged(str(error), titles=len(titles), above=above, name=name)) from None
    except pd.errors.EmptyDataError:
        raw = pd.DataFrame(columns=titles)
    if len(raw) < 2:
        raise InputError(Fault(name, "it holds fewer than two rows", "a weather file of at least one whole year"))
    return pd.DataFrame(raw[["time", *(title for title in COLUMNS if title in titles)]]), above + 1


def _utc_seconds(stamps: pd.Series, *, name: str, stamps_in: str | None, first_line: int) -> IntArray:
    """Stamps as seconds since 1970 UTC."""
    where = f"{name}: time"
    if stamps.isna().any():
        line = int(np.argmax(stamps.isna().to_numpy())) + first_line
        raise InputError(Fault(f"{where}: line {line}", "it is empty", "a time stamp in each row"))
    try:
        with warnings.catch_warnings():
            warnings.simplefilter("error", FutureWarning)  # what pandas 2 says of mixed offsets, pandas 3 raises
            times = pd.to_datetime(stamps, format="ISO8601")
        if times.dt.tz is not None and not _zoned(stamps).all():
            times = _mixed_offsets(stamps, where=where, first_line=first_line)
    except (ValueError, FutureWarning, pd.errors.OutOfBoundsDatetime):
        times = _mixed_offsets(stamps, where=where, first_line=first_line)
    index = pd.DatetimeIndex(times)
    if index.tz is not None and stamps_in is not None:
        wrong = f"it is given, but the stamps of {name} carry an offset"
        raise InputError(Fault("site.toml: weather: stamps_in", wrong, "the file without stamps_in"))
    if index.tz is None:
        if stamps_in is None:
            wrong = f"{stamps.iloc[0]} carries no offset from UTC, and the site file names no clock for it"
            raise InputError(
                Fault(f"{where}: line {first_line}", wrong, f"{_CLOCKS} under [weather], or stamps with an offset")
            )
        index = _localized(index, clock_of(stamps_in), where=where, stamps_in=stamps_in)
    return np.asarray(index.tz_convert("UTC").round("s").as_unit("s").asi8, dtype=np.int64)


def _zoned(stamps: pd.Series) -> BoolArray:
    """Which stamps carry an offset."""
    return np.asarray(stamps.str.contains(_ZONED, regex=True).to_numpy(dtype=bool))


def _mixed_offsets(stamps: pd.Series, *, where: str, first_line: int) -> pd.Series:
    """Stamps whose offsets differ (daylight saving) as UTC; the line of the first that cannot be read otherwise."""
    times = pd.to_datetime(stamps, format="ISO8601", utc=True, errors="coerce")
    bad = times.isna().to_numpy()
    shape = "ISO 8601, e.g. 2021-03-01T12:00:00+01:00"
    if bad.any():
        row = int(np.argmax(bad))
        raise InputError(Fault(f"{where}: line {row + first_line}", f"{stamps.iloc[row]!r} is no time stamp", shape))
    naive = ~_zoned(stamps)
    if naive.any():
        row = int(np.argmax(naive))
        wrong = f"{stamps.iloc[row]} carries no offset, others do"
        raise InputError(Fault(f"{where}: line {row + first_line}", wrong, "all stamps with an offset, or none"))
    return times


def clock_of(stamps_in: str) -> tzinfo:
    """The clock that ``stamps_in`` names: UTC, an offset or a zone."""
    offset = _OFFSET.match(stamps_in)
    if offset:
        minutes = int(offset[2]) * 60 + int(offset[3])
        return timezone(timedelta(minutes=-minutes if offset[1] == "-" else minutes))
    return ZoneInfo(stamps_in)


def _localized(index: pd.DatetimeIndex, clock: tzinfo, *, where: str, stamps_in: str) -> pd.DatetimeIndex:
    try:
        return index.tz_localize(clock, ambiguous="infer")
    except ValueError as error:
        wrong = f"on the clock of {stamps_in} its stamps do not run through ({str(error).splitlines()[0]})"
        standard = 'the offset the logger really kept, e.g. stamps_in = "+01:00" for a clock without daylight saving'
        raise InputError(Fault(where, wrong, standard)) from None


def own_csv_text(table: pd.DataFrame) -> str:
    """A table of middles as own CSV; read back with label "middle" it gives the same numbers."""
    stamps = pd.DatetimeIndex(table.index).strftime("%Y-%m-%dT%H:%M:%SZ")
    columns: list[FloatArray] = [table[column].to_numpy() for column in table]
    body = pd.DataFrame({"time": stamps, **dict(zip(table.columns, columns, strict=True))})
    return str(body.to_csv(index=False, lineterminator="\n"))
