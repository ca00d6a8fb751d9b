"""Invented records of the sky: a mean clear sky under clouds drawn day by day."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pandas as pd
import pytest

from sunbot.inputs.site import Climate, Site, WeatherSource
from sunbot.sky.clear_sky import clear_light
from sunbot.types import Place

INVENTED = Climate(
    ghi_kwh_m2_day=(1.1, 1.9, 3.1, 4.3, 5.2, 5.8, 5.9, 5.0, 3.7, 2.2, 1.2, 0.9),
    temp_min_c=(-3, -2, 1, 4, 8, 12, 14, 13, 10, 6, 1, -2),
    temp_max_c=(3, 5, 10, 14, 19, 22, 25, 24, 19, 14, 7, 4),
    wind_m_s=2.5,
)


@pytest.fixture
def site_of(tmp_path: Path) -> Callable[..., Site]:
    """A site in tmp_path: ``site_of(latitude=..., ..., file=..., label=...)``."""

    def make(
        latitude: float = 47.3,
        longitude: float = 8.1,
        altitude_m: float = 540.0,
        time_zone: str = "Europe/Zurich",
        climate: Climate | None = INVENTED,
        **weather: Any,
    ) -> Site:
        source = WeatherSource(**{"source": "file", "file": "tower.csv", **weather})
        place = {"latitude": latitude, "longitude": longitude, "altitude_m": altitude_m, "time_zone": time_zone}
        return Site(name="invented", weather=source, climate=climate, folder=str(tmp_path), **place)

    return make


@pytest.fixture(scope="session")
def invented_record() -> Callable[..., pd.DataFrame]:
    """Invented weather: UTC middles from ``start`` to before ``end`` (UTC), all columns, closed, without a hole."""

    def make(site: Site, start: str, end: str, *, step: str = "1h", seed: int = 7) -> pd.DataFrame:
        edges = pd.date_range(start, end, freq=step, tz="UTC", inclusive="left", unit="s")
        times = (edges + pd.Timedelta(step) / 2).as_unit("s")
        place = Place(site.latitude, site.longitude, site.altitude_m, site.time_zone)
        clear = pd.DataFrame(clear_light(times, place, step_h=pd.Timedelta(step) / pd.Timedelta("1h")), index=times)
        rng = np.random.default_rng(seed)
        day = ((times.as_unit("s").asi8 + site.longitude * 240) // 86400).astype(int)
        cloud = rng.uniform(0.0, 1.0, day.max() - day.min() + 1)[day - day.min()]
        beam = np.where(cloud < 0.4, 1.0 - 0.5 * cloud, 0.2 * (1.0 - cloud))
        table = pd.DataFrame(index=times)
        table["ghi"] = (clear["ghi"] - clear["dhi"]) * beam + clear["dhi"] * (1.0 + 0.3 * cloud)
        table["dni"] = clear["dni"] * beam
        table["dhi"] = clear["dhi"] * (1.0 + 0.3 * cloud)
        table["temp_air"] = 10.0 + 8.0 * np.sin(np.arange(len(times)) / 100.0) + rng.normal(0.0, 0.5, len(times))
        table["wind_speed"] = rng.uniform(0.5, 4.0, len(times))
        return table.round(4)

    return make


@pytest.fixture
def write_csv(tmp_path: Path) -> Callable[..., str]:
    """Write a table of middles as own CSV with the stamps of ``label``; the file's name."""

    def write(table: pd.DataFrame, name: str = "tower.csv", *, label: str = "start", clock: str | None = "UTC") -> str:
        times = pd.DatetimeIndex(table.index)
        half = (times[1] - times[0]) / 2
        stamps = times + {"start": -half, "middle": 0 * half, "end": half}[label]
        if clock is None:
            text = stamps.tz_localize(None).strftime("%Y-%m-%d %H:%M:%S")
        else:
            text = [stamp.isoformat() for stamp in stamps.tz_convert(clock)]
        table.assign(time=text)[["time", *table.columns]].to_csv(tmp_path / name, index=False)
        return name

    return write
