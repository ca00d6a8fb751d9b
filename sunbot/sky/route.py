"""A route: the weather of every stop, each for its part of the year, joined into one."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..calendar import standard_clock
from ..errors import Fault, InputError
from ..inputs.site import Site, Stop
from ..inputs.site_checks import ROUTE_SOURCES
from ..types import BoolArray, Caution, Place
from .clear_sky import clear_sky_weather
from .climate import generated_weather
from .digest import table_digest
from .legs import legs_of, stop_on
from .stop_climate import climate_at, name_of
from .weather import Stay, Weather


def route_weather(site: Site, *, years: int, seed: int, skip: int = 0) -> Weather:
    """Weather above a robot on the site's route: each day of the year under the sky of the stop it is at.

    All stops draw the same days from the seed, so that a gloomy spell goes on from one stop to the next. Which climate
    each has: see ``climate_at``. A long track is taken in legs: see ``legs_of``.

    Raises
    ------
    InputError
        A source that is the weather of one place; no climate for a stop, or light that no sky gives.
    """
    if site.weather.source not in ROUTE_SOURCES:
        wrong = f'"{site.weather.source}" is the weather of one place, and the robot moves on'
        raise InputError(Fault("weather source", wrong, '"climate" or "clear-sky", or a site file without a route'))
    stops, cautions = legs_of(site.stops)
    whole = _weather_at(site, stops[0], years=years, seed=seed, skip=skip)
    clock = standard_clock(whole.ref_times, site.time_zone)
    stay = stop_on(stops, clock.month, clock.day_of_month)
    found = [*cautions, *whole.cautions]
    for number, stop in enumerate(stops[1:], start=1):
        here = _weather_at(site, stop, years=years, seed=seed, skip=skip)
        whole = _with_days_of(here, whole, rows=(stay == number)[whole.row])
        found += here.cautions
    return replace(
        whole,
        place=Place(site.latitude, site.longitude, site.altitude_m, site.time_zone),
        origin=_origin(site, len(stops), years=years, seed=seed, skip=skip),
        digest=table_digest(whole.table),
        cautions=_once_each(found),
        stays=tuple(
            Stay(Place(stop.latitude, stop.longitude, stop.altitude_m, site.time_zone), stop.horizon) for stop in stops
        ),
        stay=stay,
    )


def _weather_at(site: Site, stop: Stop, *, years: int, seed: int, skip: int) -> Weather:
    """Whole years of weather at one stop, its cautions and faults under its name."""
    name = name_of(stop)
    climate, cautions = climate_at(site, stop)
    update = {"latitude": stop.latitude, "longitude": stop.longitude, "altitude_m": stop.altitude_m}
    here = site.model_copy(update=update | {"name": name, "climate": climate, "stops": ()})
    try:
        if site.weather.source == "clear-sky":
            weather = clear_sky_weather(here)
        else:
            weather = generated_weather(here, years=years, seed=seed, skip=skip)
    except InputError as error:
        raise InputError(
            Fault(f"site.toml: {name}: {fault.where.removeprefix('site.toml: ')}", fault.wrong, fault.instead)
            for fault in error.faults
        ) from None
    return replace(weather, cautions=(*cautions, *weather.cautions))


def _with_days_of(here: Weather, whole: Weather, *, rows: BoolArray) -> Weather:
    """``whole`` with these rows taken from ``here``; both have the same times."""
    table = whole.table.copy()
    table.loc[rows] = here.table.loc[rows]
    snow = whole.snow_covered
    if snow is not None or here.snow_covered is not None:
        bare = np.zeros(len(table), dtype=bool)
        snow = np.where(rows, bare if here.snow_covered is None else here.snow_covered, bare if snow is None else snow)
    return replace(whole, table=table, snow_covered=snow)


def _origin(site: Site, n_stops: int, *, years: int, seed: int, skip: int) -> str:
    along = f"{site.name}, along {n_stops} stop{'s' * (n_stops != 1)}"
    if site.weather.source == "clear-sky":
        return f"clear sky of {along} (Ineichen & Perez)"
    return f"generated from the monthly climates of {along}: years {skip + 1} to {skip + years} of seed {seed}"


def _once_each(cautions: list[Caution]) -> tuple[Caution, ...]:
    """Cautions that say the same of several stops told once, with all their places."""
    places: dict[tuple[str, str], list[str]] = {}
    for caution in cautions:
        named = places.setdefault((caution.code, caution.text), [])
        if caution.where not in named:
            named.append(caution.where)
    return tuple(
        Caution(code, ", ".join(named[:4]) + (f" and {len(named) - 4} more" if len(named) > 4 else ""), text)
        for (code, text), named in places.items()
    )
