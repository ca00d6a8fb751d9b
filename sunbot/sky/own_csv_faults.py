"""What keeps a user's own CSV from being read as a table: its bytes, its titles, its rows."""

from __future__ import annotations

import difflib
import re
from collections.abc import Iterator
from pathlib import Path

from ..errors import Fault, InputError
from .readings import COLUMNS

NO_TEXT = {
    b"PK\x03\x04": "a workbook of a spreadsheet program, or another archive, under the name of a CSV",
    b"\xd0\xcf\x11\xe0": "a workbook of a spreadsheet program under the name of a CSV",
    b"\x1f\x8b": "compressed",
}
"""By the first bytes. Published: the file format specifications (ZIP local header, compound file, RFC 1952)."""
UNITS = {"time": "ISO 8601", "temp_air": "degC", "wind_speed": "m/s"}
MEANT = {
    "time": ("timestamp", "datetime", "dateandtime", "date", "stamp", "timeutc", "utc", "localtime"),
    "ghi": ("ghi", "globalhorizontal", "global", "globalhorizontalirradiance", "globalirradiance", "globalradiation"),
    "dni": ("dni", "directnormal", "directnormalirradiance", "bni"),
    "dhi": ("dhi", "diffuse", "diffusehorizontal", "diffusehorizontalirradiance", "diffuseradiation"),
    "temp_air": (
        *("temperature", "temp", "airtemp", "airtemperature", "tempair", "tair", "tamb", "t2m"),
        *("ambient", "ambienttemp", "ambienttemperature", "drybulb", "outdoortemperature"),
    ),
    "wind_speed": ("wind", "windspeed", "ws", "meanwind", "windvelocity"),
}
"""What people write over a column in place of our title, as letters and digits; common practice."""
_UNIT_BEHIND = re.compile(r"[\[(].*$|[_ ](w|kw|wh|kwh)[_/ ]?m-?2?²?$|[_ ](deg_?c|celsius|c|°c|m_?/?s)$")


def refuse_no_text(path: Path, *, name: str) -> None:
    """Raise ``InputError`` for a file whose first bytes are those of a workbook or an archive."""
    with path.open("rb") as file:
        start = file.read(4)
    for signature, what in NO_TEXT.items():
        if start.startswith(signature):
            raise InputError(Fault(name, f"it is {what}", "the table saved as CSV in UTF-8, cells separated by commas"))


def titles_of(line: str, *, where: str) -> list[str]:
    """The titles of a CSV; raises ``InputError`` where they cannot be right."""
    titles = [title.strip().strip('"') for title in line.rstrip("\r\n").split(",")]
    for sign, word in ((";", "semicolons"), ("\t", "tabs")):
        if len(titles) == 1 and sign in titles[0]:
            wrong = f"its cells are separated by {word}"
            raise InputError(Fault(where, wrong, "cells separated by commas, and numbers with a decimal point"))
    twice = sorted({title for title in titles if title in ("time", *COLUMNS) and titles.count(title) > 1})
    faults = [Fault(where, f"{title} stands twice", "each column once") for title in twice]
    faults += [fault for title in ("time", *COLUMNS) if title not in titles for fault in _absent(title, titles, where)]
    if faults:
        raise InputError(faults)
    return titles


def _absent(title: str, titles: list[str], where: str) -> Iterator[Fault]:
    """A column that is missing, or would be passed over because it goes by another name."""
    found = next((other for other in titles if meant_by(other) == title), None)
    unit = UNITS.get(title, "W/m2")
    if title not in ("time", "ghi"):
        if found is not None:
            wrong = f"the column {found!r} is none we know, and would be passed over"
            yield Fault(where, wrong, f"{title} if it holds that in {unit}, or leave the column out")
        return
    unknown = [other.lower() for other in titles if other not in ("time", *COLUMNS) and meant_by(other) is None]
    near = [] if found else difflib.get_close_matches(title, unknown, n=1, cutoff=0.5)
    found = found or next((other for other in titles if near and other.lower() == near[0]), None)
    wrong = f"no column {title}" + (f" (there is {found!r})" if found else "")
    instead = f"a title line such as time,{','.join(COLUMNS)} (time and ghi are required)"
    yield Fault(where, wrong, f"{title} over it if it holds that in {unit}, in {instead}" if found else instead)


def meant_by(title: str) -> str | None:
    """The column a title stands for, if it is another word for one; units behind it do not matter."""
    bare = _UNIT_BEHIND.sub("", title.strip().lower())
    letters = "".join(sign for sign in bare if sign.isalnum())
    return next((column for column, words in MEANT.items() if letters in (column.replace("_", ""), *words)), None)


def ragged(message: str, *, titles: int, above: int, name: str) -> Fault:
    """Rows that do not fit the titles, from what the parser says; ``above``: lines before the first row."""
    instead = f"{titles} cells in each row, as many as titles, and numbers with a decimal point"
    if cells := re.search(r"in line (\d+), saw (\d+)", message):
        wrong = f"its rows cannot be read: {cells[2]} cells here, and {titles} titles"
        return Fault(f"{name}: line {int(cells[1]) + above}", wrong, instead)
    if opened := re.search(r"inside string starting at row (\d+)", message):
        wrong = "its rows cannot be read: a quotation mark is opened and never closed"
        return Fault(f"{name}: line {int(opened[1]) + 1 + above}", wrong, "quotation marks in pairs, or none")
    return Fault(f"{name}: line {above + 1}", f"its rows cannot be read: more cells than the {titles} titles", instead)
