"""Site and robot files in, checked models out; every mistake of a file is reported at once."""

from __future__ import annotations

import copy
import stat
import tomllib
from collections.abc import Iterator
from pathlib import Path
from typing import Any, TypeVar

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from ..errors import Fault, InputError
from . import fields, keys
from .faults import Data, faults_of, independent, rank, unknown_key, value_at, where
from .fields import Part
from .robot import Robot
from .side_files import with_side_files
from .site import Site
from .toml_words import toml_words

MAX_BYTES = 1_000_000
"""A file written by hand stays far below this; anything larger is another file."""
TURNS = 5
"""How often a file is mended and looked at again, to find what the first mistakes hide."""
ANY_SITE = Site(name="any", latitude=0.0, longitude=0.0, time_zone="UTC")
"""Stands in for a site file that cannot be read, so that the robot file is still looked through."""

SITE_KEYS, ROBOT_KEYS = frozenset({"latitude", "longitude"}), frozenset({"battery", "load"})
"""Keys by which a file of one kind is known where the other was expected."""

AnyPart = TypeVar("AnyPart", bound=Part)


def load_site(path: str | Path) -> Site:
    """Read and check a site file.

    Raises
    ------
    InputError
        With every mistake of the file.
    """
    path = Path(path)
    data = _table_in(path)
    _refuse_other_kind(data, path, ROBOT_KEYS, is_a="robot file", not_a="site file")
    site, faults = _checked(Site, data, file=path.name)
    if site is None or faults:
        raise InputError(faults)
    folder = path.resolve().parent
    return with_side_files(site, folder, file=path.name).model_copy(update={"folder": str(folder)})


def site_of(said: Data, *, file: str) -> Site:
    """The site of keys that stand in no file yet; ``file`` is what messages call their home.

    Raises
    ------
    InputError
        With every mistake in them.
    """
    site, faults = _checked(Site, said, file=file)
    if site is None or faults:
        raise InputError(faults)
    return site


def load_robot(path: str | Path, *, site: str | Path | Site | None = None) -> Robot:
    """Read and check a robot file and the site file it names.

    Parameters
    ----------
    path :
        The robot file.
    site :
        A site, or the path of a site file (from the working folder), instead of the one the robot file names.

    Raises
    ------
    InputError
        With every mistake of both files.
    """
    path = Path(path)
    data = _table_in(path)
    _refuse_other_kind(data, path, SITE_KEYS, is_a="site file", not_a="robot file")
    found, site_faults = _site_for(data, path, site)
    robot, faults = _checked(Robot, {**data, "site": found or ANY_SITE}, file=path.name)
    if robot is None or faults or site_faults:
        raise InputError([*faults, *site_faults])
    return robot


def _site_for(data: Data, path: Path, site: str | Path | Site | None) -> tuple[Site | None, list[Fault]]:
    """The site of a robot file, or why there is none."""
    if isinstance(site, Site):
        return site, []
    spot = f"{path.name}: site"
    remedy = f'the path of the site file, seen from the folder of {path.name}, e.g. site = "site.toml"'
    if site is None:
        named = data.get("site")
        if not isinstance(named, str) or not named:
            wrong = "is missing" if named is None else "is empty" if named == "" else f"{keys.shown(named)} is no path"
            return None, [Fault(spot, wrong, remedy)]
        site = path.parent / named
        if not _exists(site):
            return None, [Fault(spot, f"{keys.shown(named)} leads to {site.resolve()}, where no file is", remedy)]
    try:
        return load_site(site), []
    except InputError as error:
        return None, list(error.faults)


def _refuse_other_kind(data: Data, path: Path, telling: frozenset[str], *, is_a: str, not_a: str) -> None:
    """One plain word where a site file is given for a robot file, or the other way round."""
    if telling <= data.keys():
        raise InputError(Fault(str(path), f"is a {is_a}, and a {not_a} is needed here", f"the path of the {not_a}"))


def _exists(path: Path) -> bool:
    try:
        return path.exists()
    except (OSError, ValueError):
        return False


def _table_in(path: Path) -> Data:
    """The TOML of a file; raises ``InputError`` for what is none."""
    text = _text_in(path)
    remedy = "lines like name = \"...\"; 'sunbot new FOLDER --example NAME' writes files to start from"
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise InputError(Fault(path.name, *toml_words(str(error), text))) from None
    except RecursionError:
        raise InputError(Fault(path.name, "holds lists or tables nested too deep to read", remedy)) from None
    except ValueError:  # whole numbers of thousands of digits
        raise InputError(Fault(path.name, "holds a number too long to read", "numbers of ordinary length")) from None
    if not data:
        raise InputError(Fault(path.name, "is empty" if not text.strip() else "holds no keys", remedy))
    return data


def _text_in(path: Path) -> str:
    """The text of an ordinary, not too large UTF-8 file."""
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            inside = sorted(entry.name for entry in path.glob("*.toml"))
            remedy = f"the path of a file in it: {', '.join(inside[:5])}" if inside else "the path of a .toml file"
            raise InputError(Fault(str(path), "is a folder", remedy))
        if not stat.S_ISREG(status.st_mode):
            raise InputError(Fault(str(path), "is no ordinary file", "the path of a .toml file"))
        if status.st_size > MAX_BYTES:
            wrong = f"is {status.st_size / 1e6:,.0f} MB large, and such a file has a few kB"
            raise InputError(Fault(str(path), wrong, "the path of the right file; weather goes into [weather] file"))
        return path.read_bytes().decode("utf-8-sig")
    except InputError:  # a ValueError too, and already in words
        raise
    except (FileNotFoundError, NotADirectoryError):
        raise InputError(Fault(str(path), "is not there", _near_files(path))) from None
    except UnicodeDecodeError as error:
        line = path.read_bytes()[: error.start].count(b"\n") + 1
        wrong = f"is not UTF-8 text (byte 0x{error.object[error.start]:02x} in line {line})"
        raise InputError(Fault(path.name, wrong, "plain text, saved by the editor as UTF-8")) from None
    except (OSError, ValueError) as error:
        reason = error.strerror.lower() if isinstance(error, OSError) and error.strerror else str(error)
        raise InputError(Fault(str(path), f"cannot be read ({reason})", "the path of a file you may read")) from None


def _near_files(path: Path) -> str:
    """The .toml files where one was looked for."""
    near = sorted(entry.name for entry in path.parent.glob("*.toml")) if path.parent.is_dir() else []
    if near:
        return f"the path of a file that is; in {path.parent} there is {', '.join(near[:8])}"
    return "the path of a file that is; 'sunbot new FOLDER --example NAME' makes one"


def _checked(model: type[AnyPart], data: Data, *, file: str) -> tuple[AnyPart | None, list[Fault]]:
    """The model made of a file's keys, and every mistake in them.

    What is wrong by itself is replaced by something sound and the file looked at again: so the mistakes that only
    several keys together show are found as well, unless they lean on a key that is wrong itself.
    """
    mended, faults = copy.deepcopy(data), list[tuple[fields.Path, Fault]]()
    touched: list[fields.Path] = []
    for path, owner in list(_model_names(model, data)):
        faults.append((path, Fault(where(file, data, path), *unknown_key(str(path[-1]), owner, model))))
        value_at(mended, path[:-1]).pop(path[-1])
    part: AnyPart | None = None
    for _ in range(TURNS):
        try:
            part = model.model_validate(mended, context=fields.COLLECTED_LATER)
            break
        except ValidationError as error:
            errors = independent(error.errors(include_url=False))
            faults += faults_of(errors, model=model, data=data, file=file) if not touched else []
            touched += _mend(mended, errors, model)
    for prefix, inner in _parts_in(part) if part is not None else ():
        for problem in inner.problems():
            judged = [prefix + path for path in (problem.at, *problem.judged)]
            if not any(_overlap(a, b) for a in judged for b in touched):
                faults.append((judged[0], Fault(where(file, data, judged[0]), problem.wrong, problem.instead)))
    faults.sort(key=lambda found: rank(data, found[0]))
    return (None if faults else part), [fault for _, fault in faults]


def _model_names(model: type[Part], data: Any, path: fields.Path = ()) -> Iterator[tuple[fields.Path, type[Part]]]:
    """Keys that only Python may use: names of fields whose key in the file is another, or none."""
    if isinstance(data, list):
        for position, item in enumerate(data):
            yield from _model_names(model, item, (*path, position))
    if not isinstance(data, dict):
        return
    known = keys.keys_of(model)
    yield from (((*path, name), model) for name in data if name in model.model_fields and name not in known)
    for name, part in keys.parts_of(model).items():
        if name in data:
            yield from _model_names(part, data[name], (*path, name))


def _mend(data: Data, errors: list[ErrorDetails], model: type[Part]) -> list[fields.Path]:
    """Replace what is wrong in ``data`` by something sound; returns the paths touched."""
    touched: list[fields.Path] = []
    for error in errors:
        path: fields.Path = error["loc"]
        while not isinstance(path[-1], str):
            path = path[:-1]
        home, name = value_at(data, path[:-1]), path[-1]
        _, field, _ = keys.field_at(model, path)
        touched.append(path)
        if not isinstance(home, dict):
            continue
        home.pop(name, None)
        if field is not None and field.is_required():
            home[str(name)] = copy.deepcopy(keys.example(field))
    return touched


def _parts_in(part: Part, path: fields.Path = ()) -> Iterator[tuple[fields.Path, Part]]:
    """A model and every model in it, with the path of the file that leads there; sites have their own file."""
    yield path, part
    for name, field in type(part).model_fields.items():
        value = getattr(part, name)
        inner = (*path, field.alias or name)
        if isinstance(value, Part) and not isinstance(value, Site):
            yield from _parts_in(value, inner)
        elif isinstance(value, tuple):
            for position, item in enumerate(value):
                if isinstance(item, Part):
                    yield from _parts_in(item, (*inner, position))


def _overlap(a: fields.Path, b: fields.Path) -> bool:
    """Whether one path leads to the other, or through it."""
    return a[: len(b)] == b[: len(a)]
