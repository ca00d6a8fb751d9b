"""The package as a whole: version, start-up, top level."""

from __future__ import annotations

import subprocess
import sys
import tomllib
from pathlib import Path

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


def test_every_public_name_is_there():
    """What ``sunbot`` says it exports can be had."""
    for name in sunbot.__all__:
        assert getattr(sunbot, name) is not None
