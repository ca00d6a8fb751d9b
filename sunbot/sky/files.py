"""From the site file's ``[weather]`` to a reading: where the file is, of what kind, and whether it is of this place."""

from __future__ import annotations

from pathlib import Path

from ..errors import Fault, InputError
from ..inputs.site import Site, WeatherSource
from ..types import Place
from .own_csv import read_own_csv
from .readings import Reading
from .typical import read_epw, read_tmy2, read_tmy3

PACKAGED = "pvlib-data:"
LARGEST_BYTES = 1_000_000_000
NEAR_DEG, NEAR_M = 0.3, 300.0
"""A file from farther off (some 30 km), or as much higher (about 2 K colder), is of another place; ours."""

_TMY3_TITLES = b"Date (MM/DD/YYYY)"


def read_weather_file(site: Site) -> Reading:
    """The file that ``[weather]`` names, on a regular grid of UTC middles, not yet mended.

    Raises
    ------
    InputError
        The file is missing, empty, too large, of a kind we do not read, or of another place.
    """
    source = site.weather
    path, name = _find(site)
    reading = _read(path, name=name, source=source, time_zone=site.time_zone)
    if reading.header is not None and not source.elsewhere:
        _check_place(reading.header, site, name=name)
    return reading


def _find(site: Site) -> tuple[Path, str]:
    """Path of the weather file and what to call it; faults where it is missing, no file, empty or huge."""
    where = "site.toml: weather: file"
    file = site.weather.file or ""
    if file.startswith(PACKAGED):
        return _packaged(file, where=where), file
    path = Path(site.folder) / file
    if path.is_dir():
        raise InputError(Fault(where, f"{path} is a folder", "the path of a file"))
    if not path.exists():
        raise InputError(Fault(where, f"there is no file {path}", "a path relative to the site file"))
    size = path.stat().st_size
    if size == 0:
        raise InputError(Fault(file, "it is empty", "a weather file of at least one whole year"))
    if size > LARGEST_BYTES:
        wrong = f"it has {size / 1e9:.1f} GB, more than {LARGEST_BYTES / 1e9:.0f} GB can be read"
        raise InputError(Fault(file, wrong, "the years and columns that are needed, or a coarser step"))
    return path, file


def _packaged(file: str, *, where: str) -> Path:
    """A weather file inside the installed pvlib."""
    import pvlib

    folder = Path(pvlib.__file__).parent / "data"
    names = sorted(p.name for p in folder.iterdir() if p.suffix.lower() == ".tm2" or _is_tmy3(p))
    wanted = file.removeprefix(PACKAGED)
    if wanted not in names:
        choices = ", ".join(PACKAGED + name for name in names)
        raise InputError(Fault(where, f"{wanted!r} is no weather file of the installed pvlib", f"one of {choices}"))
    return folder / wanted


def _is_tmy3(path: Path) -> bool:
    """Whether the second line of a CSV is the title line of the TMY3 format."""
    if path.suffix.lower() != ".csv":
        return False
    with path.open("rb") as file:
        file.readline(10_000)
        return file.readline(10_000).startswith(_TMY3_TITLES)


def _read(path: Path, *, name: str, source: WeatherSource, time_zone: str) -> Reading:
    """By the kind of the file: its ending, and for CSV its title line."""
    kind = path.suffix.lower()
    shift_s = round(source.shift_minutes * 60)
    if kind == ".csv" and not _is_tmy3(path):
        return read_own_csv(path, name=name, label=source.label, stamps_in=source.stamps_in, shift_s=shift_s)
    readers = {".csv": read_tmy3, ".epw": read_epw, ".tm2": read_tmy2}
    if kind not in readers:
        wrong = f"files ending in {kind or 'nothing'} are not read"
        raise InputError(Fault("site.toml: weather: file", wrong, "an own .csv, an .epw, or a TMY3 .csv"))
    for key in ("label", "stamps_in"):
        if getattr(source, key) is not None:
            wrong = f"it is for own CSV files, and the stamps of {name} are known from its format"
            raise InputError(Fault(f"site.toml: weather: {key}", wrong, "shift_minutes where its clock is off"))
    return readers[kind](path, name=name, time_zone=time_zone, shift_s=shift_s)


def _check_place(there: Place, site: Site, *, name: str) -> None:
    """Refuse a file whose header names a place too far from the site."""
    east = abs((there.longitude - site.longitude + 180.0) % 360.0 - 180.0)
    away_deg = max(abs(there.latitude - site.latitude), east)
    away_m = abs(there.altitude_m - site.altitude_m)
    if away_deg <= NEAR_DEG + 1e-9 and away_m <= NEAR_M + 1e-9:
        return
    wrong = (
        f"its header names latitude {there.latitude:g}, longitude {there.longitude:g}, {there.altitude_m:g} m; "
        f"the site is at {site.latitude:g}, {site.longitude:g}, {site.altitude_m:g} m, "
        f"over {NEAR_DEG:g} degrees or {NEAR_M:.0f} m away"
    )
    remedy = (
        "the site's true position, a file of this place, or elsewhere = true under [weather] to use it all the same"
    )
    raise InputError(Fault(name, wrong, remedy))
