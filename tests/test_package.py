"""The package as a whole: version, start-up, top level."""

from __future__ import annotations

import ast
import inspect
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import sunbot

CHECKOUT = Path(__file__).parents[1]
HEAVY = ("numpy", "pandas", "pvlib", "pydantic", "matplotlib", "jinja2", "scipy")


def test_the_version_stands_once_in_two_places():
    """pyproject.toml and the package name the same version."""
    project = tomllib.loads((CHECKOUT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["version"] == sunbot.__version__


def test_help_loads_nothing_heavy():
    """``sunbot --help`` and ``--version`` answer before any scientific import."""
    for option in ("--help", "--version"):
        code = (
            "import sys\nfrom sunbot.cli import cli\n"
            f"try:\n    cli(['{option}'])\nexcept SystemExit as end:\n    assert end.code == 0\n"
            f"loaded = [name for name in {HEAVY!r} if name in sys.modules]\nassert not loaded, loaded\n"
        )
        done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stderr


PROMISED = {"load_site", "load_robot", "weather_for", "check", "pick", "season", "survey"}
"""The functions of which a notebook is made; what they take and give comes with them."""


def test_every_public_name_is_there():
    """The promised functions, the models and results they take and give, and their error: all of it, and no more."""
    taken_and_given = {"Site", "Robot", "Weather", "CheckResult", "PickResult", "SeasonResult"}
    taken_and_given |= {"SurveyResult", "InputError"}
    assert set(sunbot.__all__) == PROMISED | taken_and_given
    for name in PROMISED:
        assert inspect.isfunction(getattr(sunbot, name)), name
    for name in taken_and_given:
        assert inspect.isclass(getattr(sunbot, name)), name
    results = {inspect.signature(getattr(sunbot, name)).return_annotation for name in PROMISED}
    assert results == taken_and_given - {"InputError"}
    assert issubclass(sunbot.InputError, ValueError)


def test_type_checkers_see_what_is_loaded_lazily():
    """The lazy table, the imports for type checkers, ``__all__`` and ``dir`` name the same."""
    tree = ast.parse(Path(sunbot.__file__).read_text(encoding="utf-8"))
    imported = {
        alias.name: node.module for node in ast.walk(tree) if isinstance(node, ast.ImportFrom) for alias in node.names
    }
    lazy = {name: sunbot._HOME[name] for name in sunbot.__all__}
    assert {name: imported[name] for name in lazy} == lazy == sunbot._HOME
    assert dir(sunbot) == sorted([*sunbot.__all__, "__version__"])
    with pytest.raises(AttributeError, match="sunbot has no 'chek'; it has CheckResult, "):
        _ = sunbot.chek


def test_every_name_of_the_readme_is_public():
    """What the README's Python calls on ``sunbot`` is exported."""
    used = set(re.findall(r"\bsunbot\.([A-Za-z_]\w*)\(", (CHECKOUT / "README.md").read_text(encoding="utf-8")))
    assert used
    assert used <= set(sunbot.__all__)
