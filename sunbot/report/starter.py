"""Files to start from: a copy of an example deployment, or a commented site and robot file for a place."""

from __future__ import annotations

import difflib
import os
import textwrap
from collections.abc import Iterator, Mapping
from importlib import resources
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Any

from pydantic.fields import FieldInfo

from ..errors import Fault, InputError
from ..inputs import keys
from ..inputs.fields import Part
from ..inputs.robot import Robot
from ..inputs.site import Climate, Site
from ..types import Place
from ..writing import write_whole

SITE, ROBOT = "site.toml", "robot.toml"
COMMENT_COLUMN = 34
WIDTH = 110

STARTER_ROBOT: dict[str, Any] = {
    "name": "My robot",
    "site": SITE,
    "heading": "roams",
    "panel": [
        {
            "name": "deck",
            "watts": 40,
            "vmp_v": 18.0,
            "imp_a": 2.22,
            "voc_v": 21.8,
            "isc_a": 2.35,
            "tilt_deg": 10,
            "wire": {"length_m": 1.0, "area_mm2": 1.5},
        }
    ],
    "controller": {"kind": "mppt", "max_charge_a": 10, "max_input_v": 50},
    "battery": {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12},
    "rail": [
        {"name": "logic", "volts": 5.0, "kind": "step-down", "wire": {"length_m": 0.3, "area_mm2": 0.5}},
        {"name": "motors", "kind": "none", "wire": {"length_m": 0.5, "area_mm2": 1.5}},
    ],
    "load": [
        {"name": "computer", "rail": "logic", "watts": 1.0},
        {
            "name": "drive",
            "rail": "motors",
            "watts": 30,
            "peak_a": 8.0,
            "hours": [[9, 11.5], [14, 16]],
            "on_fraction": 0.2,
            "moves": True,
            "skip_below_soc": 0.5,
        },
    ],
}
"""An invented robot, to be replaced line by line."""


def example_names() -> list[str]:
    """Names of the example deployments that came with this sunbot."""
    home = _examples()
    return sorted(entry.name for entry in home.iterdir() if entry.is_dir() and (entry / ROBOT).is_file())


def _examples() -> Traversable:
    """The examples inside the installed package, or those of the checkout it runs from."""
    package = resources.files("sunbot")
    inside = package / "examples"
    return inside if inside.is_dir() else Path(str(package)).parent / "sites"


def copy_example(name: str, folder: str | Path) -> list[Path]:
    """Copy an example deployment into a folder, which is made if need be; returns the files written.

    Other files of the folder stay as they are, also where the example has one of the same name.

    Raises
    ------
    InputError
        There is no such example, or the folder holds a site or robot file already.
    """
    names = example_names()
    if name not in names:
        near = difflib.get_close_matches(name.lower(), names, n=1)
        raise InputError(
            Fault("--example", f"{name!r} is no example", f"one of {', '.join(near + sorted({*names} - {*near}))}")
        )
    files = {entry.name: entry.read_bytes() for entry in (_examples() / name).iterdir() if entry.is_file()}
    own = {SITE, ROBOT}
    return write_files(folder, {n: text for n, text in files.items() if n in own or not (Path(folder) / n).exists()})


def write_files(folder: str | Path, files: Mapping[str, str | bytes]) -> list[Path]:
    """Write files into a folder, all or none, each moved into place when it is complete.

    Raises
    ------
    InputError
        The folder holds one of them, a site or a robot file already, or cannot be written to.
    """
    folder = Path(folder)
    taken = [name for name in dict.fromkeys([SITE, ROBOT, *files]) if os.path.lexists(folder / name)]
    if taken:
        raise InputError(Fault(str(folder), f"holds {' and '.join(taken)} already", "a folder without, or a new one"))
    written: list[Path] = []
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, text in files.items():
            content = text.encode() if isinstance(text, str) else text
            write_whole(folder / name, lambda temporary, content=content: temporary.write_bytes(content))  # type: ignore[misc]
            written.append(folder / name)
    except (OSError, InputError) as error:
        for path in written:
            path.unlink()
        if isinstance(error, InputError):
            raise
        reason = (error.strerror or str(error)).lower()
        raise InputError(Fault(str(folder), f"cannot be made ({reason})", "a folder you may write to")) from None
    return written


def starter_files(
    place: Place, *, name: str, climate: Climate | None, provenance: str, weather_file: str | None = None
) -> dict[str, str]:
    """A fully commented site.toml and robot.toml for a place, by file name.

    Parameters
    ----------
    place :
        Where the robot will be.
    name :
        What people call the place.
    climate :
        Twelve monthly means; None leaves the table commented out.
    provenance :
        Where the numbers of the climate (or the place) come from and how good they are, in sentences.
    weather_file :
        Weather file to name as the source, as seen from the folder; None: the climate is the source.
    """
    said: dict[str, Any] = {
        "name": name,
        "latitude": place.latitude,
        "longitude": place.longitude,
        "altitude_m": place.altitude_m,
        "time_zone": place.time_zone,
        "weather": {"source": "climate"} if weather_file is None else {"source": "file", "file": weather_file},
    }
    if climate is not None:
        monthly = climate.model_dump(exclude_none=True)
        said["climate"] = {key: _shortest(value) for key, value in monthly.items()}
    notes = ["#", *_sentences(provenance)] if provenance else []
    site = [*_sentences(f"Where the robot works. {_HOW_TO_READ}"), *notes, "", *_table(Site, said)]
    robot = [*_sentences(f"An invented robot: put in yours. {_HOW_TO_READ}"), "", *_table(Robot, STARTER_ROBOT)]
    return {SITE: "\n".join(site) + "\n", ROBOT: "\n".join(robot) + "\n"}


def _shortest(value: Any) -> Any:
    """Twelve equal values as the one that stands for all."""
    return value[0] if isinstance(value, tuple) and len(set(value)) == 1 else value


_HOW_TO_READ = "A key behind a # shows its default, or an example where it has none; remove the # to set it."


def _sentences(text: str) -> list[str]:
    lines = [part for line in text.splitlines() for part in textwrap.wrap(line, WIDTH)]
    return [f"# {line}".rstrip() for line in lines]


def _table(model: type[Part], said: Mapping[str, Any], head: str = "", all_keys: bool = True) -> list[str]:
    """Lines of one table and of the tables in it: what is said, and with ``all_keys`` everything else commented out."""
    lines, tables = [head] if head else [], []
    for name, field in keys.keys_of(model).items():
        if name not in said and not all_keys:
            continue
        part = keys.part_in(field.annotation)
        if part is None or head or part is Site:
            lines += _key_lines(name, field, said, out=head.startswith("#"))
        else:
            tables += ["", *_tables(name, field, part, said.get(name))]
    return lines + tables


def _tables(name: str, field: FieldInfo, part: type[Part], said: Any) -> Iterator[str]:
    """The table, or the list of tables, under one key of the top of a file."""
    yield f"# {field.description}"
    if keys.is_list_of_parts(field):
        for position, one in enumerate(said or ()):
            yield from ([""] if position else []) + _table(part, one, f"[[{name}]]", all_keys=position == 0)
        if not said:
            yield from _table(part, {}, f"# [[{name}]]")
        return
    optional = said is None and field.default is None
    yield from _table(part, said or {}, f"{'# ' if optional else ''}[{name}]")


def _key_lines(name: str, field: FieldInfo, said: Mapping[str, Any], *, out: bool) -> list[str]:
    """One key with its comment beside it, or above it where the line is long; ``out``: commented out in any case."""
    usual, example = keys.default(field), keys.example(field)
    shown_usual = usual is not None and usual != []
    value = said.get(name, usual if shown_usual else example)
    comment = _comment(field)
    if name not in said and not field.is_required():
        mark = keys.note(field, "mark")
        if "default" not in comment:
            comment += "; default" if shown_usual else "; default none"
        comment += f", {mark}" if mark else ""
    hidden = name not in said and (out or not field.is_required())
    line = f"{'# ' if hidden else ''}{name} = {keys.toml(value)}"
    if len(line) >= COMMENT_COLUMN or len(comment) + COMMENT_COLUMN > WIDTH:
        return [*_sentences(comment), line]
    return [f"{line:<{COMMENT_COLUMN}}# {comment}"]


def _comment(field: FieldInfo) -> str:
    """What a key means, with its unit; of an inline table, what each of its keys means."""
    text = f"{field.description}" + (f" [{unit}]" if (unit := keys.note(field, "unit")) else "")
    part = keys.part_in(field.annotation)
    if part is None or part is Site:
        return text
    inner = "; ".join(f"{name}: {_comment(key)}" for name, key in keys.keys_of(part).items())
    return f"{text}. {inner}"
