"""The site file: where the robot works, under which sky."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any, Literal

from . import site_checks
from .checks import month_and_day
from .fields import (
    FileName,
    Flag,
    Horizon,
    Named,
    Number,
    Part,
    Problem,
    Text,
    TwelveDays,
    TwelveFactors,
    TwelveLights,
    TwelveShares,
    TwelveTemperatures,
    TwelveWinds,
    Whole,
    key,
)
from .window import Terrain

MOST_STOPS = 400
"""One a day for a year, and a few."""
EXAMPLE_GHI = [1.1, 1.9, 3.1, 4.3, 5.2, 5.8, 5.9, 5.0, 3.7, 2.2, 1.2, 0.9]
EXAMPLE_MIN = [-3, -2, 1, 4, 8, 12, 14, 13, 10, 6, 1, -2]
EXAMPLE_MAX = [3, 5, 10, 14, 19, 22, 25, 24, 19, 14, 7, 4]


class WeatherSource(Part):
    """Where the weather comes from."""

    source: Literal["climate", "file", "clear-sky", "nasa-power"] = key(
        "climate", 'where the light comes from: "climate", "file", "clear-sky" or "nasa-power"'
    )
    file: FileName | None = key(
        None, "weather file, relative to this one; or pvlib-data:NAME", example="pvlib-data:723170TYA.CSV"
    )
    label: Literal["start", "middle", "end"] | None = key(
        None, "own CSV: which instant of its interval a stamp names: start, middle or end", example="end"
    )
    stamps_in: Named | None = key(
        None, "own CSV with stamps that carry no offset: UTC, an offset or a zone", example="+01:00"
    )
    shift_minutes: Number = key(
        0.0, "added to every stamp, to mend a clock that is off", unit="min", ge=-1440, le=1440, example=30
    )
    elsewhere: Flag = key(False, "true: use the file although its header names another place", example=True)
    scale: TwelveFactors = key((1.0,) * 12, "factor on all light; one value or twelve", example=0.9)
    first_year: Whole | None = key(None, "nasa-power: first year", ge=1980, le=2200, example=2004)
    last_year: Whole | None = key(None, "nasa-power: last year", ge=1980, le=2200, example=2023)

    def problems(self) -> Iterator[Problem]:
        yield from site_checks.weather_source(self)


class Climate(Part):
    """Twelve monthly means of the place."""

    ghi_kwh_m2_day: TwelveLights = key(
        ..., "mean daily light on the level by month, January first", unit="kWh/m2 a day", example=EXAMPLE_GHI
    )
    temp_min_c: TwelveTemperatures = key(..., "mean daily minimum temperature", unit="degC", example=EXAMPLE_MIN)
    temp_max_c: TwelveTemperatures = key(..., "mean daily maximum temperature", unit="degC", example=EXAMPLE_MAX)
    wind_m_s: TwelveWinds = key(
        (2.0,) * 12, "mean wind at the panel; one value or twelve", unit="m/s", mark="common practice", example=2.0
    )
    year_to_year: TwelveShares | None = key(
        None, "standard deviation of a month's mean light over its long-term mean; one value or twelve", example=0.15
    )
    coarse: Flag = key(False, "true: read off a coarse table of the world, a first look; every answer says so")

    def problems(self) -> Iterator[Problem]:
        yield from site_checks.climate(self)


class Stop(Part):
    """Where a robot on a route is from one day of the year on, until the next stop; the last one runs over New Year."""

    name: Named | None = key(None, "what people call it", example="North basin")
    start: Text = key(..., "first day there, MM-DD, of the site's clock", alias="from", example="03-15")
    latitude: Number = key(..., "north positive", unit="deg", ge=-90, le=90, example=47.3)
    longitude: Number = key(..., "east positive", unit="deg", ge=-180, le=180, example=8.1)
    altitude_m: Number = key(0.0, "above the sea", unit="m", ge=-450, le=9000, example=540)
    horizon: Horizon = key(
        (), "[azimuth from north, elevation] pairs, azimuths ascending", unit="deg", example=[[0, 5], [90, 12]]
    )
    climate: Climate | None = key(
        None,
        "its own twelve monthly means; left out, those of the site within 200 km, else a coarse table of the world",
        example={"ghi_kwh_m2_day": 3.2, "temp_min_c": 6, "temp_max_c": 14},
    )

    @property
    def first(self) -> tuple[int, int]:
        """Month and day of the first day."""
        return month_and_day(self.start)

    def problems(self) -> Iterator[Problem]:
        yield from site_checks.stop(self)


class Site(Part):
    """A place: position, clock, ground, horizon and weather."""

    name: Named = key(..., "what people call the place", example="Hill orchard")
    latitude: Number = key(..., "north positive", unit="deg", ge=-90, le=90, example=47.3)
    longitude: Number = key(..., "east positive", unit="deg", ge=-180, le=180, example=8.1)
    altitude_m: Number = key(0.0, "above the sea", unit="m", ge=-450, le=9000, example=540)
    time_zone: Named = key(..., "IANA name of the local clock", example="Europe/Zurich")
    albedo: TwelveShares = key(
        (0.20,) * 12,
        "share of light the ground throws back (grass 0.20, sand 0.40, snow 0.65); one value or twelve",
        mark="published: the surface table of pvlib",
        example=0.2,
    )
    horizon: Horizon = key(
        (),
        "[azimuth from north, elevation] pairs, azimuths ascending",
        unit="deg",
        example=[[0, 5], [90, 12], [180, 3], [270, 8]],
    )
    horizon_file: FileName | None = key(
        None, "instead of horizon: a CSV beside this file, with columns azimuth and elevation", example="horizon.csv"
    )
    snow_days: TwelveDays | None = key(
        None,
        "mean days a month on which panels flatter than 40 deg lie under snow; one value or twelve",
        example=[8, 6, 2, 0, 0, 0, 0, 0, 0, 0, 2, 6],
    )
    weather: WeatherSource = key(WeatherSource(), "where the weather comes from")
    climate: Climate | None = key(None, "twelve monthly means of the place")
    terrain: Terrain | None = key(None, "sloping ground, which tilts robot and panels together")
    stops: tuple[Stop, ...] = key(
        (),
        "a route through the year: sun, sky and horizon are those of the stop, clock and ground those of the site",
        alias="stop",
        max_length=MOST_STOPS,
        example=[{"from": "03-15", "latitude": 47.3, "longitude": 8.1}],
    )
    track: FileName | None = key(
        None,
        "instead of [[stop]]: a CSV beside this file, with columns date, latitude, longitude and, if known, altitude_m",
        example="track.csv",
    )
    folder: Text = key("", "set by the reader: the folder the site file stands in", exclude=True)

    def problems(self) -> Iterator[Problem]:
        yield from site_checks.site(self)

    def _said(self) -> tuple[Any, ...]:
        return tuple(getattr(self, name) for name in type(self).model_fields if name != "folder")

    # the same file in another folder, or on another machine, is the same site
    def __eq__(self, other: object) -> bool:
        return self._said() == other._said() if isinstance(other, Site) else NotImplemented

    def __hash__(self) -> int:
        return hash(self._said())
