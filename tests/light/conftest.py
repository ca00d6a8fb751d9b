"""Small robots and weather for the tests of the light room."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.inputs.robot import Battery, Load, Panel, Rail, Robot
from sunbot.inputs.site import Site
from sunbot.light import sun_over
from sunbot.sky.weather import Weather
from sunbot.types import Place


def _table(times, place, seed):
    """Invented light that is consistent: ghi = dni cos(zenith) + dhi, cloudy and clear days in turn."""
    dark = pd.DataFrame(0.0, index=times, columns=["ghi", "dni", "dhi", "temp_air", "wind_speed"])
    n_ref = min(len(times), 8760)
    row = np.arange(len(times)) % n_ref
    sun = sun_over(Weather(dark, 1.0, place, row, "generated", "", ""))
    height = np.maximum(np.cos(np.radians(sun.zenith_deg)), 0.0)[row] * (sun.lit > 0)[row]
    cloud = np.random.default_rng(seed).uniform(0.0, 1.0, len(times) // 24 + 1)[np.arange(len(times)) // 24]
    dni = np.where(height > 0.0, 850.0 * (1.0 - cloud), 0.0)
    dhi = height * (100.0 + 200.0 * cloud)
    return dark.assign(ghi=dni * height + dhi, dni=dni, dhi=dhi, temp_air=10.0, wind_speed=1.0)


@pytest.fixture(scope="session")
def make_weather():
    def make(years=1, *, latitude=52.0, longitude=13.0, kind="generated", seed=5, snow_covered=None):
        seconds = np.datetime64("2000-12-31T23:30:00", "s") + 3600 * np.arange(8760 * years)
        times = pd.DatetimeIndex(seconds, tz="UTC")
        place = Place(latitude, longitude, 100.0, "Europe/Berlin")
        row = np.arange(8760 * years) % 8760
        return Weather(_table(times, place, seed), 1.0, place, row, kind, "invented", "", snow_covered=snow_covered)

    return make


@pytest.fixture(scope="session")
def year(make_weather):
    weather = make_weather()
    return weather, sun_over(weather)


@pytest.fixture(scope="session")
def make_robot():
    def make(
        *panels,
        heading="fixed",
        heading_deg=0.0,
        headings=(),
        parked="random",
        moves=True,
        hours=((9.0, 15.5),),
        **site,
    ):
        mounted = [panel if isinstance(panel, dict) else {"tilt_deg": float(panel)} for panel in panels]
        return Robot.model_validate(
            {
                "name": "invented",
                "site": Site(name="invented", latitude=52.0, longitude=13.0, time_zone="Europe/Berlin", **site),
                "heading": heading,
                "heading_deg": heading_deg,
                "headings": headings,
                "parked": parked,
                "panel": tuple(Panel(**({"name": f"p{i}", "watts": 40.0} | p)) for i, p in enumerate(mounted)),
                "battery": Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12.0),
                "rail": (Rail(name="bus", kind="none"),),
                "load": (Load(name="drive", rail="bus", watts=20.0, hours=hours, moves=moves),),
            }
        )

    return make
