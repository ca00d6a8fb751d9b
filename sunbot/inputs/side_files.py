"""Small tables that stand beside a site file as CSV: a horizon, a track."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path

from ..errors import Fault, InputError
from .checks import month_and_day
from .site import MOST_STOPS, Site, Stop

MAX_BYTES = 1_000_000
"""A horizon or a year's track stays far below this; anything larger is another file."""
MOST_FAULTS = 10
"""So many mistakes of one file are told at once."""
HORIZON = {"azimuth": (0.0, 360.0), "elevation": (-5.0, 90.0)}
TRACK = {"latitude": (-90.0, 90.0), "longitude": (-180.0, 180.0), "altitude_m": (-450.0, 9000.0)}


@dataclass(frozen=True)
class _Row:
    """One line of a table: its number in the file, its text cells by title."""

    line: int
    cells: dict[str, str]


def with_side_files(site: Site, folder: Path, *, file: str) -> Site:
    """The site with what its ``horizon_file`` and ``track`` say, read from ``folder``, in their place.

    Raises
    ------
    InputError
        A file that is missing or no such table, with its mistakes by line.
    """
    update: dict[str, object] = {}
    faults: list[Fault] = []
    for key, model_key, read in (("horizon_file", "horizon", _horizon), ("track", "stops", _stops)):
        name = getattr(site, key)
        if name is not None:
            try:
                update |= {key: None, model_key: read(folder / name, f"{file}: {key}")}
            except InputError as error:
                faults += error.faults
    if faults:
        raise InputError(faults)
    return site.model_copy(update=update)


def _horizon(path: Path, where: str) -> tuple[tuple[float, float], ...]:
    """Azimuths and elevations [deg]; what lies below the level hides nothing."""
    rows, faults = _rows_in(path, where, titles=("azimuth", "elevation")), list[Fault]()
    values = [_numbers(row, HORIZON, file=path.name, faults=faults) for row in rows]
    for (_, before), (row, azimuth) in pairwise(
        (row, value["azimuth"]) for row, value in zip(rows, values, strict=True)
    ):
        if azimuth <= before:
            wrong = f"{azimuth:g} does not come after {before:g} of the line before"
            faults.append(Fault(f"{path.name}: line {row.line}: azimuth", wrong, "azimuths that rise from 0 to 360"))
    _refuse(faults)
    return tuple((value["azimuth"], max(value["elevation"], 0.0)) for value in values)


def _stops(path: Path, where: str) -> tuple[Stop, ...]:
    """Stops by the day of the year; dates with a year may run over New Year, but not longer than a year."""
    rows, faults = _rows_in(path, where, titles=("date", "latitude", "longitude")), list[Fault]()
    if len(rows) > MOST_STOPS:
        wrong = f"it has {len(rows)} rows, at most {MOST_STOPS} can be used"
        raise InputError(Fault(path.name, wrong, "one position a day, of one year"))
    values = [_numbers(row, TRACK, file=path.name, faults=faults) for row in rows]
    faults += _date_faults(rows, file=path.name)
    _refuse(faults)
    stops = {}
    for row, value in zip(rows, values, strict=True):
        day = row.cells["date"][-5:]
        stops["02-28" if day == "02-29" else day] = value
    return tuple(Stop(start=day, **stops[day]) for day in sorted(stops))


def _date_faults(rows: list[_Row], *, file: str) -> Iterator[Fault]:
    """Dates that are none, or do not rise, or run through more than one year."""
    instead = "MM-DD or YYYY-MM-DD, e.g. 2024-03-15"
    dates = [row.cells["date"] for row in rows]
    for row, day in zip(rows, dates, strict=True):
        if not re.fullmatch(r"(\d{4}-)?\d{2}-\d{2}", day) or month_and_day(day[-5:]) == (0, 0):
            yield Fault(f"{file}: line {row.line}: date", f'"{day}" is no date', instead)
    if len({len(day) for day in dates}) > 1:
        yield Fault(f"{file}: date", "some dates have a year and some have none", "all of them alike")
        return
    for (_, before), (row, day) in pairwise(zip(rows, dates, strict=True)):
        if day <= before:
            wrong = f'"{day}" does not come after "{before}" of the line before'
            yield Fault(f"{file}: line {row.line}: date", wrong, "the rows in the order of their dates, each day once")
    if len(dates[0]) == 10 and dates[-1] >= f"{_year(dates[0]) + 1:04d}{dates[0][4:]}":
        wrong = f"it runs from {dates[0]} to {dates[-1]}, over more than one year"
        yield Fault(f"{file}: date", wrong, "one year of it: the route is the same every year")


def _year(day: str) -> int:
    return int(day[:4]) if day[:4].isdigit() else 0


def _numbers(row: _Row, columns: dict[str, tuple[float, float]], *, file: str, faults: list[Fault]) -> dict[str, float]:
    """The row's numbers, each within its bounds; NaN in place of what is wrong, which is added to ``faults``."""
    found = {}
    for title, (low, high) in columns.items():
        if title not in row.cells:
            continue
        text = row.cells[title]
        try:
            number = float(text)
        except ValueError:
            number = float("nan")
        if not low <= number <= high:
            wrong = f'"{text}" is no number' if number != number else f"{number:g} is outside {low:g} to {high:g}"
            faults.append(Fault(f"{file}: line {row.line}: {title}", wrong, f"a number from {low:g} to {high:g}"))
            number = float("nan")
        found[title] = number
    return found


def _rows_in(path: Path, where: str, *, titles: tuple[str, ...]) -> list[_Row]:
    """The lines of a CSV under its titles; empty lines and those behind a # are passed over."""
    lines = [
        (number, line)
        for number, line in enumerate(_text(path, where).splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    head = [cell.strip().lower() for cell in next(csv.reader([lines[0][1]]))] if lines else []
    wanted = f"a first line with the titles {','.join(titles)}"
    if not lines:
        raise InputError(Fault(path.name, "is empty", wanted))
    spot = f"{path.name}: line {lines[0][0]}"
    if len(head) == 1 and ";" in head[0]:
        wrong = "its cells are separated by semicolons"
        raise InputError(Fault(spot, wrong, "cells separated by commas, and numbers with a decimal point"))
    missing = [title for title in titles if title not in head]
    twice = [title for title in titles if head.count(title) > 1]
    if missing or twice:
        wrong = f"no column {' and no column '.join(missing)}" if missing else f"{twice[0]} stands twice"
        raise InputError(Fault(spot, wrong, wanted))
    rows = [_Row(n, dict(zip(head, (c.strip() for c in next(csv.reader([line]))), strict=False))) for n, line in lines]
    if len(rows) < 2:
        raise InputError(Fault(path.name, "holds no row below its titles", "one row for each point"))
    short = [row for row in rows if not set(titles) <= set(row.cells)]
    if short:
        spot = f"{path.name}: line {short[0].line}"
        raise InputError(Fault(spot, "has fewer cells than titles", f"{','.join(titles)} in every row"))
    return rows[1:]


def _text(path: Path, where: str) -> str:
    """The text of an ordinary, not too large UTF-8 file."""
    remedy = "the path of a CSV, seen from the folder of the site file"
    try:
        if not path.is_file():
            raise InputError(Fault(where, f"leads to {path}, where no file is", remedy))
        if path.stat().st_size > MAX_BYTES:
            wrong = f"leads to {path.name} of {path.stat().st_size / 1e6:,.0f} MB, and such a table has a few kB"
            raise InputError(Fault(where, wrong, remedy))
        return path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError:
        raise InputError(Fault(path.name, "is not UTF-8 text", "the table saved as CSV in UTF-8")) from None
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError(Fault(where, f"leads to a file that cannot be read ({error})", remedy)) from None


def _refuse(faults: list[Fault]) -> None:
    if faults:
        raise InputError(faults[:MOST_FAULTS])
