"""From a site to its weather: which source, and what a file needs before it is whole years without a hole."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pandas as pd

from ..errors import Fault, InputError
from ..inputs.site import Site
from ..types import Caution, Place
from .clear_sky import clear_sky_weather
from .climate import generated_weather
from .digest import table_digest
from .files import read_weather_file
from .mend import mended
from .power_service import power_reading
from .quality import AUDITED, AuditCheck, audit_record
from .readings import Reading
from .record import runs, stamp
from .route import route_weather
from .sun_height import sun_height
from .weather import Weather
from .whole_years import whole_years


def weather_for(site: Site, *, years: int = 50, seed: int = 1) -> Weather:
    """Whole years of weather above a site, from the source its ``[weather]`` names.

    Parameters
    ----------
    site :
        The place and its ``[weather]``.
    years :
        How many; of a record its last ones. A typical or a clear-sky year is one year, whatever is asked.
    seed :
        Of generated years; the others draw nothing.

    Raises
    ------
    InputError
        A file that is missing, unreadable, of another place or clock, or full of holes; no [climate] where one
        is needed.
    """
    if years < 1:
        raise ValueError(f"years must be at least 1, not {years}")
    if site.horizon_file is not None or site.track is not None:
        raise ValueError("horizon_file and track are read by load_site: give horizon and stops instead")
    if site.stops:
        return route_weather(site, years=years, seed=seed)
    source = site.weather.source
    if source == "climate":
        return generated_weather(site, years=years, seed=seed)
    if source == "clear-sky":
        return clear_sky_weather(site)
    return weather_of(reading_for(site), site, years=years)


def reading_for(site: Site) -> Reading:
    """What the file of the site, or the service, says; not yet audited or mended."""
    return power_reading(site) if site.weather.source == "nasa-power" else read_weather_file(site)


def place_of(reading: Reading, site: Site) -> Place:
    """Where the weather is taken to be: the site, or with ``elsewhere = true`` where the file was taken."""
    if site.weather.elsewhere and reading.header is not None:
        return replace(reading.header, time_zone=site.time_zone)
    return Place(site.latitude, site.longitude, site.altitude_m, site.time_zone)


def audit_of(reading: Reading, site: Site) -> tuple[AuditCheck, ...]:
    """The audit of a reading, the fill codes counted that its reader took for missing values.

    Raises
    ------
    InputError
        The reading holds no light at all, so that there is nothing to look at.
    """
    if not float(np.nansum(reading.table["ghi"])) > 0.0:
        remedy = "a file with global light on the level in W/m2 as ghi"
        raise InputError(Fault(reading.name, "its ghi holds no light at all", remedy))
    return audit_record(
        reading.table,
        step_h=reading.step_h,
        place=place_of(reading, site),
        shift_now=site.weather.shift_minutes,
        coded=reading.coded,
    )


def weather_of(reading: Reading, site: Site, *, years: int) -> Weather:
    """A reading audited, mended and cut into whole years.

    Raises
    ------
    InputError
        The audit finds what no answer could be trusted on, a typical year has a long gap, a record no whole year.
    """
    checks = audit_of(reading, site)
    _refuse(checks, name=reading.name)
    place = place_of(reading, site)
    sun = sun_height(pd.DatetimeIndex(reading.table.index), reading.step_h, place)
    table, cautions = mended(reading, sun, site)
    if reading.kind == "typical":
        _refuse_holes(table, reading)
        more = _typical_cautions(reading)
    else:
        table, more = whole_years(table, step_h=reading.step_h, zone=site.time_zone, years=years, name=reading.name)
    step = f"{reading.step_h * 60:g} min steps"
    kind = "a typical year" if reading.kind == "typical" else f"measured, {_span(table)}"
    return Weather(
        table=table,
        step_h=reading.step_h,
        place=place,
        row=np.arange(len(table)),
        kind=reading.kind,
        origin=f"{reading.name}: {kind}, {step}",
        digest=table_digest(table),
        cautions=(*cautions, *more, *_place_cautions(reading, site), *_findings(checks, name=reading.name)),
    )


def _span(table: pd.DataFrame) -> str:
    times = pd.DatetimeIndex(table.index)
    return f"{times[0]:%Y-%m} to {times[-1]:%Y-%m}"


def _refuse(checks: tuple[AuditCheck, ...], *, name: str) -> None:
    """An error of the fatal findings; gaps are judged by whoever fills them."""
    fatal = [check for check in checks if check.fatal and not check.passed and check.code != "gaps"]
    if fatal:
        raise InputError(Fault(f"{name}: {check.code}", check.found, check.instead) for check in fatal)


def _findings(checks: tuple[AuditCheck, ...], *, name: str) -> tuple[Caution, ...]:
    """What the audit found and an answer can live with; of gaps whoever fills them tells."""
    failed = [check for check in checks if not check.passed and not check.fatal and check.code != "gaps"]
    return tuple(Caution(f"{AUDITED}{check.code}", name, check.text) for check in failed)


def _refuse_holes(table: pd.DataFrame, reading: Reading) -> None:
    """A typical year cannot lose a part of itself."""
    faults = []
    for column in table.columns[table.isna().any()]:
        starts, lengths = runs(table[column].isna().to_numpy())
        longest = int(np.argmax(lengths))
        when = stamp(pd.DatetimeIndex(table.index)[int(starts[longest])])
        wrong = f"{column} lacks {lengths[longest] * reading.step_h:g} h from {when} (typical years are numbered 2001)"
        where = "[climate]" if column in ("temp_air", "wind_speed") else "a file"
        faults.append(Fault(reading.name, wrong, f"{where} that covers the gap; only up to 3 h are filled"))
    if faults:
        raise InputError(faults)


def _typical_cautions(reading: Reading) -> tuple[Caution, ...]:
    one = "One typical year hides the bad ones: generated years or a long record show how often it fails."
    cautions = [Caution("one-year", reading.name, one)]
    if reading.left_out:
        text = f"A typical year has 365 days: {reading.left_out} rows of 29 February were left out."
        cautions.append(Caution("leap-day", reading.name, text))
    return tuple(cautions)


def _place_cautions(reading: Reading, site: Site) -> tuple[Caution, ...]:
    there = reading.header
    if there is None or not site.weather.elsewhere:
        return ()
    text = (
        f"The weather and its sun are those of latitude {there.latitude:g}, longitude {there.longitude:g}, "
        f"{there.altitude_m:g} m, where the file was taken, not of the site."
    )
    return (Caution("elsewhere", reading.name, text),)
