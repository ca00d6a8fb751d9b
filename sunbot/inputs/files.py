"""Which files a question is read from, so that none of them is overwritten by its answer."""

from __future__ import annotations

import tomllib
from pathlib import Path
from typing import Any

from .override import SHIPPED, SOURCES


def files_behind(path: Path, *, site: Path | None = None, weather: str | None = None) -> list[Path]:
    """Paths of a robot or site file and of everything it names: site, weather, horizon and track.

    Parameters
    ----------
    path :
        A robot or a site file that could be read.
    site :
        The site file given in place of the one the robot file names.
    weather :
        The source of weather given in place of the site's own.
    """
    found = [path]
    said = _said_in(path)
    if site is None and isinstance(said.get("site"), str):
        site = path.parent / said["site"]
    if site is not None:
        found.append(site)
        said = _said_in(site)
    table = said.get("weather")
    named = [said.get("horizon_file"), said.get("track"), table.get("file") if isinstance(table, dict) else None]
    found += [found[-1].resolve().parent / name for name in named if isinstance(name, str)]
    if weather is not None and weather not in SOURCES and not weather.startswith(SHIPPED):
        found.append(Path(weather))
    return found


def _said_in(path: Path) -> dict[str, Any]:
    return tomllib.loads(path.read_bytes().decode("utf-8-sig"))
