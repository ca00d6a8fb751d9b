"""A site with another source of weather than its file names."""

from __future__ import annotations

from pathlib import Path

from ..errors import Fault, InputError
from .site import Site, WeatherSource

SOURCES = ("climate", "clear-sky", "nasa-power")
SHIPPED = "pvlib-data:"


def site_with_weather(site: Site, source: str) -> Site:
    """``site`` under the sky that ``source`` names: climate, clear-sky, nasa-power, pvlib-data:NAME or a file.

    A file is taken relative to the working directory; keys that say how to read it (label, stamps_in ...) stay those
    of the site file.

    Raises
    ------
    InputError
        ``source`` is neither a source nor a file that exists.
    """
    if source in SOURCES:
        return _with(site, {"source": source, "file": None})
    if source.startswith(SHIPPED):
        return _with(site, {"source": "file", "file": source})
    path = Path(source)
    if not path.is_file():
        choices = ", ".join(SOURCES)
        raise InputError(
            Fault(f"--weather {source}", "is no file", f"one of {choices}, pvlib-data:NAME, or a file that exists")
        )
    return _with(site, {"source": "file", "file": str(path.resolve())})


def _with(site: Site, update: dict[str, str | None]) -> Site:
    weather: WeatherSource = site.weather.model_copy(update=update)
    return site.model_copy(update={"weather": weather})
