"""Monthly harvest of a tracker against a chain of reference-library calls that shares no code with sunbot."""

from pathlib import Path

import numpy as np
import pandas as pd
import pvlib
import pytest
from pvlib import iam, irradiance, pvsystem, temperature
from pvlib.ivtools.sdm import fit_desoto_batzelis

import sunbot.harvest
from sunbot.inputs.robot import Robot
from sunbot.light import lights_on, sun_over
from sunbot.sky import weather_for

FILES = {"723170TYA.CSV": "America/New_York", "703165TY.csv": "America/Anchorage"}
MOUNTS = {"flat": (0, 180), "south": (35, 180), "south-east": (35, 135), "east wall": (90, 90), "west wall": (90, 270)}
SHEET = {"vmp_v": 18.0, "imp_a": 2.22, "voc_v": 21.8, "isc_a": 2.35}


@pytest.fixture(scope="module", params=sorted(FILES))
def year(request):
    """A typical year that ships with the reference library, and its header."""
    path = Path(pvlib.__file__).parent / "data" / request.param
    table, header = pvlib.iotools.read_tmy3(path, coerce_year=2001, map_variables=True)
    return request.param, table, header


def _chain_wh(table, header, *, tilt, azimuth):
    """Monthly energy of a 40 W panel on an open rack behind a tracker of 0.95, by the reference library alone."""
    middles = table.index - pd.Timedelta("30min")  # this format labels the end of the hour
    place = pvlib.location.Location(header["latitude"], header["longitude"], altitude=header["altitude"])
    sun = place.get_solarposition(middles)
    sky = {name: table[name].to_numpy() for name in ("ghi", "dni", "dhi", "temp_air", "wind_speed")}
    zenith, direction = sun["apparent_zenith"].to_numpy(), sun["azimuth"].to_numpy()
    plane = irradiance.get_total_irradiance(
        tilt,
        azimuth,
        zenith,
        direction,
        sky["dni"],
        sky["ghi"],
        sky["dhi"],
        dni_extra=irradiance.get_extra_radiation(middles.day_of_year.to_numpy()),
        airmass=pvlib.atmosphere.get_relative_airmass(zenith),
        albedo=0.2,
        model="perez-driesse",
    )
    beam_passes = iam.physical(irradiance.aoi(tilt, azimuth, zenith, direction))
    passes = iam.marion_diffuse("physical", tilt)
    cells = plane["poa_direct"] * beam_passes + plane["poa_sky_diffuse"] * passes["sky"]
    cells = cells + np.nan_to_num(plane["poa_ground_diffuse"] * passes["ground"])
    cells = np.nan_to_num(np.maximum(cells, 0.0))
    warm = temperature.faiman(np.nan_to_num(plane["poa_global"]), sky["temp_air"], sky["wind_speed"], 25.0, 6.84)
    cell = fit_desoto_batzelis(18.0, 2.22, 21.8, 2.35, 0.0005 * 2.35, -0.0030 * 21.8)
    lit = cells > 0.01
    power = np.zeros(len(cells))
    parameters = pvsystem.calcparams_desoto(cells[lit], warm[lit], **cell)
    power[lit] = 0.95 * pvsystem.max_power_point(*parameters, method="brentq")["p_mp"]
    return np.bincount(middles.month, weights=power, minlength=13)[1:]


@pytest.mark.parametrize("mount", list(MOUNTS))
def test_monthly_harvest_agrees_with_an_independent_chain(year, mount):
    """Every month of two real typical years, five mountings: within 4 % of the independent chain."""
    # Sun by SPA at interval middles, perez-driesse, iam.physical, marion_diffuse, Faiman, De Soto maximum power x 0.95.
    name, table, header = year
    tilt, azimuth = MOUNTS[mount]
    site = {
        "name": "typical year",
        "latitude": header["latitude"],
        "longitude": header["longitude"],
        "altitude_m": header["altitude"],
        "time_zone": FILES[name],
        "weather": {"source": "file", "file": f"pvlib-data:{name}"},
    }
    panel = {"name": "p", "watts": 40, **SHEET, "tilt_deg": tilt, "azimuth_deg": azimuth, "rear": "open"}
    robot = Robot.model_validate(
        {
            "name": "rack",
            "site": site,
            "panel": [{**panel, "dirt_loss": 0.0}],
            "battery": {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12},
            "load": [{"name": "computer", "rail": "bus", "watts": 1.0}],
            "rail": [{"name": "bus", "kind": "none"}],
        }
    )
    weather = weather_for(robot.site)
    lights = lights_on(robot, weather, sun_over(weather))
    made = sunbot.harvest.supply(lights, weather, robot, watts=[40.0], battery_v=[13.2])
    months = weather.times.tz_convert(table.index.tz).month
    ours = np.bincount(months, weights=made.offer_w[:, 0, 0] * weather.step_h, minlength=13)[1:]
    assert ours == pytest.approx(_chain_wh(table, header, tilt=tilt, azimuth=azimuth), rel=0.04)
