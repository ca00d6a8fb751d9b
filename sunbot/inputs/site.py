"""The site file: where the robot works, under which sky."""

from __future__ import annotations

from typing import Literal

from .fields import Flag, Number, Part, Text, Twelve, Whole, key


class WeatherSource(Part):
    """Where the weather comes from."""

    source: Literal["climate", "file", "clear-sky", "nasa-power"] = key("climate", "where the weather comes from")
    file: Text | None = key(None, "weather file, relative to this one; or pvlib-data:NAME")
    label: Literal["start", "middle", "end"] | None = key(None, "own CSV: which instant of its interval a stamp names")
    stamps_in: Text | None = key(None, "own CSV with stamps that carry no offset: UTC, an offset or a zone")
    shift_minutes: Number = key(0.0, "added to every stamp, to mend a clock that is off", unit="min")
    elsewhere: Flag = key(False, "true: use the file although its header names another place")
    scale: Twelve = key((1.0,) * 12, "factor on all light; one value or twelve")
    first_year: Whole | None = key(None, "nasa-power: first year")
    last_year: Whole | None = key(None, "nasa-power: last year")


class Climate(Part):
    """Twelve monthly means of the place."""

    ghi_kwh_m2_day: Twelve = key(..., "mean daily light on the level by month", unit="kWh/m2")
    temp_min_c: Twelve = key(..., "mean daily minimum temperature", unit="degC")
    temp_max_c: Twelve = key(..., "mean daily maximum temperature", unit="degC")
    wind_m_s: Twelve = key((2.0,) * 12, "mean wind at the panel", unit="m/s")
    year_to_year: Twelve | None = key(None, "standard deviation of a month's mean light over its long-term mean")


class Site(Part):
    """A place: position, clock, ground, horizon and weather."""

    name: Text = key(..., "what people call the place")
    latitude: Number = key(..., "north positive", unit="deg", ge=-90, le=90)
    longitude: Number = key(..., "east positive", unit="deg", ge=-180, le=180)
    altitude_m: Number = key(0.0, "above the sea", unit="m", ge=-450, le=9000)
    time_zone: Text = key(..., "IANA name of the local clock")
    albedo: Twelve = key((0.20,) * 12, "share of light the ground throws back; one value or twelve")
    horizon: tuple[tuple[Number, Number], ...] = key((), "[azimuth from north, elevation] pairs", unit="deg")
    snow_days: Twelve | None = key(None, "mean days a month on which panels flatter than 40 deg lie under snow")
    weather: WeatherSource = key(WeatherSource(), "where the weather comes from")
    climate: Climate | None = key(None, "twelve monthly means of the place")
    folder: Text = key("", "set by the reader: the folder the site file stands in")
