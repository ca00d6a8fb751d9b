"""The season as a whole: its parts agree with the check they rest on, and with plain counting."""

import json

import numpy as np
import pytest

from sunbot.inputs.site import Site
from sunbot.sky import weather_for
from sunbot.studies import check
from sunbot.studies.chain import Chain
from sunbot.studies.dark_spells import fitted_low, low_interval, lowest_sums
from sunbot.studies.seasons import season, sun_hours

SEASON_WORDS = {"dark_spells", "calendar", "levers", "best_tilt_deg"}
CHECK_WORDS = {
    "tool",
    "inputs",
    "verdict",
    "months",
    "autonomy_h",
    "outages",
    "unserved_share",
    "energy_wh_per_year",
    "light_to_panel",
    "cautions",
}


@pytest.fixture(scope="module")
def found(robots):
    """A robot on the edge, with a mast and work to do, in six years of six-hour steps."""
    mast = robots.robot().panels[0].model_copy(update={"obstructions": ((160.0, 200.0, 60.0),)})
    robot = robots.robot(watts=30.0, load_w=0.5, work_w=12.0).model_copy(update={"panels": (mast,)})
    return season(robot, weather=robots.quick_weather(robot.site, years=6))


def test_the_document_has_all_words_of_check_and_of_the_season(found):
    """Every word of the design, plain JSON, and the same again byte by byte."""
    document = found.to_dict()
    assert document.keys() >= CHECK_WORDS | SEASON_WORDS
    assert json.dumps(document, allow_nan=False) == json.dumps(found.to_dict(), allow_nan=False)
    assert document["dark_spells"][0].keys() >= {"days", "wh", "from", "return_years", "low", "high", "wh_per_w"}
    assert document["calendar"][0].keys() == {"month", "load", "minutes_per_day"}
    assert document["levers"][0].keys() >= {"what", "change", "survival"}
    assert {len(cost["harvest_wh_day"]) for cost in document["headings"]} == {12}
    assert [row["month"] for row in document["sun_hours"]] == list(range(1, 13))
    assert document["best_tilt_deg"] == document["best_mount"]["tilt_deg"]


def test_the_words_of_check_say_what_check_says(robots, found):
    """Also how close it was: the ways out, or the load that would still fit."""
    whole, checked = found.to_dict(), check(found.robot, weather=found.check.weather).to_dict()
    assert not found.check.met
    assert whole["ways_out"]
    assert {word: whole[word] for word in checked} == checked


def test_daily_harvest_sums_to_that_of_the_months(found):
    """No day is lost or counted twice between the daily sums and the month table."""
    months, lanes = found.months, found.check.lanes
    hours = np.array([lanes.step_h[lanes.month == month].sum() for month in range(1, 13)])
    total = float((months["harvest_wh_day"] * hours / 24.0).sum())
    # 1e-6: harvest of an mppt does not follow the battery, so both add the same numbers.
    assert np.nansum(found.daily_harvest_wh) == pytest.approx(total, rel=1e-6)


def test_spells_are_the_lowest_of_the_daily_harvest(found):
    """Each spell is the darkest of its length, starts on a day that exists, and counts per rated watt."""
    days = [spell.days for spell in found.dark_spells]
    assert days == [1, 3, 5, 10, 20, 30]
    flat = found.daily_harvest_wh.ravel()
    ring = np.concatenate((flat, flat[:29]))
    for spell in found.dark_spells:
        plain = min(ring[at : at + spell.days].sum() for at in range(flat.size))
        assert spell.wh == pytest.approx(plain, rel=1e-9)
        assert spell.return_years == 7.0
    per_watt = [spell["wh_per_w"] for spell in found.to_dict()["dark_spells"]]
    assert per_watt == pytest.approx([spell.wh / 20.0 * 20.0 / found.robot.watts for spell in found.dark_spells])


def test_the_fan_opens_upwards_and_starts_above_the_lowest(found):
    """Quantiles of charge rise from column to column, and none lies below the lowest charge of its month."""
    fan = found.charge_fan.to_numpy()
    assert (np.diff(fan, axis=1) >= 0).all()
    assert (fan[:, 0] >= found.months["lowest_soc"].to_numpy() - 1e-12).all()


def test_the_worst_fortnight_is_the_one_with_the_least_charge(found):
    """Fourteen days of steps in a row, of the year with most unserved energy, none of its fortnights emptier."""
    steps, check = found.worst.steps, found.check
    assert len(steps) * check.weather.step_h == 14 * 24
    assert set(np.diff(steps.index.as_unit("s").asi8)) == {6 * 3600}
    assert steps.index[0].date() == found.worst.start
    assert steps.index[0].utcoffset().total_seconds() == 3600.0  # the standard clock of the zone, summer and winter
    unserved = check.balance.unserved_wh[:, :, 0].sum(axis=0)
    year = int(np.argmax(unserved))
    soc = check.trace.soc[check.lanes.step_h[:, year] > 0, year]
    means = [soc[at : at + 56].mean() for at in range(0, soc.size - 55, 4)]
    assert steps["soc"].mean() == pytest.approx(min(means), rel=1e-12)
    first = check.weather.times[check.lanes.row[0, year]]
    assert found.worst.year_start == first.tz_convert(steps.index.tz).date()


def test_sun_hours_are_those_of_the_field(found):
    """On an open field nothing hides behind the horizon, and the robot is in its own way for a part of the day."""
    hours = sun_hours(found.sun)
    assert (hours["up_h_day"] > 8).all()
    assert not hours["behind_horizon_h_day"].any()
    assert (hours["behind_robot_h_day"] < hours["up_h_day"]).all()


def test_watcher_hears_rising_shares(robots):
    """Progress rises and never passes the whole; a deployment keeps its spells within it."""
    heard = []
    robot = robots.robot(deployment={"from": "11-01", "to": "11-12"})
    result = season(robot, weather=robots.quick_weather(robot.site, years=2), watcher=heard.append)
    assert heard == sorted(heard)
    assert heard[-1] <= 1.0
    assert [spell.days for spell in result.dark_spells] == [1, 3, 5, 10]
    lows, starts = lowest_sums(result.daily_harvest_wh, 10, ring=False)
    assert starts.max() <= 2
    assert result.dark_spells[-1].wh == pytest.approx(lows.min())
    assert len(result.worst.steps) == 12 * 4
    assert result.calendar is None
    assert result.to_dict()["calendar"] == []


def test_one_typical_year_answers_too(robots):
    """One year: no return periods, and the fan is a line."""
    site = Site(**(robots.HILL | {"weather": {"source": "clear-sky"}}))
    robot = robots.robot(site=site, deployment={"from": "02-01", "to": "03-10"}, work_w=5.0)
    result = season(robot, weather=weather_for(site))
    assert {spell.return_years for spell in result.dark_spells} == {None}
    fan = result.charge_fan.dropna()
    assert fan.index.tolist() == [2, 3]
    assert (fan["p10"] == fan["p90"]).all()
    json.dumps(result.to_dict(), allow_nan=False)


def test_return_levels_hold_the_plain_quantiles_of_500_years(robots):
    """Harvest of 500 generated years: intervals stated from 50 of them hold the plain quantiles of all.

    The law fitted to all 500 meets those quantiles to a tenth, too.
    """
    robot = robots.robot()
    chain = Chain(robots.quick_weather(robot.site, years=500))
    offer_w = chain.supply(robot, accounts=False).offer_w[:, 0, 0]
    daily_wh = offer_w.reshape(-1, 4).sum(axis=1).reshape(500, 365) * 6.0
    held = asked = 0
    for days in (3, 5, 10, 30):
        lows = lowest_sums(daily_wh, days)[0]
        for period in (5.0, 10.0, 20.0):
            plain = float(np.quantile(lows, 1.0 / period))
            assert fitted_low(lows, period) == pytest.approx(plain, rel=0.10)
            intervals = [low_interval(block, period, seed=1) for block in lows.reshape(10, 50)]
            held += sum(low <= plain <= high for low, high in intervals)
            asked += 10
    # Of intervals of 95 %, of which the three of a block share its luck: nine in ten at least.
    assert held >= 0.9 * asked
