"""Temperature and snow of generated years."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.inputs.site import Climate
from sunbot.sky.air import daily_course, daily_extremes_c, hourly_temperature_c, snow_days, warmth_scores
from sunbot.sky.draws import draw_years, persistent
from sunbot.sky.reference_sky import DAY_MONTH

LOW = (-6.0, -5.0, -1.0, 3.0, 8.0, 12.0, 14.0, 13.0, 9.0, 5.0, 0.0, -4.0)
CLIMATE = Climate(ghi_kwh_m2_day=(3.0,) * 12, temp_min_c=LOW, temp_max_c=tuple(value + 9.0 for value in LOW))
DRAWS = draw_years(1, first=1, years=400)
SCORES = persistent(DRAWS.light, np.full(365, 0.3))


def by_month(values: np.ndarray) -> np.ndarray:
    return np.array([values[:, month == DAY_MONTH].mean() for month in range(12)])


def test_course_keeps_monthly_means():
    """The smooth course has the twelve means it was made from, and no step at the turn of a month."""
    course = daily_course(np.array(LOW))
    assert by_month(course[None]) == pytest.approx(np.array(LOW))
    assert np.abs(np.diff(np.append(course, course[0]))).max() < 0.35


def test_extremes_meet_the_climate_and_clear_days_have_the_wider_range():
    """Means of daily minimum and maximum are the climate's; a clear winter day is cold and has a wide range."""
    warmth = warmth_scores(CLIMATE, SCORES, DRAWS)
    low, high = daily_extremes_c(CLIMATE, warmth, 1.0 + 0.4 * np.tanh(SCORES))
    # 0.25 K: three standard errors of a 5 K deviation that persists, over 400 months
    assert by_month(low) == pytest.approx(np.array(LOW), abs=0.35)
    assert by_month(high) == pytest.approx(np.array(LOW) + 9.0, abs=0.35)
    assert (high > low).all()
    january, july = DAY_MONTH == 0, DAY_MONTH == 6
    for days, link in ((january, -0.25), (july, 0.2)):
        middle = (low + high)[:, days]
        assert np.sign(np.corrcoef(middle.ravel(), SCORES[:, days].ravel())[0, 1]) == np.sign(link)
        assert np.corrcoef((high - low)[:, days].ravel(), SCORES[:, days].ravel())[0, 1] > 0.9
    assert 0.6 < np.corrcoef(warmth[:, 1:].ravel(), warmth[:, :-1].ravel())[0, 1] < 0.75


def test_hours_reach_the_days_extremes_at_sunrise_and_in_the_afternoon():
    """Coldest in the hour of sunrise, warmest 2 to 3 hours after noon, both within 0.3 K of the day's extremes."""
    low, high = np.full((1, 365), 2.0), np.full((1, 365), 12.0)
    hours = hourly_temperature_c(low, high, noon_h=12.4, daylight_h=np.full(365, 12.0))
    assert hours.min(axis=2) == pytest.approx(2.0, abs=0.3)
    assert hours.max(axis=2) == pytest.approx(12.0, abs=0.3)
    assert set(hours[0].argmin(axis=1)) <= {5, 6}
    assert set(hours[0].argmax(axis=1)) <= {14, 15}


@pytest.mark.parametrize("noon_h", [-6.0, 3.0, 12.0, 15.5, 23.0])
def test_hours_stay_within_the_extremes_under_any_clock(noon_h):
    """Neither polar night nor a clock far from the sun throws the course out of its bounds."""
    rng = np.random.default_rng(1)
    low = rng.normal(0.0, 4.0, (3, 365))
    hours = hourly_temperature_c(low, low + 8.0, noon_h=noon_h, daylight_h=np.linspace(0.0, 24.0, 365))
    assert np.isfinite(hours).all()
    assert hours.min() >= low.min() - 1e-9
    assert hours.max() <= low.max() + 8.0 + 1e-9


def test_snow_falls_as_often_as_asked_in_spells_on_cold_dark_days():
    """The mean number of days is met; spells last about three; snow days are colder and darker than the rest."""
    wish = np.array([6.0, 4.0, 1.0, 0, 0, 0, 0, 0, 0, 0, 1.0, 5.0])
    warmth = warmth_scores(CLIMATE, SCORES, DRAWS)
    snow = snow_days(CLIMATE, wish, scores=SCORES, warmth=warmth, draws=DRAWS)
    days = np.array([snow[:, month == DAY_MONTH].sum(axis=1).mean() for month in range(12)])
    # three standard errors of a count whose spells make it vary by about its own size, over 400 years
    assert days == pytest.approx(wish, rel=0.2, abs=1e-9)
    run = snow.ravel().astype(int)
    assert 2.3 < run.sum() / (np.diff(run) == 1).sum() < 3.8
    january = DAY_MONTH == 0
    covered = snow[:, january]
    assert warmth[:, january][covered].mean() < -0.5
    assert SCORES[:, january][covered].mean() < -0.1
