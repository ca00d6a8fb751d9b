"""JSON Schema of the two files, so that editors complete and check them."""

from __future__ import annotations

from typing import Any, Literal

from .fields import Part
from .robot import Robot
from .site import Site

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def schema_of(which: Literal["robot", "site"]) -> dict[str, Any]:
    """JSON Schema of the robot file or the site file, with comment, unit, default and example of every key.

    Raises
    ------
    ValueError
        ``which`` is neither.
    """
    models: dict[str, type[Part]] = {"robot": Robot, "site": Site}
    if which not in models:
        raise ValueError(f"{which!r} has no schema; there are 'robot' and 'site'")
    schema = models[which].model_json_schema(by_alias=True)
    schema["properties"].pop("folder", None)
    if which == "robot":
        about = Robot.model_fields["site"].description
        schema["properties"]["site"] = {"type": "string", "description": about, "examples": ["site.toml"]}
        _drop_unused(schema)
    return {"$schema": DIALECT, **_tidy(schema)}


def _drop_unused(schema: dict[str, Any]) -> None:
    """Forget the parts that only the site file has."""
    while unused := [name for name in schema["$defs"] if f"'#/$defs/{name}'" not in str({**schema, "title": ""})]:
        for name in unused:
            del schema["$defs"][name]


def _tidy(node: Any) -> Any:
    """As editors want it: no made-up titles, no null (TOML has none), units in the description, one or twelve."""
    if isinstance(node, list):
        return [_tidy(item) for item in node]
    if not isinstance(node, dict):
        return node
    node = {name: _tidy(value) for name, value in node.items() if not (name == "title" and isinstance(value, str))}
    options = [option for option in node.pop("anyOf", []) if option != {"type": "null"}]
    node |= options[0] if len(options) == 1 else {"anyOf": options} if options else {}
    for only in node.pop("allOf", []):  # older pydantic wraps a lone reference
        node |= only
    unit, mark, example = node.pop("unit", ""), node.pop("mark", ""), node.pop("example", None)
    if node.get("default", ...) is None or isinstance(node.get("default"), dict):
        del node["default"]
    if unit:
        node["description"] = f"{node['description']} [{unit}]"
    if mark and "default" in node:
        node["description"] = f"{node['description']} (default: {mark})"
    if example is not None:
        node["examples"] = [example]
    if node.get("type") == "array":  # pydantic takes the bounds of a spread list for those of a text
        node = {{"minLength": "minItems", "maxLength": "maxItems"}.get(k, k): value for k, value in node.items()}
    if node.get("minItems") == node.get("maxItems") == 12:
        about = {name: node.pop(name) for name in ("description", "default", "examples") if name in node}
        return {**about, "anyOf": [node["items"], node]}
    return node
