"""Flank panels against a flat one over snow at 63 degrees north, on a real typical year."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pvlib
import pytest

from sunbot.inputs.robot import Battery, Load, Panel, Rail, Robot
from sunbot.inputs.site import Site, WeatherSource
from sunbot.sky import weather_for
from sunbot.studies.chain import Chain

# Published: a typical year of Northway, Alaska, in the registry package diyepw (62.96 N); the wheel is pinned.
NORTHWAY = (
    "diyepw",
    "1.3.1",
    "894c06663648980c8d3eacef553ff1c97ddc2bbc1e38769573166d84b1f731cc",
    "diyepw/data/tmy_epw_files/USA_AK_Northway.AP.702910_TMY3.epw",
)
# Snow from October to April, 0.65: the surface table of pvlib; grass and soil in summer.
SNOW, GRASS = 0.65, 0.20
ALBEDO = (SNOW,) * 4 + (GRASS,) * 5 + (SNOW,) * 3
# Flat panels lie open here: what snow on them takes comes on top.


@pytest.fixture(scope="module")
def chain_of(registry_file):
    """``chain_of(albedo) -> Chain`` over the real weather."""
    source = WeatherSource(source="file", file=str(registry_file(*NORTHWAY)), elsewhere=True)
    chains: dict[tuple[float, ...], tuple[Chain, Site]] = {}

    def chain(albedo):
        if albedo not in chains:
            site = Site(
                name="Northway",
                latitude=62.96,
                longitude=-141.93,
                altitude_m=522.0,
                time_zone="America/Anchorage",
                albedo=albedo,
                weather=source,
            )
            chains[albedo] = Chain(weather_for(site)), site
        return chains[albedo]

    return chain


def _robot(site, tilt_deg, **ways):
    panel = Panel(name="flank", watts=40.0, vmp_v=18.0, imp_a=2.22, voc_v=21.8, isc_a=2.35, tilt_deg=tilt_deg)
    return Robot.model_validate(
        {
            "name": "invented",
            "site": site,
            "panel": (panel,),
            "battery": Battery(chemistry="lifepo4", cells_in_series=4, capacity_ah=12.0),
            "rail": (Rail(name="bus", kind="none"),),
            "load": (Load(name="logger", rail="bus", watts=1.0),),
            "heading_deg": 180.0,
            **ways,
        }
    )


@pytest.fixture(scope="module")
def harvest_wh(chain_of):
    """``harvest_wh(tilt_deg, ...)``: through an mppt controller in each month [Wh]."""

    def harvest(tilt_deg, *, albedo=ALBEDO, **ways):
        chain, site = chain_of(albedo)
        offer_w = chain.supply(_robot(site, tilt_deg, **ways), accounts=False).offer_w[:, 0, :].mean(axis=-1)
        return np.bincount(chain.months, weights=offer_w, minlength=13)[1:]

    return harvest


@pytest.fixture(scope="module")
def upright_over_flat(harvest_wh):
    """Harvest of an upright panel that faces south over that of a flat one, by month."""
    return harvest_wh(90.0) / harvest_wh(0.0)


def test_an_upright_panel_to_the_south_wins_from_september_to_april(upright_over_flat):
    """It loses by a third in summer and wins more than sixfold about the turn of the year."""
    winners = np.flatnonzero(upright_over_flat > 1.0) + 1
    np.testing.assert_array_equal(winners, [1, 2, 3, 4, 9, 10, 11, 12])
    assert (upright_over_flat[[0, 11]] > 6.0).all()
    assert (upright_over_flat[4:7] < 0.7).all()


def test_pin_by_how_much_the_upright_panel_wins(upright_over_flat):
    """Pinned, so that a change of the light or the cells under a low sun is seen; how far it is true, the next test."""
    pinned = [6.53, 2.52, 1.65, 1.19, 0.68, 0.65, 0.63, 0.82, 1.18, 1.94, 3.93, 6.62]
    np.testing.assert_allclose(upright_over_flat, pinned, rtol=0.01)


def test_the_light_behind_it_agrees_with_another_sky(registry_file, chain_of, upright_over_flat):
    """An independent chain, pvlib alone under the Hay-Davies sky, has the same winners; its light is 15 % off at most.

    The skies differ most under a sun a few degrees high. The harvest of the flat panel falls further behind in winter
    than its light: so low a sun is thrown back by its glass.
    """
    table, about = pvlib.iotools.read_epw(str(registry_file(*NORTHWAY)))
    times = pd.DatetimeIndex(table.index) + pd.Timedelta(minutes=30)  # the reader labels the start of the hour
    sun = pvlib.solarposition.spa_python(times, about["latitude"], about["longitude"])
    sun.index, months = table.index, table.index.month
    plane = pvlib.irradiance.get_total_irradiance(
        90.0,
        180.0,
        sun["apparent_zenith"],
        sun["azimuth"],
        table["dni"],
        table["ghi"],
        table["dhi"],
        dni_extra=pd.Series(pvlib.irradiance.get_extra_radiation(times.day_of_year.to_numpy()), index=table.index),
        albedo=pd.Series(np.asarray(ALBEDO)[months - 1], index=table.index),
        model="haydavies",
    )["poa_global"].fillna(0.0)
    other = (plane.groupby(months).sum() / table["ghi"].groupby(months).sum()).to_numpy()
    chain, site = chain_of(ALBEDO)
    up, flat = (
        np.bincount(chain.months, weights=chain.lights(_robot(site, tilt))[0].plane_w_m2[:, 0], minlength=13)[1:]
        for tilt in (90.0, 0.0)
    )
    np.testing.assert_allclose(up / flat, other, rtol=0.15)
    np.testing.assert_array_equal(other > 1.0, upright_over_flat > 1.0)
    winter = [0, 1, 9, 10, 11]
    assert (upright_over_flat[winter] > (up / flat)[winter]).all()


def test_it_is_the_snow_that_lets_it_win_in_april(harvest_wh):
    """Over bare ground the flat panel is level with it again a month earlier."""
    flat = harvest_wh(0.0)
    assert harvest_wh(90.0)[3] > 1.15 * flat[3]
    assert harvest_wh(90.0, albedo=(GRASS,) * 12)[3] < flat[3]


def test_flanks_of_a_robot_that_roams_win_less_long(harvest_wh):
    """Seen from all sides alike, an upright panel wins from October to March only."""
    roaming = harvest_wh(90.0, heading="roams", parked="mean") / harvest_wh(0.0)
    np.testing.assert_array_equal(np.flatnonzero(roaming > 1.0) + 1, [1, 2, 3, 10, 11, 12])
