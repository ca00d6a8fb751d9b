"""Makers of robots, weather and light for the harvest room; all invented."""

import numpy as np
import pandas as pd
import pytest

from sunbot.inputs.robot import Robot
from sunbot.light.carriers import Light, LightYield
from sunbot.sky.weather import Weather
from sunbot.types import Place

SHEET = {"watts": 40, "vmp_v": 18.0, "imp_a": 2.22, "voc_v": 21.8, "isc_a": 2.35}


@pytest.fixture
def make_robot():
    """Robot of some panels (each a dict of changes) and a controller, on four lithium iron phosphate cells."""

    def make(*panels, battery=None, **controller):
        entries = [{"name": f"p{k}", "tilt_deg": 10, **SHEET, **panel} for k, panel in enumerate(panels or ({},))]
        return Robot.model_validate(
            {
                "name": "scout",
                "site": {
                    "name": "plot",
                    "latitude": 47.0,
                    "longitude": 8.0,
                    "time_zone": "Europe/Zurich",
                    "weather": {"source": "clear-sky"},
                },
                "panel": [{k: v for k, v in entry.items() if v is not None} for entry in entries],
                "controller": controller,
                "battery": {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12, **(battery or {})},
                "rail": [{"name": "logic", "volts": 5.0, "kind": "step-down"}],
                "load": [{"name": "computer", "rail": "logic", "watts": 1.0}],
            }
        )

    return make


@pytest.fixture
def make_weather():
    """Weather of given air temperature and wind, hourly."""

    def make(air_c, wind_m_s=1.0):
        air_c = np.asarray(air_c, dtype=float)
        n = len(air_c)
        index = pd.date_range("2001-01-01 00:30", periods=n, freq="h", tz="UTC", unit="s")
        columns = {"ghi": 0.0, "dni": 0.0, "dhi": 0.0, "temp_air": air_c, "wind_speed": wind_m_s}
        table = pd.DataFrame(columns, index=index)
        return Weather(table, 1.0, Place(47.0, 8.0, 500.0, "UTC"), np.arange(n), "typical", "invented", "0")

    return make


@pytest.fixture
def make_light():
    """Light on the cells (n_times,) or (n_times, n_headings), on the plane 5 % more, some share of time by heading."""

    def make(cells_w_m2, weight=None):
        cells = np.asarray(cells_w_m2, dtype=float)
        cells = cells[:, None] if cells.ndim == 1 else cells
        if weight is None:
            weight = np.full((1, cells.shape[1]), 1.0 / cells.shape[1])
        return Light(cells / 0.95, cells, np.asarray(weight, dtype=float), LightYield(0, 0, 0, 0, 0, 0))

    return make
