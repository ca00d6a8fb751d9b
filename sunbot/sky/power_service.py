"""Hourly history of a place from the open NASA POWER service: asked for once, then kept beside the site file."""

from __future__ import annotations

import threading
import time
from datetime import datetime
from pathlib import Path
from typing import Any

import pandas as pd

from ..errors import Fault, InputError
from ..inputs.site import Site
from ..writing import write_text
from .own_csv import own_csv_text, read_own_csv
from .readings import COLUMNS, Reading

# Published: NASA POWER hourly service; pvlib's reader names the same address.
BASE_URL = "https://power.larc.nasa.gov/api/temporal/hourly/point"
TIMEOUT_S = 120.0
TRIES = 2
PAUSE_S = 2.0
FIRST_YEAR = 2001
"""Published: the service offers hourly light from 2001 on."""
_WHERE = "site.toml: weather"


def power_reading(site: Site) -> Reading:
    """The hours from ``first_year`` to ``last_year``; from the cache beside the site file where it is there.

    The service's stamps are UTC and name the start of the hour; missing values (-999) come back as NaN.

    Raises
    ------
    InputError
        No or impossible years; the service cannot be reached, does not answer in time, refuses or answers nonsense.
    """
    first, last = _years(site)
    cache = Path(site.folder) / cache_name(site)
    if not cache.exists():
        tables = [_year(site, year) for year in range(first, last + 1)]
        write_text(cache, own_csv_text(pd.concat(tables)))
    shift_s = round(site.weather.shift_minutes * 60)
    try:
        return read_own_csv(cache, name=cache.name, label="start", stamps_in=None, shift_s=shift_s)
    except InputError as error:
        remedy = "nothing there: delete the file, and it is fetched again"
        raise InputError([*error.faults, Fault(str(cache), "this kept copy cannot be used", remedy)]) from None


def cache_name(site: Site) -> str:
    """File name of the kept copy: it names place and years, so that a changed site file fetches anew."""
    first, last = _years(site)
    return f"nasa-power_{site.latitude:.4f}_{site.longitude:.4f}_{first}-{last}.csv"


def _years(site: Site) -> tuple[int, int]:
    first, last = site.weather.first_year or 0, site.weather.last_year or 0
    newest = datetime.now().year - 1
    if not FIRST_YEAR <= first <= last <= newest:
        missing = site.weather.first_year is None or site.weather.last_year is None
        wrong = "are missing" if missing else f"{first} to {last} is not within {FIRST_YEAR} to {newest}"
        remedy = f"whole past years, e.g. first_year = {newest - 9} and last_year = {newest}"
        raise InputError(Fault(f"{_WHERE}: first_year, last_year", wrong, remedy))
    return first, last


def _year(site: Site, year: int) -> pd.DataFrame:
    """One year, with a second try; a year a request, for that is the size the service answers quickly."""
    reason = ""
    for attempt in range(TRIES):
        if attempt:
            time.sleep(PAUSE_S)
        answer = _ask(site, year)
        if isinstance(answer, pd.DataFrame):
            return answer
        reason = answer
    wrong = f"the service gave no weather of {year} ({reason}; {TRIES} tries)"
    remedy = 'it later again, or source = "climate" or "file", which need no network'
    raise InputError(Fault(f"{_WHERE}: source nasa-power", wrong, remedy))


def _ask(site: Site, year: int) -> pd.DataFrame | str:
    """One request, given up after ``TIMEOUT_S``: the table, or what went wrong.

    pvlib's reader takes no time-out, so it runs on a thread of its own that a silent service cannot hold us with.
    """
    done: list[pd.DataFrame | str] = []

    def work() -> None:
        try:
            done.append(_fetch(site, year))
        except Exception as error:  # whatever happens on this thread is told, never lost
            done.append(_reason(error))

    worker = threading.Thread(target=work, daemon=True, name=f"nasa-power-{year}")
    worker.start()
    worker.join(TIMEOUT_S)
    return done[0] if done else f"no answer within {TIMEOUT_S:g} s"


def _fetch(site: Site, year: int) -> pd.DataFrame:
    from pvlib.iotools import get_nasa_power

    table, _ = get_nasa_power(
        site.latitude, site.longitude, f"{year}-01-01", f"{year}-12-31", list(COLUMNS), url=BASE_URL
    )
    missing = [column for column in COLUMNS if column not in table]
    if missing:
        raise KeyError(f"no {missing[0]}")
    hours = 8784 if pd.Timestamp(year, 1, 1).is_leap_year else 8760
    if len(table) < hours:
        raise ValueError(f"{len(table)} of {hours} hours")
    return pd.DataFrame(table[list(COLUMNS)])


def _reason(error: Exception) -> str:
    """What went wrong, for people."""
    import requests

    if isinstance(error, requests.ConnectionError):
        return "it cannot be reached"
    if isinstance(error, requests.HTTPError):
        return f"it refused: {_short(error.args[0] if error.args else '')}"
    return f"its answer cannot be read: {_short(error)}"


def _short(said: Any) -> str:
    text = " ".join(str(said).split()) or "no reason given"
    return text if len(text) <= 120 else text[:117] + "..."
