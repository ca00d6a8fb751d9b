"""A year without clouds: the brightest sky the place can have."""

from __future__ import annotations

import numpy as np
import pandas as pd

from ..inputs.site import Site
from ..types import Caution, FloatArray, Place
from .digest import table_digest
from .mend import climate_air, scaled
from .readings import COLUMNS
from .record import LIGHT
from .reference_sky import HOURS_A_YEAR, generated_times
from .sun_height import clear_sky, mean_turbidity, sun_height
from .weather import Weather

# Published: ISO 2533 standard atmosphere, 15 degC at sea level and 6.5 K less for each kilometre.
SEA_LEVEL_C, LAPSE_K_M = 15.0, 0.0065
DEFAULT_WIND_M_S = 2.0
PARTS = 6


def clear_sky_weather(site: Site) -> Weather:
    """8,760 hours of 2001 under the place's mean clear sky; temperature and wind from [climate] or assumed."""
    place = Place(site.latitude, site.longitude, site.altitude_m, site.time_zone)
    times = generated_times(1, site.time_zone)
    light = clear_light(times, place, step_h=1.0)
    bright = "No cloud in the whole year: the brightest sky the place can have. It proves nothing about survival."
    cautions = [Caution("clear-sky", site.name, bright)]
    air: dict[str, FloatArray]
    if site.climate is not None:
        air = climate_air(times, site.climate, site)
    else:
        temperature_c = SEA_LEVEL_C - LAPSE_K_M * site.altitude_m
        air = {"temp_air": np.full(HOURS_A_YEAR, temperature_c), "wind_speed": np.full(HOURS_A_YEAR, DEFAULT_WIND_M_S)}
        text = f"Without [climate] the air is taken as {temperature_c:.0f} degC and {DEFAULT_WIND_M_S:g} m/s all year."
        cautions.append(Caution("assumed-air", site.name, text))
    table = scaled(pd.DataFrame({**light, **air}, index=times)[list(COLUMNS)], site)
    return Weather(
        table=table,
        step_h=1.0,
        place=place,
        row=np.arange(HOURS_A_YEAR),
        kind="clear-sky",
        origin="clear sky of the mean turbidity of the place (Ineichen & Perez)",
        digest=table_digest(table),
        cautions=tuple(cautions),
    )


def clear_light(times: pd.DatetimeIndex, place: Place, *, step_h: float) -> dict[str, FloatArray]:
    """ghi, dni, dhi [W/m²], means over the steps around ``times``, worked out in six parts; each (n_times,).

    A step in which the sun rises or sets has the light of its lit parts; with the sun down at its middle all of it is
    diffuse.
    """
    total = dict.fromkeys(LIGHT, np.zeros(len(times)))
    turbidity = mean_turbidity(times, place)
    for part in range(PARTS):
        shift_s = 3600.0 * step_h * ((part + 0.5) / PARTS - 0.5)
        sky = clear_sky(
            sun_height(times + pd.Timedelta(milliseconds=round(1000 * shift_s)), step_h / PARTS, place), turbidity
        )
        total = {name: total[name] + sky[name] / PARTS for name in LIGHT}
    down = sun_height(times, step_h, place).sine <= 0.0
    return {
        "ghi": total["ghi"],
        "dni": np.where(down, 0.0, total["dni"]),
        "dhi": np.where(down, total["ghi"], total["dhi"]),
    }
