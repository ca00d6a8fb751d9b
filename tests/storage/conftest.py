"""Random small worlds for the balance, and the plain loop they are compared with."""

import importlib.util
import sys
from pathlib import Path

import pytest


def _load(name):
    """A helper beside the tests; importlib mode puts no test folder on the path."""
    path = Path(__file__).with_name(f"{name}.py")
    spec = importlib.util.spec_from_file_location(f"storage_{name}", path)
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def scalar_loop():
    return _load("scalar_loop")


@pytest.fixture(scope="session")
def worlds():
    return _load("worlds")
