"""The spread of days: its shape, its ends, and the shock that makes months vary."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import ndtr

from sunbot.sky.daily_light import (
    MonthLight,
    clearness,
    daily_scores,
    mean_clearness,
    month_light,
    shape_for,
    top_clearness,
)
from sunbot.sky.draws import draw_years
from sunbot.sky.reference_sky import DAY_MONTH

SHARE = (np.arange(200_000) + 0.5) / 200_000


@pytest.mark.parametrize("clear", [np.inf, 0.55])
@pytest.mark.parametrize("shape", [-300.0, -5.0, -1e-4, 0.0, 2e-4, 3.0, 40.0, 600.0])
def test_mean_is_that_of_the_days(shape, clear):
    """The closed mean equals the mean of many days, cut at the clear sky or not, for any shape."""
    days = np.minimum(clearness(SHARE, shape, low=0.04, high=0.65), clear)
    assert mean_clearness(shape, low=0.04, high=0.65, clear=clear) == pytest.approx(days.mean(), rel=2e-5)
    assert (np.diff(days) >= 0.0).all()
    assert days.min() >= 0.04
    assert days.max() <= 0.65


def test_shape_gives_the_mean_back():
    """From nearly all dark to nearly all clear days the mean is met."""
    for mean in np.linspace(0.045, 0.6, 60):
        shape = shape_for(mean, low=0.04, high=0.65, clear=0.62)
        assert mean_clearness(shape, low=0.04, high=0.65, clear=0.62) == pytest.approx(mean, rel=1e-9)


def test_top_has_a_floor():
    """Below a mean clearness of about 0.2 the published top falls away; ours stays at 0.60."""
    assert top_clearness(0.10) == 0.60
    assert 0.60 < top_clearness(0.5) < top_clearness(0.7)


def test_shock_meets_the_variation_asked_for():
    """A sampled month of persistent days with the solved shock varies as asked, whatever the skew."""
    rng = np.random.default_rng(5)
    for mean, wish in ((0.25, 0.25), (0.4, 0.25), (0.6, 0.15)):
        month = month_light(mean, 0.68, np.ones(30), keep=0.29, variation=wish)
        days = rng.standard_normal((20_000, 30))
        for day in range(1, 30):
            days[:, day] = 0.29 * days[:, day - 1] + np.sqrt(1 - 0.29**2) * days[:, day]
        score = np.sqrt(1.0 - month.shock**2) * days + month.shock * rng.standard_normal((20_000, 1))
        means = month.share_of_clear(ndtr(score)).mean(axis=1)
        # 1.5 %: three standard errors of a standard deviation from 20,000 months
        assert means.std() / means.mean() == pytest.approx(wish, rel=0.015)
        assert means.mean() * 0.68 == pytest.approx(mean, rel=0.01)


def test_dark_month_has_no_light():
    """Polar night: a month of no light stays one."""
    month = month_light(0.0, 0.0, np.zeros(31), keep=0.29, variation=0.2)
    assert (month.share_of_clear(SHARE) == 0.0).all()


def test_bad_months_come_in_company():
    """A month whose shock is all of it correlates by 0.3 with the next and by its square with the one after."""
    # Common practice: 0.3. Published: Yule, Phil. Trans. A 226 (1927) 267: a first-order autoregression
    # correlates by rho^lag.
    months = tuple(MonthLight(0.0, 0.04, 0.65, 0.68, 0.29, shock=1.0) for _ in range(12))
    scores = daily_scores(months, draw_years(3, first=1, years=1500))
    shocks = scores[:, np.flatnonzero(np.diff(DAY_MONTH, prepend=-1))]
    assert (scores == shocks[:, DAY_MONTH]).all()
    # 0.03: four standard errors of a correlation of 18,000 months
    for lag, wish in ((1, 0.3), (2, 0.09)):
        assert np.corrcoef(shocks.ravel()[lag:], shocks.ravel()[:-lag])[0, 1] == pytest.approx(wish, abs=0.03)
