"""Robots of invented parts, for the tests of this room."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.inputs.robot import Robot
from sunbot.inputs.site import Site


@pytest.fixture
def robot_of():
    """A function that makes a robot from its rails and loads (lists of dicts)."""

    def make(rails, loads, **keys):
        site = Site(name="Invented yard", latitude=47.0, longitude=8.0, time_zone="Europe/Zurich")
        battery = {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12.0}
        panel = {"name": "deck", "watts": 40.0, "vmp_v": 18.0, "tilt_deg": 10.0}
        return Robot(
            **{"name": "r", "site": site, "panel": (panel,), "battery": battery, **keys}, rail=rails, load=loads
        )

    return make


@pytest.fixture
def hours_2001():
    """The hours of 2001 on Zurich's standard clock."""
    return pd.DatetimeIndex(
        np.datetime64("2000-12-31T23:30", "s") + np.arange(8760) * np.timedelta64(3600, "s"), tz="UTC"
    )
