"""What several keys of a site file must hold together."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator
from datetime import datetime
from itertools import pairwise
from typing import TYPE_CHECKING
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError, available_timezones

from ..types import MONTHS
from .checks import day_of_year, in_words
from .fields import Problem

if TYPE_CHECKING:
    from .site import Climate, Site, Stop, WeatherSource

ROUTE_SOURCES = ("climate", "clear-sky")
"""Weather that can be had for every stop of a route."""
CLOCK_FROM_SUN_H = 5.0
"""No inhabited place keeps a clock this far from the sun; common practice: western China is 3 h off."""
CLOCK_BEHIND_SUN_H, CLOCK_AHEAD_OF_SUN_H, CLOCK_AHEAD_IF_SWAPPED_H = 1.25, 3.5, 2.0
"""For a fixed offset, which is easily given with the wrong sign; common practice: clocks lag the sun by an hour at most
and lead it by up to three, by over two only in western China and in the summer of western Spain."""


def site(site: Site) -> Iterator[Problem]:
    """Time zone, its fit to the longitude, and the order of the horizon."""
    yield from _clock(site.time_zone, site.longitude)
    yield from _horizon(site.horizon)
    for name, file, given in (
        ("horizon_file", site.horizon_file, site.horizon),
        ("track", site.track, site.stops),
    ):
        key = {"horizon_file": "horizon", "track": "stop"}[name]
        if file is not None and given:
            yield Problem((name,), f"stands beside {key}, and both say the same thing", "one of the two", ((key,),))
    yield from _route(site)


def _clock(name: str, longitude: float) -> Iterator[Problem]:
    """A zone that exists and is of the place."""
    zone = _zone(name)
    if zone is None:
        yield Problem(("time_zone",), f'"{name}" is no time zone', _zone_remedy(name))
        return
    offset = zone.utcoffset(datetime(2018, 1, 15))
    clock_h = offset.total_seconds() / 3600 if offset is not None else 0.0
    ahead_h = (clock_h - longitude / 15 + 12) % 24 - 12
    if name.startswith("Etc/") and clock_h:
        yield from _fixed_clock(name, longitude, clock_h=clock_h, ahead_h=ahead_h)
    elif not name.startswith(("UTC", "Etc/", "GMT", "Antarctica/")) and abs(ahead_h) > CLOCK_FROM_SUN_H:
        yield Problem(
            ("longitude",),
            f"{longitude:g} does not fit the clock of {name}, which belongs near {15 * clock_h:g}",
            "degrees east as positive and degrees west as negative, or the zone of the place",
            judged=(("time_zone",),),
        )


def _fixed_clock(name: str, longitude: float, *, clock_h: float, ahead_h: float) -> Iterator[Problem]:
    """A zone of fixed offset far from the sun of the place, as one with the sign mistaken is."""
    swapped_h = abs((-clock_h - longitude / 15 + 12) % 24 - 12)
    mistaken = ahead_h > CLOCK_AHEAD_IF_SWAPPED_H and swapped_h < 1.0
    if -CLOCK_BEHIND_SUN_H <= ahead_h <= CLOCK_AHEAD_OF_SUN_H and not mistaken:
        return
    side = "ahead of" if clock_h > 0 else "behind"
    wrong = f'"{name}" is {abs(clock_h):g} h {side} UTC (in these names the signs are the other way round), and the sun'
    wrong += f" at longitude {longitude:g} is {abs(ahead_h):.1f} h {'behind' if ahead_h > 0 else 'ahead of'} that clock"
    yield Problem(("time_zone",), wrong, f'"{etc_zone(round(longitude / 15))}", or the IANA name', (("longitude",),))


def etc_zone(hours: int) -> str:
    """The zone of whole hours ahead of UTC; these names count west of Greenwich."""
    return "Etc/GMT" if hours == 0 else f"Etc/GMT{-hours:+d}"


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


def is_zone(name: str) -> bool:
    """Whether there is a time zone of this name."""
    return _zone(name) is not None


def _zone_remedy(name: str) -> str:
    offset = re.fullmatch(r"[A-Za-z]{0,4}\s*([+-])\s*0?(\d\d?)(?::?00)?", name.strip())
    if offset and -12 <= (hours := int(offset[1] + offset[2])) <= 14:
        return (
            f'"{etc_zone(hours)}" for a clock {abs(hours)} h {"behind" if hours < 0 else "ahead of"} UTC all year '
            '(in these names the signs are the other way round), or the IANA name of the place, e.g. "Europe/Zurich"'
        )
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
    if named and weather.source != "file" and weather.file is not None:
        wrong = f'is "{weather.source}", and file = "{weather.file}" would not be read'
        yield Problem(("source",), wrong, f'source = "file", or no file beside "{weather.source}"', (("file",),))
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
