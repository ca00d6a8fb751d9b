"""From what pydantic finds wrong to sentences that name the key and what to write instead."""

from __future__ import annotations

import difflib
from collections.abc import Callable, Iterator
from typing import Any

from pydantic.fields import FieldInfo
from pydantic_core import ErrorDetails

from ..errors import Fault
from ..types import MONTHS
from . import keys
from .chemistries import REST_VOLTAGES, chemistries_in_words, chemistry_meant
from .fields import Part, Path
from .monthly import of_twelve

Data = dict[str, Any]


def independent(errors: list[ErrorDetails]) -> list[ErrorDetails]:
    """The errors without those that only follow from another: pydantic counts only the sound items of a list."""
    return [
        error
        for error in errors
        if error["type"] != "too_short"
        or not any(len(e["loc"]) > len(error["loc"]) and e["loc"][: len(error["loc"])] == error["loc"] for e in errors)
    ]


def faults_of(errors: list[ErrorDetails], *, model: type[Part], data: Data, file: str) -> list[tuple[Path, Fault]]:
    """One fault for each mistake, with the path it stands at."""
    found: dict[tuple[Path, str], Fault] = {}
    for error, alike in _by_list(errors, model, data):
        path = _spot(error, model, data)
        wrong, instead = _words(error, path, model)
        if len(alike) > 1:
            path = path[:-1]
            wrong, instead = of_twelve(alike, wrong, instead, value_at(data, path))
        found.setdefault((path, wrong), Fault(where(file, data, path), wrong, instead))
    return [(path, fault) for (path, _), fault in found.items()]


def _by_list(
    errors: list[ErrorDetails], model: type[Part], data: Data
) -> Iterator[tuple[ErrorDetails, list[ErrorDetails]]]:
    """Each mistake once, with all that are alike in the same list of twelve months."""
    groups: dict[tuple[Path, str], list[ErrorDetails]] = {}
    for error in errors:
        path = _spot(error, model, data)
        _, field, _ = keys.field_at(model, path)
        monthly = field is not None and keys.is_twelve(field) and isinstance(path[-1], int)
        # a value above its bound and one below it are one mistake of the list
        kind = _BOUNDS if error["type"] in _BOUND_TYPES else error["type"]
        groups.setdefault((path[:-1] if monthly else (*path, len(groups)), kind), []).append(error)
    for alike in groups.values():
        yield alike[0], alike


def rank(data: Data, path: Path) -> tuple[int, ...]:
    """Sorts paths in the order of the file; what is missing comes last in its part."""
    order: list[int] = []
    for position, step in enumerate(path):
        home = value_at(data, path[:position])
        names = list(home) if isinstance(home, dict) else []
        order.append(step if isinstance(step, int) else names.index(step) if step in names else len(names))
    return tuple(order)


def _spot(error: ErrorDetails, model: type[Part], data: Data) -> Path:
    """The path to show: one number for twelve months is one mistake, a missing item is its list's."""
    path: Path = error["loc"]
    if error["type"] == "missing" and isinstance(path[-1], int):
        return path[:-1]
    _, field, rest = keys.field_at(model, path)
    if field is not None and rest and keys.is_twelve(field) and not isinstance(value_at(data, path[:-1]), list):
        return path[: -len(rest)]
    return path


def value_at(data: Any, path: Path) -> Any:
    """The value a path leads to; None where the file has none."""
    for step in path:
        try:
            data = data[step]
        except (KeyError, IndexError, TypeError):
            return None
    return data


def where(file: str, data: Data, path: Path) -> str:
    """File, part and key in words, e.g. ``robot.toml: panel 1 ("deck"): watts``."""
    words = [file]
    for position, step in enumerate(path):
        if isinstance(step, str):
            words.append(step)
            continue
        value = value_at(data, path[: position + 1])
        siblings = value_at(data, path[:position])
        if isinstance(value, dict):
            name = value.get("name")
            words[-1] += f" {step + 1}" + (f" ({keys.shown(name)})" if isinstance(name, str) and name else "")
        elif isinstance(siblings, list) and len(siblings) == 12 and not isinstance(value, list):
            words.append(f"value {step + 1} ({MONTHS[step]})")
        else:
            words.append(f"{'pair' if isinstance(value, list) and len(value) == 2 else 'value'} {step + 1}")
    return ": ".join(words)


def _words(error: ErrorDetails, path: Path, model: type[Part]) -> tuple[str, str]:
    """What is wrong and what to write instead."""
    owner, field, rest = keys.field_at(model, error["loc"])
    if error["type"] == "extra_forbidden" or field is None:
        return unknown_key(str(path[-1]), owner, model)
    name = next(str(step) for step in reversed(error["loc"]) if isinstance(step, str))
    wrong = _WRONG.get(error["type"], _other)(error, field, rest)
    return wrong, _hint(error, name, field, rest) or remedy(name, field, rest)


def unknown_key(name: str, owner: type[Part], model: type[Part]) -> tuple[str, str]:
    """An unknown key: the nearest known one, or the table it belongs to, then the choices."""
    known = list(keys.keys_of(owner))
    homes = [table for table, part in _tables(model) if name in keys.keys_of(part) and part is not owner]
    if homes and name not in known:
        homes = [home for home in homes if home] or ["the first lines, above every [table]"]
        return "is no key of this part", f"it under {' or '.join(homes)}; the keys here are {', '.join(known)}"
    near = difflib.get_close_matches(name.lower(), known, n=1, cutoff=0.5)
    choice = f"{near[0]}; the keys here are " if near else "one of "
    return "is no known key", choice + ", ".join(known)


def _tables(model: type[Part], prefix: str = "") -> Iterator[tuple[str, type[Part]]]:
    """Every table of a file with the head that opens it; the top of the file has none."""
    yield (f"[{prefix}]" if prefix else "", model)
    for name, part in keys.parts_of(model).items():
        if name == "site":
            continue  # in the robot file it is a path
        dotted = f"{prefix}.{name}" if prefix else name
        listed = keys.is_list_of_parts(keys.keys_of(model)[name])
        for head, inner in _tables(part, dotted):
            yield (f"[{head}]" if listed else head), inner


def remedy(name: str, field: FieldInfo, rest: Path = ()) -> str:
    """What may be written for a key, from its field: kind, range, unit, comment, example and default."""
    value, usual = keys.example(field), keys.default(field)
    if keys.is_list_of_parts(field):
        return f"[[{name}]] and its keys below ({field.description})"
    if keys.part_in(field.annotation) is not None and value is None:
        return f"[{name}] and its keys below ({field.description})"
    text = keys.kind_in_words(field)
    if keys.is_twelve(field):
        text += f", each{_range(keys.limits(field, (0,)))}"
    elif not text.startswith("a list"):
        text += _range(keys.limits(field, rest))
    if unit := keys.note(field, "unit"):
        text += f" in {unit}"
    text += f" ({field.description})"
    if value is not None and value != usual:
        text += f", e.g. {name} = {keys.toml(value)}"
    if usual is not None and usual != []:
        text += f"; left out it is {keys.shown(usual)}"
    return text


def _range(limits: dict[str, float]) -> str:
    low, high = limits.get("ge", limits.get("gt")), limits.get("le", limits.get("lt"))
    if low is None or high is None:
        return "" if low is None and high is None else f" from {low:g} up" if low is not None else f" up to {high:g}"
    return f" {'above' if 'gt' in limits else 'from'} {low:g} {'to below' if 'lt' in limits else 'to'} {high:g}"


def _out_of_range(error: ErrorDetails, field: FieldInfo, rest: Path) -> str:
    value, limits = error["input"], keys.limits(field, rest)
    low, high = limits.get("ge", limits.get("gt")), limits.get("le", limits.get("lt"))
    shown = keys.shown(value)
    if error["type"] == "greater_than":
        return f"{shown} is not above {low:g}"
    if error["type"] == "less_than":
        return f"{shown} is not below {high:g}"
    if "gt" in limits or "lt" in limits or low is None or high is None:
        return f"{shown} is above {high:g}" if error["type"] == "less_than_equal" else f"{shown} is below {low:g}"
    return f"{shown} is outside {low:g} to {high:g}"


def _number_of(error: ErrorDetails, field: FieldInfo, rest: Path) -> str:
    count = len(error["input"])
    if keys.is_twelve(field) and len(rest) == 0:
        return f"has {count} value{'s' * (count != 1)}, not 12"
    if error["type"] == "too_short":
        return "is an empty list"
    return f"has {count} values, at most {error['ctx']['max_length']} can be used"


def _other(error: ErrorDetails, field: FieldInfo, rest: Path) -> str:
    return f"{keys.shown(error['input'])} cannot be used ({error['msg'][0].lower()}{error['msg'][1:]})"


def _missing(error: ErrorDetails, field: FieldInfo, rest: Path) -> str:
    return f"{keys.shown(error['input'])} has too few values" if rest else "is missing"


def _table(error: ErrorDetails, field: FieldInfo, rest: Path) -> str:
    if keys.is_twelve(field):
        return f"{keys.shown(error['input'])} is neither a number nor a list"
    return "is a single table" if isinstance(error["input"], dict) else f"{keys.shown(error['input'])} is no list"


_BOUNDS = "out of bounds"
_BOUND_TYPES = ("greater_than", "greater_than_equal", "less_than", "less_than_equal")

_WRONG: dict[str, Callable[[ErrorDetails, FieldInfo, Path], str]] = {
    "missing": _missing,
    "greater_than": _out_of_range,
    "greater_than_equal": _out_of_range,
    "less_than": _out_of_range,
    "less_than_equal": _out_of_range,
    "too_short": _number_of,
    "too_long": _number_of,
    "float_type": lambda error, _f, _r: f"{keys.shown(error['input'])} is no number",
    "finite_number": lambda error, _f, _r: f"{keys.shown(error['input'])} is no finite number",
    "int_type": lambda error, _f, _r: f"{keys.shown(error['input'])} is no whole number",
    "bool_type": lambda error, _f, _r: f"{keys.shown(error['input'])} is neither true nor false",
    "string_type": lambda error, _f, _r: f"{keys.shown(error['input'])} is no text in quotes",
    "string_too_short": lambda _e, _f, _r: "is empty",
    "string_too_long": lambda error, _f, _r: f"is {len(error['input'])} letters long",
    "literal_error": lambda error, _f, _r: f"{keys.shown(error['input'])} is not one of the choices",
    "tuple_type": _table,
    "model_type": lambda error, _f, _r: f"{keys.shown(error['input'])} is no table",
}


def _hint(error: ErrorDetails, name: str, field: FieldInfo, rest: Path) -> str:
    """A remedy that takes up what was written; empty where the key's own remedy says more."""
    value = error["input"]
    if error["type"] in ("float_type", "int_type") and isinstance(value, str) and _is_number(value):
        return f"{value.strip()} without quotes"
    if error["type"] == "less_than_equal" and name == "length_m":
        return f"metres: {value / 1000:g} if these were millimetres"
    if error["type"] == "too_long" and keys.is_twelve(field) and len(value) == 24:
        return "twelve numbers with decimal points; these look like twelve with decimal commas"
    if error["type"] == "string_too_long":
        return f"at most {error['ctx']['max_length']} letters"
    if error["type"] == "literal_error" and name == "chemistry":
        return _chemistry(value)
    if error["type"] == "literal_error" and isinstance(value, str):
        words = keys.choices(field, rest)
        near = difflib.get_close_matches(value.lower(), words, n=1, cutoff=0.5)
        listed = ", ".join(keys.shown(word) for word in words)
        return f"{keys.shown(near[0])}; the choices are {listed}" if near else f"one of {listed}"
    return ""


def _chemistry(value: Any) -> str:
    """Never by spelling alone: "lipo" looks like lifepo4, which is charged otherwise, and a wrong guess can burn."""
    meant = chemistry_meant(value) if isinstance(value, str) else None
    if meant is None:
        return f"what is printed on the cells, one of {chemistries_in_words()}"
    cell_v = REST_VOLTAGES[meant].nominal_v
    return f"{keys.shown(meant)}, if these are {cell_v:.1f} V cells; the choices are {chemistries_in_words()}"


def _is_number(text: str) -> bool:
    try:
        return float(text) == float(text)
    except ValueError:
        return False
