"""What the tests of the reports share: the invented robots of the studies, and one answer each way."""

import importlib.util
import sys
from pathlib import Path

import pytest

from sunbot.studies.chain import Chain
from sunbot.studies.checking import check_on


@pytest.fixture(scope="session")
def robots():
    """The module of invented robots; importlib mode puts no test folder on the path."""
    path = Path(__file__).parents[1] / "studies" / "robots.py"
    spec = importlib.util.spec_from_file_location("report_robots", path)
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def sky3(robots):
    """Three years in steps of three hours."""
    return robots.quick_weather(robots.hill(), years=3, every=3)


@pytest.fixture(scope="session")
def lives(robots, sky3):
    """A robot that meets its target, with its steps."""
    robot = robots.robot(watts=80, battery_ah=40, load_w=0.8, work_w=4.0)
    return check_on(Chain(sky3), robot, years=3, seed=1, trace=True)


@pytest.fixture(scope="session")
def dies(robots, sky3):
    """A robot that is out for weeks each winter, with its steps."""
    return check_on(Chain(sky3), robots.robot(watts=12, work_w=10.0), years=3, seed=1, trace=True)
