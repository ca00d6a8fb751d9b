"""Typical-year files: TMY3, TMY2 and EPW, rows by month, day and hour of the file's own standard clock."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pandas as pd

from ..calendar import REFERENCE_YEAR, standard_offset_h
from ..errors import Fault, InputError
from ..types import FloatArray, IntArray, Place
from .readings import DAY_S, Reading, numbers_of, on_grid, utc_index, without_codes

YEAR_DAYS = 365
_TMY3 = {
    "GHI (W/m^2)": "ghi",
    "DNI (W/m^2)": "dni",
    "DHI (W/m^2)": "dhi",
    "Dry-bulb (C)": "temp_air",
    "Wspd (m/s)": "wind_speed",
}
_EPW = {6: "temp_air", 13: "ghi", 14: "dni", 15: "dhi", 21: "wind_speed"}
# Published: EPW data dictionary, the "missing" values of dry bulb and wind speed.
_EPW_CODES: dict[str, tuple[float, ...]] = {"temp_air": (99.9,), "wind_speed": (999.0,)}
# Published: Marion & Urban, User's Manual for TMY2s (1995), table 3-2: first character and width, unit.
_TMY2 = {
    "ghi": (17, 4, 1.0),
    "dni": (23, 4, 1.0),
    "dhi": (29, 4, 1.0),
    "temp_air": (67, 4, 0.1),
    "wind_speed": (95, 3, 0.1),
}


@dataclass(frozen=True, eq=False)
class _Rows:
    """Rows of a file: year, month, day and seconds into the day of each step's middle, on the file's clock."""

    year: IntArray
    month: IntArray
    day: IntArray
    middle_s: IntArray
    step_s: int
    values: pd.DataFrame
    first_line: int


def read_tmy3(path: Path, *, name: str, time_zone: str, shift_s: int) -> Reading:
    """A TMY3 file: stamps 01:00 to 24:00 name the end of the hour (as measured on the files pvlib ships)."""
    text = _text(path)
    head = next(csv.reader([text.split("\n", 1)[0]]))
    if len(head) != 7:
        wrong = f"{len(head)} fields where 7 are due"
        shape = "station, name, state, time zone, latitude, longitude, altitude, numbers with a decimal point"
        raise InputError(Fault(f"{name}: line 1", wrong, shape))
    offset_h, latitude, longitude, altitude = _header_numbers(head[3:7], where=f"{name}: line 1")
    stamp = ["Date (MM/DD/YYYY)", "Time (HH:MM)"]
    raw = pd.read_csv(
        io.StringIO(text), skiprows=1, usecols=lambda c: c in _TMY3 or c in stamp, dtype=dict.fromkeys(stamp, str)
    )
    missing = [column for column in (*stamp, *_TMY3) if column not in raw]
    if missing:
        raise InputError(Fault(f"{name}: line 2", f"no column {missing[0]}", "the column titles of the TMY3 format"))
    when = raw[stamp[0]] + ":" + raw[stamp[1]].str.replace(":", "/")
    parts = when.str.extract(r"^(\d+)/(\d+)/(\d+):(\d+)/(\d+)$").astype(float)
    _whole(parts, where=f"{name}: date and time", first_line=3)
    month, day, year, hour, minute = (parts[i].to_numpy().astype(np.int64) for i in range(5))
    values = numbers_of(raw[list(_TMY3)].rename(columns=_TMY3), name=name, first_line=3)
    rows = _Rows(year, month, day, hour * 3600 + minute * 60 - 1800, 3600, values, 3)
    place = Place(latitude, longitude, altitude, time_zone)
    return _reading(rows, place, name=name, offset_h=offset_h, shift_s=shift_s)


def read_epw(path: Path, *, name: str, time_zone: str, shift_s: int) -> Reading:
    """An EPW file: hour 1 runs from 0 to 1 o'clock; several records an hour are taken in their order."""
    text = _text(path)
    lines = text.split("\n", 8)
    offset_h, latitude, longitude, altitude = _epw_location(lines[0], name=name)
    if len(lines) < 9 or not lines[7].upper().startswith("DATA PERIODS"):
        raise InputError(Fault(f"{name}: line 8", "no DATA PERIODS line", "the eight header lines of the EPW format"))
    wanted = [0, 1, 2, 3, *_EPW]
    try:
        raw = pd.read_csv(io.StringIO(lines[8]), header=None, usecols=wanted)
    except ValueError as error:
        wrong = f"its rows cannot be read ({error})"
        raise InputError(Fault(f"{name}: line 9 on", wrong, "35 fields a row, as the EPW format has them")) from None
    _whole(raw[[0, 1, 2, 3]], where=f"{name}: year, month, day, hour", first_line=9)
    year, month, day, hour = (raw[i].to_numpy().astype(np.int64) for i in range(4))
    per_hour, place_in_hour = _records_an_hour(month, day, hour)
    step = 3600 // per_hour
    values = numbers_of(raw[list(_EPW)].rename(columns=_EPW), name=name, first_line=9)
    rows = _Rows(year, month, day, (hour - 1) * 3600 + place_in_hour * step + step // 2, step, values, 9)
    place = Place(latitude, longitude, altitude, time_zone)
    return _reading(rows, place, name=name, offset_h=offset_h, shift_s=shift_s, codes=_EPW_CODES)


def read_tmy2(path: Path, *, name: str, time_zone: str, shift_s: int) -> Reading:
    """A TMY2 file: fixed columns, hour 1 runs from 0 to 1 o'clock, temperature and wind in tenths."""
    head, *lines = path.read_bytes().decode("latin-1").rstrip().split("\n")
    place, offset_h = _tmy2_place(head, name=name, time_zone=time_zone)
    width = max(start + size for start, size, _ in _TMY2.values())
    short = [i for i, line in enumerate(lines) if len(line) < width]
    if short:
        raise InputError(Fault(f"{name}: line {short[0] + 2}", "it is too short", "142 characters, as TMY2 has them"))
    cells = np.array([line[:width].encode("latin-1") for line in lines]).view("S1").reshape(len(lines), width)

    def column(start: int, size: int) -> FloatArray:
        text = np.ascontiguousarray(cells[:, start : start + size]).view(f"S{size}").ravel()
        return np.asarray(text.astype(np.float64))

    try:
        year, month, day, hour = (column(start, 2).astype(np.int64) for start in (1, 3, 5, 7))
        raw = {key: column(start, size) for key, (start, size, _) in _TMY2.items()}
    except ValueError as error:
        raise InputError(Fault(name, f"its columns hold no numbers ({error})", "a TMY2 file as published")) from None
    values, coded = without_codes(pd.DataFrame(raw), {"wind_speed": (999.0,)})
    for key, (_, _, unit) in _TMY2.items():
        values[key] *= unit
    rows = _Rows(year + 1900, month, day, (hour - 1) * 3600 + 1800, 3600, values, 2)
    return _reading(rows, place, name=name, offset_h=offset_h, shift_s=shift_s, coded=coded)


def _tmy2_place(head: str, *, name: str, time_zone: str) -> tuple[Place, float]:
    """Position and offset [h] from the header of a TMY2 file (fixed columns)."""
    try:
        north = float(head[38:41]) + float(head[42:44]) / 60
        east = float(head[46:50]) + float(head[51:53]) / 60
        signs = {"N": 1, "S": -1, "E": 1, "W": -1}
        place = Place(signs[head[37]] * north, signs[head[45]] * east, float(head[55:59]), time_zone)
        return place, float(head[33:36])
    except (ValueError, KeyError, IndexError):
        wrong = "it is not the header of a TMY2 file"
        raise InputError(
            Fault(f"{name}: line 1", wrong, "station, city, time zone and position as TMY2 has them")
        ) from None


def _text(path: Path) -> str:
    """The file as text; station names are often in an older encoding than UTF-8."""
    data = path.read_bytes()
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = data.decode("latin-1")
    return text.replace("\r\n", "\n").replace("\r", "\n")


def _epw_location(line: str, *, name: str) -> tuple[float, float, float, float]:
    """Offset [h], latitude, longitude and altitude of the LOCATION line."""
    where = f"{name}: line 1 (LOCATION)"
    head = next(csv.reader([line]))
    shape = "ten fields, the last latitude, longitude, time zone and altitude, with decimal points (5.5, not 5,5)"
    if head[0].strip().upper() != "LOCATION" or len(head) != 10:
        wrong = f"it has {len(head)} fields where 10 are due, as when the time zone is written with a decimal comma"
        if len(head) < 10:
            wrong = f"it has {len(head)} fields where 10 are due"
        raise InputError(Fault(where, wrong, shape))
    latitude, longitude, offset_h, altitude = _header_numbers(head[6:10], where=where)
    return offset_h, latitude, longitude, altitude


def _header_numbers(fields: list[str], *, where: str) -> list[float]:
    """Header fields as numbers, position and offset within what a place on Earth can have."""
    try:
        numbers = [float(text) for text in fields]
    except ValueError:
        wrong = f"{', '.join(repr(text.strip()) for text in fields)} are not four numbers"
        raise InputError(Fault(where, wrong, "numbers with a decimal point (5.5, not 5,5)")) from None
    if not np.isfinite(numbers).all():
        raise InputError(Fault(where, "it holds a number that is not finite", "the position of the station"))
    return numbers


def _whole(parts: pd.DataFrame, *, where: str, first_line: int) -> None:
    """Refuse rows whose date or time is missing or no number."""
    numbers = parts.apply(pd.to_numeric, errors="coerce")
    bad = numbers.isna().any(axis=1).to_numpy()
    if bad.any():
        line = first_line + int(np.argmax(bad))
        raise InputError(
            Fault(f"{where}: line {line}", "it cannot be read", "the date and time as the format has them")
        )


def _records_an_hour(month: IntArray, day: IntArray, hour: IntArray) -> tuple[int, IntArray]:
    """How many rows an hour has, and which of them each row is."""
    new = np.ones(len(hour), dtype=bool)
    new[1:] = (np.diff(hour) != 0) | (np.diff(day) != 0) | (np.diff(month) != 0)
    start = np.flatnonzero(new)
    counts = np.diff(np.append(start, len(hour)))
    usual = int(np.bincount(counts).argmax())
    return usual, np.arange(len(hour)) - np.repeat(start, counts)


def _reading(
    rows: _Rows,
    place: Place,
    *,
    name: str,
    offset_h: float,
    shift_s: int,
    codes: dict[str, tuple[float, ...]] | None = None,
    coded: dict[str, int] | None = None,
) -> Reading:
    """Rows as a typical year, or as a record where their own years run through more than one year."""
    if not -14.0 <= offset_h <= 14.0 or abs(place.latitude) > 90.0 or abs(place.longitude) > 180.0:
        wrong = (
            f"latitude {place.latitude:g}, longitude {place.longitude:g}, time zone {offset_h:g} h is no place on Earth"
        )
        raise InputError(Fault(f"{name}: line 1", wrong, "the position and the time zone of the station"))
    values, found = without_codes(rows.values, codes)
    counts = found if coded is None else coded
    shift_s = shift_s - round(offset_h * 3600)
    year_rows = YEAR_DAYS * (DAY_S // rows.step_s)
    through = len(values) > year_rows and bool((np.diff(rows.year) >= 0).all())
    if through:
        day = _days(rows.year, rows, name=name)
        table, step = on_grid(day * DAY_S + rows.middle_s + shift_s, values, name=name)
        return Reading(table, step / 3600, "record", place, name, counts)
    leap = (rows.month == 2) & (rows.day == 29)
    table = _typical_year(rows, values, ~leap, name=name, shift_s=shift_s, time_zone=place.time_zone)
    return Reading(table, rows.step_s / 3600, "typical", place, name, counts, int(leap.sum()))


def _days(year: IntArray | int, rows: _Rows, *, name: str) -> IntArray:
    """Days since 1970 of the rows, in the ``year`` given; a date that does not exist is a fault."""
    dates = pd.to_datetime(
        pd.DataFrame({"year": year, "month": rows.month, "day": rows.day}, index=range(len(rows.month))),
        errors="coerce",
    )
    if dates.isna().any():
        row = int(np.argmax(dates.isna().to_numpy()))
        wrong = f"month {rows.month[row]}, day {rows.day[row]} is no date"
        raise InputError(Fault(f"{name}: line {rows.first_line + row}", wrong, "dates of the calendar"))
    return dates.to_numpy().astype("datetime64[D]").astype(np.int64)


def _typical_year(
    rows: _Rows, values: pd.DataFrame, keep: np.ndarray, *, name: str, shift_s: int, time_zone: str
) -> pd.DataFrame:
    """The rows kept, as the year 2001 of the site's standard clock: the ring of 365 days, turned to its start."""
    part = _Rows(
        rows.year[keep],
        rows.month[keep],
        rows.day[keep],
        rows.middle_s[keep],
        rows.step_s,
        values[keep],
        rows.first_line,
    )
    start = int(np.datetime64(f"{REFERENCE_YEAR}-01-01", "s").astype(np.int64))
    seconds = _days(REFERENCE_YEAR, part, name=name) * DAY_S + part.middle_s
    slot = (seconds - start) // rows.step_s
    count = YEAR_DAYS * (DAY_S // rows.step_s)
    _in_order(slot, keep, count, name=name, first_line=rows.first_line)
    year = np.full((count, values.shape[1]), np.nan)
    year[slot] = part.values.to_numpy()
    utc = start + rows.step_s // 2 + shift_s + rows.step_s * np.arange(count, dtype=np.int64)
    local = utc + round(standard_offset_h(time_zone) * 3600)
    # Rows before 1 January of the site's clock go behind its 31 December, and the other way round.
    turn = int(-((local[0] - start) // rows.step_s))
    year, utc = np.roll(year, -turn, axis=0), utc + turn * rows.step_s
    return pd.DataFrame(year, columns=values.columns, index=utc_index(utc))


def _in_order(slot: IntArray, keep: np.ndarray, count: int, *, name: str, first_line: int) -> None:
    """Refuse rows out of the order of the year, twice the same hour, or outside the day."""
    line = first_line + np.flatnonzero(keep)
    if ((slot < 0) | (slot >= count)).any():
        bad = int(np.argmax((slot < 0) | (slot >= count)))
        raise InputError(Fault(f"{name}: line {line[bad]}", "its hour is outside the day", "hours 1 to 24"))
    back = np.diff(slot) <= 0
    if back.any():
        bad = int(np.argmax(back)) + 1
        word = "stands twice" if slot[bad] == slot[bad - 1] else "comes after a later hour of the year"
        wrong = f"its hour {word} ({int(back.sum())} such rows)"
        raise InputError(
            Fault(f"{name}: line {line[bad]}", wrong, "each hour of the year once, from January to December")
        )
