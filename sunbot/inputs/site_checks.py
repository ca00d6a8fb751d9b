"""What several keys of a site file must hold together."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator
from datetime import datetime
from itertools import pairwise
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError, available_timezones

from .checks import MONTHS, day_of_year, in_words
from .fields import Problem

if TYPE_CHECKING:
    from .site import Climate, Site, Stop, WeatherSource

ROUTE_SOURCES = ("climate", "clear-sky")
"""Weather that can be had for every stop of a route."""
CLOCK_FROM_SUN_H = 5.0
"""No inhabited place keeps a clock this far from the sun; common practice: western China is 3 h off."""


def site(site: Site) -> Iterator[Problem]:
    """Time zone, its fit to the longitude, and the order of the horizon."""
    zone = _zone(site.time_zone)
    if zone is None:
        yield Problem(("time_zone",), f'"{site.time_zone}" is no time zone', _zone_remedy(site.time_zone))
    elif not site.time_zone.startswith(("UTC", "Etc/", "GMT", "Antarctica/")):
        offset = zone.utcoffset(datetime(2018, 1, 15))
        clock_h = offset.total_seconds() / 3600 if offset is not None else 0.0
        if abs((clock_h - site.longitude / 15 + 12) % 24 - 12) > CLOCK_FROM_SUN_H:
            yield Problem(
                ("longitude",),
                f"{site.longitude:g} does not fit the clock of {site.time_zone}, which belongs near {15 * clock_h:g}",
                "degrees east as positive and degrees west as negative, or the zone of the place",
                judged=(("time_zone",),),
            )
    yield from _horizon(site.horizon)
    for name, file, given in (
        ("horizon_file", site.horizon_file, site.horizon),
        ("track", site.track, site.stops),
    ):
        key = {"horizon_file": "horizon", "track": "stop"}[name]
        if file is not None and given:
            yield Problem((name,), f"stands beside {key}, and both say the same thing", "one of the two", ((key,),))
    yield from _route(site)


def _horizon(horizon: tuple[tuple[float, float], ...]) -> Iterator[Problem]:
    if any(b <= a for (a, _), (b, _) in pairwise(horizon)):
        pairs = sorted(dict(horizon).items())
        yield Problem(("horizon",), "its azimuths do not rise", f"horizon = {in_words(pairs)}")


def _route(site: Site) -> Iterator[Problem]:
    """Stops in the order of the year, under weather that can be had for any place."""
    for number, (one, other) in enumerate(pairwise(site.stops), start=1):
        if (0, 0) not in (one.first, other.first) and other.first <= one.first:
            wrong = f'"{other.start}" does not come after "{one.start}" of the stop before'
            dates = ", ".join(sorted({stop.start for stop in site.stops})[:6])
            remedy = f"the stops in the order of the year, each with a day of its own: {dates}"
            yield Problem(("stop", number, "from"), wrong, remedy, (("stop", number - 1, "from"),))
    if (site.stops or site.track) and site.weather.source not in ROUTE_SOURCES:
        wrong = f'"{site.weather.source}" is the weather of one place, and the robot moves on'
        remedy = 'source = "climate" (with [stop.climate] where you have one) or "clear-sky"'
        yield Problem(("weather", "source"), wrong, remedy, (("stop",), ("track",)))


def stop(stop: Stop) -> Iterator[Problem]:
    """Its day exists in every year, its horizon runs round."""
    yield from day_of_year("from", stop.start)
    yield from _horizon(stop.horizon)


def _zone(name: str) -> ZoneInfo | None:
    # names that follow the machine rather than the place
    if name in {"localtime", "posixrules", "Factory"}:
        return None
    try:
        return ZoneInfo(name)
    except (ZoneInfoNotFoundError, ValueError, OSError):
        return None


def _zone_remedy(name: str) -> str:
    known = sorted(available_timezones())
    wanted = name.strip().lower().replace(" ", "_")
    city = [zone for zone in known if wanted and wanted in {zone.lower(), zone.lower().rsplit("/", 1)[-1]}]
    by_lower = {zone.lower(): zone for zone in known}
    near = city or [by_lower[match] for match in difflib.get_close_matches(wanted, by_lower, n=2, cutoff=0.75)]
    names = " or ".join(f'"{zone}"' for zone in near[:3]) or 'a name such as "Europe/Zurich" or "UTC"'
    return f"the IANA name of the place's clock: {names}"


def weather_source(weather: WeatherSource) -> Iterator[Problem]:
    """Each source has the keys it needs."""
    named = "source" in weather.model_fields_set
    if weather.source == "file" and weather.file is None:
        yield Problem(
            ("file",), 'is missing; source "file" needs it', 'e.g. file = "tower-2019-2023.csv"', (("source",),)
        )
    if not named and weather.file is not None:
        yield Problem(("source",), f'is missing although file is "{weather.file}"', 'source = "file"', (("file",),))
    if weather.source == "nasa-power":
        for name in ("first_year", "last_year"):
            if getattr(weather, name) is None:
                yield Problem(
                    (name,), 'is missing; source "nasa-power" needs it', f"e.g. {name} = 2010", (("source",),)
                )
    first, last = weather.first_year, weather.last_year
    if first is not None and last is not None and first > last:
        wrong = f"{last} is before first_year = {first}"
        yield Problem(("last_year",), wrong, f"first_year = {last} and last_year = {first}", (("first_year",),))
    if weather.stamps_in is not None and not _is_clock(weather.stamps_in):
        wrong = f'"{weather.stamps_in}" is no clock'
        yield Problem(("stamps_in",), wrong, 'stamps_in = "UTC", an offset such as "+01:00", or an IANA zone name')


def _is_clock(name: str) -> bool:
    return re.fullmatch(r"[+-](0\d|1[0-4]):[0-5]\d", name) is not None or _zone(name) is not None


def climate(climate: Climate) -> Iterator[Problem]:
    """The minimum of a month is below its maximum, and some month has light."""
    swapped = [m for m, (a, b) in enumerate(zip(climate.temp_min_c, climate.temp_max_c, strict=True)) if a > b]
    if swapped:
        months = "every month" if len(swapped) == 12 else ", ".join(MONTHS[month] for month in swapped)
        yield Problem(
            ("temp_min_c",),
            f"is above temp_max_c in {months}",
            "the mean daily minimum here and the maximum in temp_max_c; they seem swapped",
            judged=(("temp_max_c",),),
        )
    if not any(climate.ghi_kwh_m2_day):
        yield Problem(("ghi_kwh_m2_day",), "has no light in any month", "the mean daily kWh/m2 of each month")
