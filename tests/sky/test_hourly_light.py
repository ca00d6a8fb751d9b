"""Hours of a day: closed, under their limit, as restless as measured ones, and split without loss."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.sky.hourly_light import beam_and_diffuse, closed_days, hourly_spread, hourly_trend, hours_of_days
from sunbot.sky.reference_sky import reference_sky
from sunbot.types import Place

SKY = reference_sky(Place(47.0, 8.0, 500.0, "Europe/Zurich"))


def test_days_close_from_dark_to_fully_clear():
    """Random wishes and limits: the sum is met exactly, no hour passes its limit, also at total = all of the limit."""
    rng = np.random.default_rng(1)
    limit = rng.uniform(0.0, 900.0, (50, 24)) * (rng.random((50, 24)) > 0.4)
    wish = rng.uniform(0.05, 1.0, (40, 50, 24)) * limit
    share = np.concatenate([np.zeros((1, 50)), np.ones((1, 50)), rng.random((38, 50))])
    total = share * limit.sum(axis=1)
    hours = closed_days(total, wish, limit=limit)
    assert hours.sum(axis=2) == pytest.approx(total, rel=1e-8)
    assert (hours <= limit).all()
    assert (hours >= 0.0).all()


def test_trend_of_an_even_day():
    """At the two ends the trend is plain: an all-clear day has its own clearness all day, a dark one too."""
    # limits of the published formula: 1 - K = 0, and exp(-q m) -> 0 as K -> 0
    assert hourly_trend(np.array(1.0), np.array([1.0, 3.0, 10.0])) == pytest.approx(1.0)
    assert hourly_trend(np.array(0.05), np.array([1.0, 3.0])) == pytest.approx(0.05, rel=0.01)
    middle = hourly_trend(np.array(0.5), np.array([1.2, 2.0, 5.0]))
    assert (np.diff(middle) < 0.0).all()


def test_spread_is_widest_on_days_between_dark_and_clear():
    """Largest at K = 0.45, 0.16; gone at 0.9."""
    assert hourly_spread(np.array(0.45)) == pytest.approx(0.16)
    assert hourly_spread(np.array([0.0, 0.9, 0.95])) == pytest.approx(0.0, abs=1e-12)


def test_hours_of_a_broken_day_vary_and_persist():
    """On days of half light hourly clearness varies by 0.1 to 0.16 about its mean course and persists by about 0.5."""
    rng = np.random.default_rng(2)
    day = np.broadcast_to(0.5 * SKY.level_w_m2.sum(axis=1), (30, 365))
    ghi = hours_of_days(day, rng.standard_normal((30, 365, 24)), SKY, clear_w_m2=SKY.clear_w_m2)
    noon = slice(9, 15)
    clearness = ghi[:, 150:200, noon] / SKY.level_w_m2[150:200, noon]
    deviation = clearness - clearness.mean(axis=0)
    assert 0.08 < deviation.std() < 0.16
    assert 0.25 < np.corrcoef(deviation[..., 1:].ravel(), deviation[..., :-1].ravel())[0, 1] < 0.60


def test_beam_and_diffuse_add_up():
    """Diffuse and beam close on the level, no beam passes 1.1 of the clear one, and none is there before sunrise."""
    rng = np.random.default_rng(3)
    ghi = rng.random((5, 365, 24)) * SKY.clear_w_m2
    dni, dhi = beam_and_diffuse(ghi, SKY)
    assert dni * SKY.cosine + dhi == pytest.approx(ghi, abs=1e-9)
    assert (dni <= 1.1 * SKY.clear_beam_w_m2 + 1e-9).all()
    assert (dni[:, SKY.sun_up == 0.0] == 0.0).all()
    assert (dhi >= 0.0).all()


def test_overcast_is_diffuse_and_clear_is_mostly_beam():
    """A tenth of the clear light is all but diffuse; the clear sky at a high sun has a diffuse share under 0.3."""
    high = SKY.cosine > 0.7
    for share, low, top in ((0.1, 0.97, 1.0), (1.0, 0.05, 0.30)):
        ghi = share * SKY.clear_w_m2[None]
        _, dhi = beam_and_diffuse(ghi, SKY)
        part = (dhi[0] / np.maximum(ghi[0], 1e-9))[high & (SKY.sun_up > 0)]
        assert (part >= low).all()
        assert (part <= top).all()


def test_hour_of_sunrise_counts_its_lit_part():
    """Light above the air over a day equals the closed integral over its lit part."""
    # Published: Duffie & Beckman, 4th ed. 2013, eq. 1.10.3; 0.6 %: declination held for a day, and two
    # values of the solar constant, 1366 and 1361
    from sunbot.sky.climate import monthly_kwh
    from sunbot.sky.world import monthly_extraterrestrial_kwh

    assert monthly_kwh(SKY.level_w_m2) == pytest.approx(monthly_extraterrestrial_kwh(47.0), rel=6e-3)
    rising = (SKY.lit > 0.0) & (SKY.lit < 1.0)
    # two hours a day, less those whose sun rises or sets within a part of the full hour
    assert 640 <= rising.sum() <= 730


def test_a_low_winter_sun_keeps_the_beam_its_clearness_gives_it():
    """Under a sun of 5 to 16 degrees the diffuse share is that of Erbs, as it is under a high one."""
    low = (SKY.cosine > 0.09) & (SKY.cosine < 0.28) & (SKY.lit == 1.0)
    assert low.sum() > 500
    ghi = 0.75 * SKY.clear_w_m2
    dni, dhi = beam_and_diffuse(ghi[None], SKY)
    k = ghi[low] / (SKY.extra_w_m2[low] * SKY.cosine[low])
    # Published: Erbs, Klein & Duffie, Solar Energy 28 (1982) 293, table 1, up to a clearness of 0.8.
    middle = 0.9511 - 0.1604 * k + 4.388 * k**2 - 16.638 * k**3 + 12.336 * k**4
    erbs = np.where(k <= 0.22, 1.0 - 0.09 * k, middle)
    assert k.max() < 0.8
    # 0.03: what the smooth form differs by from the pieces
    assert dhi[0][low] / ghi[low] == pytest.approx(erbs, abs=0.03)
    assert (dni[0][low] * SKY.cosine[low]).sum() / ghi[low].sum() > 0.1
