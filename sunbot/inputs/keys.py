"""What the models know about their own keys: the field at a path of the file, its limits, its example, its words."""

from __future__ import annotations

import json
import types
from collections.abc import Iterator
from datetime import date, datetime, time
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic.fields import FieldInfo

from .fields import Part, Path

LONGEST_SHOWN = 60


def keys_of(model: type[Part]) -> dict[str, FieldInfo]:
    """Fields by the key the file uses; without those that only the reader sets."""
    return {field.alias or name: field for name, field in model.model_fields.items() if not field.exclude}


def parts_of(model: type[Part]) -> dict[str, type[Part]]:
    """The tables of a model by key, those of lists of tables among them."""
    found = {name: part_in(field.annotation) for name, field in keys_of(model).items()}
    return {name: part for name, part in found.items() if part is not None}


def part_in(annotation: Any) -> type[Part] | None:
    """The model inside ``X``, ``X | None`` or ``tuple[X, ...]``; None where there is none."""
    if isinstance(annotation, type) and issubclass(annotation, Part):
        return annotation
    return next((part for inner in get_args(annotation) if (part := part_in(inner)) is not None), None)


def field_at(model: type[Part], path: Path) -> tuple[type[Part], FieldInfo | None, Path]:
    """The model and field a path leads to (None: no such key), and the list positions after its last key."""
    owner, field, rest = model, None, path
    inside: type[Part] | None = model
    for position, step in enumerate(path):
        if isinstance(step, str) and inside is not None:
            owner, field, rest = inside, keys_of(inside).get(step), path[position + 1 :]
            inside = part_in(field.annotation) if field is not None else None
    return owner, field, rest


def is_list_of_parts(field: FieldInfo) -> bool:
    """Whether the file writes it with double brackets."""
    return part_in(field.annotation) is not None and _bare(field.annotation)[0] is tuple


def is_twelve(field: FieldInfo) -> bool:
    """Whether it holds twelve monthly values."""
    return any(getattr(rule, "min_length", None) == 12 for rule in _rules(field.annotation, field.metadata))


def _bare(annotation: Any) -> tuple[Any, list[Any]]:
    """The type below ``Annotated`` and ``| None`` (of a tuple, its origin), and the rules met on the way."""
    rules: list[Any] = []
    while True:
        origin = get_origin(annotation)
        if origin is Annotated:
            annotation, *more = get_args(annotation)
            rules += more
        elif origin in (Union, types.UnionType):
            annotation = next(inner for inner in get_args(annotation) if inner is not type(None))
        else:
            return (origin or annotation), rules


def _items(annotation: Any) -> tuple[Any, ...]:
    """The types of a tuple's items, below ``Annotated`` and ``| None``."""
    while get_origin(annotation) is not tuple:
        inner = [a for a in get_args(annotation) if a is not type(None)]
        if not inner:
            return ()
        annotation = inner[0]
    return get_args(annotation)


def _rules(annotation: Any, metadata: list[Any]) -> Iterator[Any]:
    """Constraints on a value, those wrapped in pydantic's own fields opened."""
    for rule in [*metadata, *_bare(annotation)[1]]:
        yield from rule.metadata if isinstance(rule, FieldInfo) else [rule]


def _item_at(field: FieldInfo, positions: Path) -> tuple[Any, list[Any]]:
    """The type at list positions of a field, with the rules that stand beside it; None where there is no such item."""
    annotation, metadata = field.annotation, field.metadata
    for position in positions:
        items = _items(annotation)
        if not items:
            return None, []
        endless = items[-1] is Ellipsis
        annotation, metadata = items[0] if endless else items[min(int(position), len(items) - 1)], []
    return annotation, metadata


def limits(field: FieldInfo, positions: Path) -> dict[str, float]:
    """Bounds of the value at list positions of a field, under ``gt``, ``ge``, ``lt``, ``le``."""
    annotation, metadata = _item_at(field, positions)
    if annotation is None:
        return {}
    found: dict[str, float] = {}
    for rule in _rules(annotation, metadata):
        found |= {name: getattr(rule, name) for name in ("gt", "ge", "lt", "le") if hasattr(rule, name)}
    return found


def choices(field: FieldInfo, positions: Path = ()) -> tuple[str, ...]:
    """The words a key, or an item of its list at ``positions``, may be."""
    annotation, _ = _item_at(field, positions)
    while get_origin(annotation) is not Literal:
        inner = [a for a in get_args(annotation) if a not in (type(None), Ellipsis)]
        if not inner:
            return ()
        annotation = inner[0]
    return tuple(str(word) for word in get_args(annotation))


def kind_in_words(field: FieldInfo) -> str:
    """What may be written, e.g. ``a whole number``."""
    if is_twelve(field):
        return "one number for all months or a list of twelve, January first"
    if words := choices(field):
        listed = ", ".join(shown(word) for word in words)
        return f"a list out of {listed}" if _bare(field.annotation)[0] is tuple else f"one of {listed}"
    if part_in(field.annotation) is not None:
        return "a table"
    words_for = {
        float: "a number",
        int: "a whole number",
        bool: "true or false",
        str: "text in quotes",
        tuple: "a list",
    }
    return words_for[_bare(field.annotation)[0]]


def note(field: FieldInfo, name: str) -> Any:
    """``unit``, ``mark`` or ``example`` of a key; None where it has none."""
    extra = field.json_schema_extra
    return extra.get(name) or None if isinstance(extra, dict) else None


def example(field: FieldInfo) -> Any:
    """A value that would be right, as the file writes it; None where there is none."""
    extra = field.json_schema_extra
    given = extra.get("example") if isinstance(extra, dict) else None
    return given if given is not None else default(field)


def default(field: FieldInfo) -> Any:
    """The default as the file would write it; None where there is none, or no way to write it."""
    value = None if field.is_required() else field.default
    if isinstance(value, Part):
        return None
    if is_twelve(field) and value is not None and len(set(value)) == 1:
        return value[0]
    return list(value) if isinstance(value, tuple) else value


def shown(value: Any) -> str:
    """A value as TOML writes it, on one line and not too long."""
    text = toml(value) if not isinstance(value, dict) else "a table"
    return text if len(text) <= LONGEST_SHOWN else text[: LONGEST_SHOWN - 3] + "..."


def toml(value: Any) -> str:
    """A value in TOML on one line; raises ``TypeError`` for what TOML cannot hold."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
    if isinstance(value, (int, float)):
        return _number(value)
    if isinstance(value, (list, tuple)):
        return "[" + ", ".join(toml(item) for item in value) + "]"
    if isinstance(value, dict):
        return "{ " + ", ".join(f"{name} = {toml(item)}" for name, item in value.items()) + " }"
    if isinstance(value, (date, datetime, time)):
        return value.isoformat()
    raise TypeError(f"TOML has no way to write {type(value).__name__}")


def _number(value: float) -> str:
    try:
        return repr(value)
    except ValueError:  # Python refuses to print whole numbers of thousands of digits
        return "a number of thousands of digits"
