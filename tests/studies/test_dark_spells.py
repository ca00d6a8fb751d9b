"""Dark spells: the lowest sums of days in a row, and how often they come back."""

from __future__ import annotations

import math
from datetime import date

import numpy as np
import pandas as pd
import pytest

from sunbot.calendar import energy_years
from sunbot.studies.dark_spells import (
    dark_spells,
    days_of,
    fitted_low,
    low_interval,
    low_of_return,
    lowest_sums,
    return_period,
)


def synthetic_years(n: int, seed: int) -> np.ndarray:
    """Invented days: a yearly swing with cloud that lasts some days."""
    rng = np.random.default_rng(seed)
    cloud = np.empty(n * 365)
    cloud[0] = 0.0
    for day, shock in enumerate(rng.standard_normal(n * 365 - 1), start=1):
        cloud[day] = 0.3 * cloud[day - 1] + 0.95 * shock
    season = 2500.0 - 1900.0 * np.cos(2.0 * np.pi * (np.arange(n * 365) % 365 - 180) / 365.0 + np.pi)
    return (season / (1.0 + np.exp(-cloud))).reshape(n, 365)


def by_plain_loop(daily: np.ndarray, days: int) -> tuple[list[float], list[int]]:
    """The definition, day by day, round the ring."""
    flat, n = daily.ravel(), daily.shape[1]
    lows, starts = [], []
    for year in range(daily.shape[0]):
        sums = [sum(flat[(year * n + i + k) % flat.size] for k in range(days)) for i in range(n)]
        lows.append(min(sums))
        starts.append(sums.index(min(sums)))
    return lows, starts


@pytest.mark.parametrize("days", [1, 3, 30])
def test_lowest_sums_agree_with_a_plain_loop(days: int):
    """Each year's least sum of n days, round the ring, equals the loop over days."""
    daily = synthetic_years(3, 7)
    lows, starts = lowest_sums(daily, days)
    loop_lows, loop_starts = by_plain_loop(daily, days)
    assert lows == pytest.approx(loop_lows, rel=1e-9)
    assert starts.tolist() == loop_starts


def test_a_spell_runs_on_into_the_next_year_and_round_the_ring():
    """Two dark days, the last of the last year and the first of the first, are one spell."""
    daily = np.full((2, 10), 5.0)
    daily[1, 9] = daily[0, 0] = 1.0
    lows, starts = lowest_sums(daily, 2)
    assert lows.tolist() == [6.0, 2.0]
    assert starts[1] == 9


def test_a_day_that_a_year_does_not_have_is_jumped_over():
    """A missing day neither counts as dark nor parts its neighbours."""
    daily = np.full((2, 10), 5.0)
    daily[0, 3:6] = [1.0, np.nan, 1.0]
    lows, starts = lowest_sums(daily, 2)
    assert lows.tolist() == [2.0, 10.0]
    assert starts[0] == 3


def test_a_spell_longer_than_a_year_is_refused():
    """Eleven days do not fit into ten."""
    with pytest.raises(ValueError, match="does not fit"):
        lowest_sums(np.ones((2, 10)), 11)


def test_longer_spells_bring_more_in_all_and_no_less_a_day():
    """Law: more days never bring less energy, and the mean day of a longer dark spell is no darker."""
    daily = synthetic_years(20, 3)
    lows = np.array([lowest_sums(daily, n)[0].min() / n for n in (1, 2, 4, 8, 16, 32)])
    assert (np.diff(lows) >= 0.0).all()


def test_gumbel_low_agrees_with_its_formula():
    """Mean 10, standard deviation 2, once in 20 years: 6.2684, the low and not the high of 13.73."""
    # Gumbel's moments for minima, worked by hand: 10 + 2 x 0.7797 x (0.5772 + ln(-ln(0.95))).
    assert low_of_return(10.0, 2.0, 20.0) == pytest.approx(6.2684, abs=5e-5)
    assert low_of_return(10.0, 9.0, 100.0) == 0.0


def test_lows_of_weibulls_law_come_back():
    """Of 20,000 draws from Weibull's law, the 20-year low is that of the law; years without light fall back."""
    lows = 300.0 * np.random.default_rng(4).weibull(4.0, size=20_000)
    # The quantile 1/20 of the law, written out; 2 %: three standard errors of a moments fit to so many draws.
    assert fitted_low(lows, 20.0) == pytest.approx(300.0 * (-math.log(0.95)) ** (1.0 / 4.0), rel=0.02)
    dark = np.array([0.0, 4.0, 5.0, 6.0, 9.0])
    assert fitted_low(dark, 5.0) == low_of_return(dark.mean(), dark.std(ddof=1), 5.0)


def test_gumbel_low_agrees_with_the_law_itself():
    """The low of a Gumbel law for minima with that mean and deviation has probability 1 / T."""
    from scipy.stats import gumbel_l  # the reference for the law; scipy comes with pvlib

    scale = 2.0 * math.sqrt(6.0) / math.pi
    law = gumbel_l(loc=10.0 + 0.5772156649 * scale, scale=scale)
    for years in (2.0, 10.0, 50.0):
        assert low_of_return(10.0, 2.0, years) == pytest.approx(law.ppf(1.0 / years), rel=1e-9)


@pytest.mark.parametrize("days", [5, 10, 30])
def test_lows_of_return_agree_with_plain_quantiles_of_500_years(days: int):
    """Once in 5, 10, 20 years: the law fitted to 500 years meets their plain quantile, and so do intervals of 50."""
    lows = lowest_sums(synthetic_years(500, 11), days)[0]
    held = 0
    for period in (5.0, 10.0, 20.0):
        plain = float(np.quantile(lows, 1.0 / period))
        # 5 %: the law is a fit; the quantile of 500 years itself is known to 1 to 3 %.
        assert fitted_low(lows, period) == pytest.approx(plain, rel=0.05)
        intervals = [low_interval(block, period, seed=1) for block in lows.reshape(10, 50)]
        held += sum(low < plain < high for low, high in intervals)
    # Of 30 intervals of 95 %; the three of a block share its luck, so that one unlucky block costs three.
    assert held >= 26


def test_return_period_counts_ranks():
    """The darkest of 19 years comes once in 20; half of them once in two; darker than all never."""
    lows = np.arange(1.0, 20.0)
    assert return_period(lows, 1.0) == 20.0
    assert return_period(lows, 10.0) == 2.0
    assert return_period(lows, 0.5) == math.inf


def test_no_level_past_twice_the_years_at_hand():
    """Twenty years tell what comes once in 40, not in 41; four years tell nothing rare at all."""
    lows = np.linspace(5.0, 9.0, 20)
    low_interval(lows, 40.0, seed=1)
    with pytest.raises(ValueError, match="20 years do not tell what comes once in 41"):
        low_interval(lows, 41.0, seed=1)
    with pytest.raises(ValueError, match="4 years do not tell"):
        low_interval(lows[:4], 5.0, seed=1)


def test_the_interval_follows_the_seed_and_narrows_with_years():
    """Same seed, same interval; ten times the years, an interval under half as wide."""
    lows = lowest_sums(synthetic_years(500, 5), 10)[0]
    few, many = low_interval(lows[:50], 20.0, seed=3), low_interval(lows, 20.0, seed=3)
    assert few == low_interval(lows[:50], 20.0, seed=3)
    assert many[1] - many[0] < 0.5 * (few[1] - few[0])


def test_spells_carry_date_and_return_period():
    """A dark week put into the seventh of ten years is found, dated, and comes once in eleven."""
    daily = synthetic_years(10, 2) + 2000.0
    daily[6, 100:107] = 10.0
    first = np.array([f"{2001 + y}-08-01" for y in range(10)], dtype="datetime64[D]")
    spells = {s.days: s for s in dark_spells(daily, first[:, None] + np.arange(365))}
    assert sorted(spells) == [1, 3, 5, 10, 20, 30]
    assert spells[5].wh == pytest.approx(50.0)
    assert spells[5].start == date(2007, 11, 9)
    assert spells[5].return_years == 11.0
    assert all(spell.low <= spell.wh <= spell.high for spell in spells.values())
    assert spells[5].to_dict()["from"] == "2007-11-09"


def test_one_year_tells_no_return_period():
    """A single year has a darkest spell, but neither a return period nor an interval."""
    daily = synthetic_years(1, 2)
    dates = np.datetime64("2001-01-01") + np.arange(365)[None, :]
    (spell,) = dark_spells(daily, dates, lengths=(3,))
    assert (spell.return_years, spell.low, spell.high) == (None, None, None)


def test_days_of_energy_years_keep_energy_and_dates():
    """Two years of hours, one a leap year: each day's energy and date come back, and nothing is lost."""
    times = pd.date_range("2003-01-01 00:30", "2004-12-31 23:30", freq="h", tz="UTC", unit="s")
    watts = np.asarray(times.day_of_year, dtype=np.float64)
    lanes = energy_years(times, step_h=1.0, zone="UTC", first_month=8)
    daily, dates = days_of(watts[lanes.row], times, lanes, zone="UTC")
    assert np.nansum(daily) == pytest.approx(watts.sum())
    there = ~np.isnan(daily)
    assert there.sum() == 731
    day_of_year = pd.DatetimeIndex(dates[there].ravel()).day_of_year
    assert daily[there] == pytest.approx(24.0 * np.asarray(day_of_year))
    assert str(dates[0, 0]).endswith("-08-01")
