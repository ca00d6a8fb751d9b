"""Starts for `new`: where a place's first climate comes from, and the files that say so."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from ..errors import Fault, InputError
from ..types import Place
from .starter import starter_files


@dataclass(frozen=True)
class Start:
    """What the user said of the place; None: to be worked out."""

    latitude: float | None
    longitude: float | None
    name: str | None
    time_zone: str | None
    altitude_m: float | None
    from_weather: str | None


OPTIONS = {
    "name": "--name",
    "latitude": "--lat",
    "longitude": "--lon",
    "altitude_m": "--altitude-m",
    "time_zone": "--time-zone",
}
"""Which option says a key of the site."""


def files_of(start: Start, *, notes: Callable[[str], None]) -> dict[str, str]:
    """A commented site and robot file for a place, by file name; ``notes`` is told what was assumed.

    Raises
    ------
    InputError
        Neither a place nor weather is named, there is no data for the place, or the weather cannot be used.
    """
    _refuse_early(start)
    if start.from_weather is not None:
        return _from_weather(start, start.from_weather, notes=notes)
    if (start.latitude is None) != (start.longitude is None):
        there, missing = ("--lon", "--lat") if start.latitude is None else ("--lat", "--lon")
        raise InputError(Fault(f"sunbot new: {missing}", f"is missing beside {there}", "both, in degrees"))
    if start.latitude is None or start.longitude is None:
        raise InputError(
            Fault(
                "sunbot new",
                "no start is named",
                "--lat and --lon of the place, --from-weather FILE, or --example NAME",
            )
        )
    return _from_world(start, start.latitude, start.longitude, notes=notes)


def refuse_beside_example(start: Start) -> None:
    """Raise ``InputError`` where anything is said of a place although an example is copied as it is."""
    said = {OPTIONS.get(name, "--from-weather"): value for name, value in vars(start).items()}
    given = [option for option, value in said.items() if value is not None]
    if given:
        wrong = "copies an example as it is, and has no use for " + ", ".join(given)
        raise InputError(Fault("sunbot new: --example", wrong, "one or the other"))


def _refuse_early(start: Start) -> None:
    """Raise ``InputError`` for what is wrong before the place is known."""
    from ..inputs.site_checks import is_zone

    said = {key: value for key in OPTIONS if (value := getattr(start, key)) is not None}
    if "longitude" not in said and is_zone(said.get("time_zone", "UTC")):
        said.pop("time_zone", None)  # whether it fits is told when the longitude is known
    _refuse(said)


def _refuse(said: dict[str, object]) -> None:
    """Raise ``InputError`` where a site file that says this would be refused, in the words of the options."""
    from ..inputs.reading import site_of

    any_site = {"name": "any", "latitude": 0.0, "longitude": 0.0, "time_zone": "UTC"}
    try:
        site_of(any_site | said, file="sunbot new")
    except InputError as error:
        raise InputError([_by_option(fault) for fault in error.faults]) from None


def _by_option(fault: Fault) -> Fault:
    """A fault of a key as one of the option that says it."""
    key = fault.where.rsplit(": ", 1)[-1]
    option = OPTIONS.get(key, key)
    instead = fault.instead.split("; left out it is ")[0]  # here what is left out is worked out
    return Fault(f"sunbot new: {option}", fault.wrong, instead.replace(f"{key} = ", f"{option} "))


def _from_world(start: Start, latitude: float, longitude: float, *, notes: Callable[[str], None]) -> dict[str, str]:
    from ..inputs.site import Climate
    from ..sky.world import first_climate

    found = first_climate(latitude, longitude)
    place = _place(start, latitude, longitude, altitude_m=found.altitude_m, notes=notes)
    climate = Climate(
        ghi_kwh_m2_day=found.ghi_kwh_m2_day, temp_min_c=found.temp_min_c, temp_max_c=found.temp_max_c, coarse=True
    )
    return starter_files(
        place,
        name=start.name or f"Place at {latitude:.3f}, {longitude:.3f}",
        climate=climate,
        provenance=f"Light and air: {found.source}.\nHow good: {found.uncertainty}.",
    )


def _from_weather(start: Start, source: str, *, notes: Callable[[str], None]) -> dict[str, str]:
    from ..inputs.site import Site, WeatherSource
    from ..sky.climate_of_record import climate_from_record
    from ..sky.files import read_weather_file
    from ..sky.source import weather_of

    shipped = source.startswith("pvlib-data:")
    file = source if shipped else str(Path(source).resolve())
    weather_source = WeatherSource(source="file", file=file)
    latitude, longitude = start.latitude, start.longitude
    # A copy with changes: whether the clock fits is told when the longitude is known.
    probe = Site(name="probe", latitude=0.0, longitude=0.0, time_zone="UTC").model_copy(
        update={
            "latitude": 0.0 if latitude is None else latitude,
            "longitude": 0.0 if longitude is None else longitude,
            "altitude_m": start.altitude_m or 0.0,
            "time_zone": start.time_zone or "UTC",
            "weather": weather_source.model_copy(update={"elsewhere": True}),
        }
    )
    try:
        reading = read_weather_file(probe)
    except InputError as error:
        raise InputError([_of_weather(fault, source) for fault in error.faults]) from None
    if (latitude is None or longitude is None) and reading.header is None:
        raise InputError(
            Fault(f"--from-weather {source}", "does not say where it was taken", "--lat and --lon as well")
        )
    header = reading.header
    latitude = latitude if latitude is not None else (header.latitude if header else 0.0)
    longitude = longitude if longitude is not None else (header.longitude if header else 0.0)
    altitude_m = start.altitude_m if start.altitude_m is not None else (header.altitude_m if header else None)
    place = _place(start, latitude, longitude, altitude_m=altitude_m, notes=notes)
    site = probe.model_copy(
        update={
            "latitude": place.latitude,
            "longitude": place.longitude,
            "altitude_m": place.altitude_m,
            "time_zone": place.time_zone,
            "weather": weather_source,
        }
    )
    weather = weather_of(reading, site, years=500)
    return starter_files(
        place,
        name=start.name or f"Place at {place.latitude:.3f}, {place.longitude:.3f}",
        climate=climate_from_record(weather, site),
        provenance=(
            f"The climate is the monthly means of {weather.origin}. Years are generated from them; to judge on the "
            f'file itself, set source = "file" and file = "{source}".'
        ),
    )


def _of_weather(fault: Fault, source: str) -> Fault:
    """A fault of the site file's table of weather, which does not exist yet, as one of the option."""
    if not fault.where.startswith("site.toml: weather"):
        return fault
    where = f"sunbot new: --from-weather {source}"
    if fault.where.endswith(": file"):
        return Fault(where, fault.wrong, "the path of a file that is there, or pvlib-data:NAME")
    wrong = f"is a table of your own, of which a site file must say {fault.where.rsplit(': ', 1)[-1]}"
    remedy = '--lat and --lon instead, and then [weather] with source = "file", file, label in the new site.toml'
    return Fault(where, wrong, remedy)


def _place(
    start: Start, latitude: float, longitude: float, *, altitude_m: float | None, notes: Callable[[str], None]
) -> Place:
    from ..sky.world import suggested_zone

    zone = start.time_zone
    if zone is None:
        zone = suggested_zone(longitude)
        notes(f"time zone {zone} taken from the longitude, without daylight saving; --time-zone names the real one")
    height_m = start.altitude_m if start.altitude_m is not None else altitude_m
    if start.altitude_m is None and height_m is not None:
        notes(f"altitude {height_m:.0f} m taken from the map or the file; --altitude-m mends it")
    place = Place(latitude, longitude, round(height_m or 0.0), zone)
    _refuse(vars(place))
    return place
