"""What the tests of the studies share."""

import importlib.util
import sys
from pathlib import Path

import pytest


@pytest.fixture(scope="session")
def robots():
    """The module of invented robots; importlib mode puts no test folder on the path."""
    path = Path(__file__).with_name("robots.py")
    spec = importlib.util.spec_from_file_location("studies_robots", path)
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module
