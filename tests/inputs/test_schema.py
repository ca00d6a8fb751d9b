"""The JSON Schema of the files agrees with the example deployments, without a schema library."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path
from typing import Any

import pytest

from sunbot.inputs import schema_of

SITES = Path(__file__).parents[2] / "sites"
TYPES = {"string": str, "number": (int, float), "integer": int, "boolean": bool, "array": list, "object": dict}


def complaints(value: Any, schema: dict[str, Any], root: dict[str, Any], path: str = "") -> list[str]:
    """Where a value breaks the words of JSON Schema that ours uses."""
    if "$ref" in schema:
        schema = root["$defs"][schema["$ref"].removeprefix("#/$defs/")]
    if "anyOf" in schema:
        options = [complaints(value, option, root, path) for option in schema["anyOf"]]
        return [] if [] in options else min(options, key=len)
    expected = TYPES[schema["type"]]
    if not isinstance(value, expected) or (isinstance(value, bool) and schema["type"] != "boolean"):
        return [f"{path}: {value!r} is no {schema['type']}"]
    found = [f"{path}: {value!r} is no choice"] if "enum" in schema and value not in schema["enum"] else []
    if isinstance(value, (int, float)):
        low, high = schema.get("minimum", -1e99), schema.get("maximum", 1e99)
        sound = low <= value <= high and schema.get("exclusiveMinimum", -1e99) < value
        found += (
            [] if sound and value < schema.get("exclusiveMaximum", 1e99) else [f"{path}: {value!r} is out of bounds"]
        )
    if isinstance(value, list):
        if not schema.get("minItems", 0) <= len(value) <= schema.get("maxItems", 1e9):
            found.append(f"{path}: {len(value)} items")
        kinds = schema.get("prefixItems") or [schema["items"]] * len(value)
        for position, (item, kind) in enumerate(zip(value, kinds, strict=False)):
            found += complaints(item, kind, root, f"{path}[{position}]")
    if isinstance(value, dict):
        known = schema["properties"]
        found += [f"{path}.{name}: unknown" for name in value if name not in known]
        found += [f"{path}.{name}: missing" for name in schema.get("required", []) if name not in value]
        for name in value.keys() & known.keys():
            found += complaints(value[name], known[name], root, f"{path}.{name}")
    return found


@pytest.mark.parametrize("path", sorted(SITES.glob("*/*.toml")), ids=lambda path: f"{path.parent.name}/{path.name}")
def test_the_example_files_are_valid_by_the_schema(path):
    """Every example file meets the schema of its kind."""
    schema = schema_of("site" if path.name == "site.toml" else "robot")
    assert complaints(tomllib.loads(path.read_text(encoding="utf-8")), schema, schema) == []


@pytest.mark.parametrize(
    ("key", "value"),
    [
        ("heading", "roam"),
        ("site", 3),
        ("panels", []),
        ("load", []),
        ("heading_deg", 400),
        ("battery", {"chemistry": "nimh"}),
    ],
)
def test_the_schema_refuses_what_the_reader_refuses(key, value):
    """A wrong choice, type, key, count, bound and a missing key are all refused: the schema is not empty words."""
    schema = schema_of("robot")
    data = tomllib.loads((SITES / "orchard-row" / "robot.toml").read_text(encoding="utf-8"))
    assert complaints({**data, key: value}, schema, schema)


@pytest.mark.parametrize("which", ["robot", "site"])
def test_the_schema_is_json_for_editors(which):
    """It is plain JSON without null, without keys that only the reader sets, and every key has a comment."""
    schema = schema_of(which)
    assert json.loads(json.dumps(schema)) == schema
    assert "null" not in json.dumps(schema)
    assert "folder" not in schema["properties"]
    for part in [schema, *schema["$defs"].values()]:
        assert part["additionalProperties"] is False
        assert all("description" in key or "$ref" in key for key in part["properties"].values())


def test_twelve_values_may_be_one():
    """A monthly key takes one number or a list of exactly twelve."""
    albedo = schema_of("site")["properties"]["albedo"]
    one, twelve = albedo["anyOf"]
    assert one["type"] == "number"
    assert (twelve["minItems"], twelve["maxItems"]) == (12, 12)


def test_an_unknown_schema_is_the_callers_mistake():
    """Only robot and site have a schema."""
    with pytest.raises(ValueError, match="'robot' and 'site'"):
        schema_of("weather")  # type: ignore[arg-type]
