"""Imports between rooms point one way."""

from __future__ import annotations

import ast
import os
import re
from pathlib import Path

import pytest

import sunbot

PACKAGE = Path(sunbot.__file__).parent
GROUND = {"", "errors", "types", "calendar", "wires", "writing", "shares", "__version__"}
MAY_IMPORT = {
    "inputs": set(),
    "sky": {"inputs"},
    "light": {"inputs", "sky"},
    "harvest": {"inputs", "sky", "light"},
    "demand": {"inputs"},
    "storage": {"inputs", "harvest", "demand"},
    "studies": {"inputs", "sky", "light", "harvest", "demand", "storage"},
    "report": {"inputs", "sky", "studies"},
    "cli": {"inputs", "studies", "report"},
}
TABLE = Path(__file__).parents[1] / "DEVELOPERS.md"


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


def test_contributors_are_told_the_same_table():
    """The table of DEVELOPERS.md has the rooms of this one, each with the same rooms to import."""
    told = {}
    for line in TABLE.read_text(encoding="utf-8").splitlines():
        cells = [cell.strip() for cell in line.strip("|").split("|")]
        if len(cells) == 2 and cells[0] in MAY_IMPORT:
            named = re.sub(r"\([^)]*\)", "", cells[1])
            told[cells[0]] = set() if named == "-" else {name.strip() for name in named.split(",")}
    assert told == MAY_IMPORT


def test_no_room_is_let_in_for_nothing():
    """What report and cli may import, some file of theirs does: the table grants no more than is needed."""
    for room in ("report", "cli"):
        files = sorted((PACKAGE / room).rglob("*.py")) or [PACKAGE / f"{room}.py"]
        used = set().union(*(imported_rooms(path) for path in files))
        assert used - GROUND - {room} == MAY_IMPORT[room], room


@pytest.mark.parametrize("room", MAY_IMPORT)
def test_a_room_imports_only_the_rooms_before_it(room):
    """Each room takes what those before it give and knows nothing of those after."""
    files = sorted((PACKAGE / room).rglob("*.py")) or [PACKAGE / f"{room}.py"]
    for path in files:
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
    assert folders | {"cli"} == set(MAY_IMPORT)


def test_continuous_integration_tests_the_installed_package():
    """Where CI says so, the package under test is the installed one, not a checkout."""
    if not os.environ.get("SUNBOT_EXPECT_INSTALLED"):
        pytest.skip("only CI installs before it tests")
    assert "site-packages" in PACKAGE.parts
