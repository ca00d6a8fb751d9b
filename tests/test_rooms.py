"""Imports between rooms point one way."""

from __future__ import annotations

import ast
import os
from pathlib import Path

import pytest

import sunbot

PACKAGE = Path(sunbot.__file__).parent
GROUND = {"", "errors", "types", "calendar", "wires", "writing", "__version__"}
MAY_IMPORT = {
    "inputs": set(),
    "sky": {"inputs"},
    "light": {"inputs", "sky"},
    "harvest": {"inputs", "sky", "light"},
    "demand": {"inputs"},
    "storage": {"inputs", "harvest", "demand"},
    "studies": {"inputs", "sky", "light", "harvest", "demand", "storage"},
}
ROOMS = [*MAY_IMPORT, "report"]


def imported_rooms(path: Path) -> set[str]:
    """Top-level parts of sunbot that a file imports, in functions and for type checking too."""
    depth = len(path.relative_to(PACKAGE).parts)
    found = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.ImportFrom) and node.level == depth:
            if node.module:
                found.add(node.module.split(".")[0])
            else:
                found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.level == 0 and (node.module or "").startswith("sunbot"):
            found.add((node.module or "").removeprefix("sunbot").strip(".").split(".")[0])
        elif isinstance(node, ast.Import):
            found |= {
                alias.name.removeprefix("sunbot").strip(".").split(".")[0]
                for alias in node.names
                if alias.name.split(".")[0] == "sunbot"
            }
    return found


@pytest.mark.parametrize("room", MAY_IMPORT)
def test_a_room_imports_only_the_rooms_before_it(room):
    """Each room takes what those before it give and knows nothing of those after."""
    for path in sorted((PACKAGE / room).rglob("*.py")):
        beyond = imported_rooms(path) - GROUND - MAY_IMPORT[room] - {room}
        assert not beyond, f"{path.relative_to(PACKAGE)} imports {beyond}"


def test_the_ground_floor_imports_nothing_above_it():
    """errors, types, calendar, wires and writing import only each other."""
    for path in PACKAGE.glob("*.py"):
        if path.name in ("__init__.py", "cli.py", "__main__.py"):
            continue
        assert imported_rooms(path) <= GROUND, path.name


def test_every_folder_of_the_package_is_a_room():
    """No room stands outside the table."""
    folders = {path.parent.relative_to(PACKAGE).parts[0] for path in PACKAGE.glob("*/**/*.py")}
    assert folders <= set(ROOMS), folders


def test_continuous_integration_tests_the_installed_package():
    """Where CI says so, the package under test is the installed one, not a checkout."""
    if not os.environ.get("SUNBOT_EXPECT_INSTALLED"):
        pytest.skip("only CI installs before it tests")
    assert "site-packages" in PACKAGE.parts
