"""Beam and diffuse worked out where a file lacks them: closure, guards, and the real split of a typical year."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.sky import weather_for
from sunbot.sky.split import completed_light
from sunbot.sky.sun_height import beam_limit_w_m2, sun_height
from sunbot.types import Place

HERE = Place(52.0, 5.0, 10.0, "UTC")


@pytest.fixture
def sun():
    return sun_height(pd.date_range("2019-01-01T00:30Z", periods=8760, freq="h", unit="s"), 1.0, HERE)


def test_split_light_closes_and_stays_below_a_clear_beam(sun):
    """Whatever ghi, also a cloud edge at sunrise: ghi = dhi + dni cos z, and no beam a clear sky cannot give."""
    rng = np.random.default_rng(3)
    ghi = np.where(sun.lit, rng.uniform(0.0, 1.2, 8760) * sun.extra_w_m2 * np.maximum(sun.sine, 0.02), 0.0)
    none = np.full(8760, np.nan)
    out, dni, dhi, split = completed_light(ghi, none, none, sun)
    np.testing.assert_array_equal(out, ghi)
    np.testing.assert_allclose(dhi + dni * np.maximum(sun.sine, 0.0), ghi, atol=1e-9)
    assert (dni <= beam_limit_w_m2(sun) + 1e-9).all()
    assert (dni <= sun.extra_w_m2).all()
    assert dni.min() >= 0.0
    assert dhi.min() >= 0.0
    assert split.sum() == (ghi > 0.0).sum()


def test_each_column_follows_from_the_other_two(sun):
    """One column taken away comes back; where the sun is low the beam is only bounded."""
    high = sun.sine > 0.1
    dni = np.where(sun.sine > 0.0, 0.6 * beam_limit_w_m2(sun), 0.0)
    dhi = np.where(sun.sine > 0.0, 60.0, 0.0)
    ghi = dhi + dni * np.maximum(sun.sine, 0.0)
    none = np.full(8760, np.nan)
    for given in ((none, dni, dhi), (ghi, none, dhi), (ghi, dni, none)):
        out = completed_light(*given, sun)
        for got, want in zip(out[:3], (ghi, dni, dhi), strict=True):
            np.testing.assert_allclose(got[high], want[high], atol=1e-9)


def test_a_row_with_nothing_stays_missing(sun):
    """From no light column none is made up."""
    none = np.full(8760, np.nan)
    for column in completed_light(none, none, none, sun)[:3]:
        assert np.isnan(column).all()


def test_split_of_a_real_year_is_near_its_own_columns(site_of, write_csv):
    """Greensboro without its dni and dhi: the year's diffuse share within 0.05 of the file's, the beam within 12 %.

    Common practice: a split from ghi alone is good to about a tenth in the year's beam.
    """
    place = (36.1, -79.95, 273.0, "America/New_York")
    real = weather_for(site_of(*place, file="pvlib-data:723170TYA.CSV")).table
    name = write_csv(real[["ghi", "temp_air", "wind_speed"]].set_axis(real.index + pd.Timedelta(0)))
    weather = weather_for(site_of(*place, file=name, label="start"))
    assert "light-split" in {caution.code for caution in weather.cautions}
    guess = weather.table
    assert guess["dhi"].sum() / guess["ghi"].sum() == pytest.approx(real["dhi"].sum() / real["ghi"].sum(), abs=0.05)
    assert guess["dni"].sum() == pytest.approx(real["dni"].sum(), rel=0.12)
