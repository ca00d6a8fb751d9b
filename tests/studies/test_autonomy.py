"""How long a full battery lasts."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from sunbot.storage import usable_wh
from sunbot.studies.autonomy import autonomy_of, darkest_week_w
from sunbot.studies.autonomy_sizing import size_by_autonomy
from sunbot.studies.chain import Chain


@pytest.fixture(scope="module")
def chain(robots):
    return Chain(robots.quick_weather(robots.hill(), years=2))


def test_the_darkest_week_is_found_by_a_plain_sum():
    """Of hourly harvest over two years, also the week that runs over their seam counts."""
    watts = np.random.default_rng(1).uniform(5.0, 10.0, size=(1000, 2))
    watts[-100:, 1], watts[:100, 0] = 1.0, 1.0  # the dark spell lies where the ring closes
    whole = np.concatenate([watts[:, 0], watts[:, 1]])
    ring = np.concatenate([whole, whole])
    expected = min(ring[at : at + 168].mean() for at in range(whole.size))
    hours = np.ones_like(watts)
    assert darkest_week_w(watts, hours, ring=True) == pytest.approx(expected)
    alone = min(watts[at : at + 168, year].mean() for year in range(2) for at in range(1000 - 168 + 1))
    assert darkest_week_w(watts, hours, ring=False) == pytest.approx(alone)
    assert alone > expected


def test_padding_is_no_dark_step():
    """Steps of no length do not count as hours without light."""
    watts, hours = np.full((400, 1), 3.0), np.ones((400, 1))
    watts[200:230], hours[200:230] = 0.0, 0.0
    assert darkest_week_w(watts, hours, ring=True) == pytest.approx(3.0)


@pytest.mark.parametrize(("chemistry", "cells"), [("lifepo4", 4), ("li-ion", 3), ("nimh", 10), ("lead-acid", 6)])
@pytest.mark.parametrize("rail", ["none", "linear"])
def test_hours_in_the_dark_are_those_of_the_balance(robots, chemistry, cells, rail):
    """A load of so many amperes, straight or behind a linear rail, at the voltages a discharging pack really has."""
    rails = [{"name": "logic", "kind": rail} | ({} if rail == "none" else {"volts": 5.0, "idle_a": 0.005})]
    battery = {"chemistry": chemistry, "cells_in_series": cells, "capacity_ah": 12.0, "self_discharge_pct_month": 0.0}
    robot = robots.robot(
        watts=1e-4,
        controller={"kind": "mppt", "own_use_w": 0.0},
        battery=battery,
        rail=rails,
        load=[{"name": "computer", "rail": "logic", "amps": 0.25}],
        deployment={"from": "05-01", "to": "06-30"},
    )
    mild = robots.quick_weather(robots.hill(), years=1, every=1)
    mild = replace(mild, table=mild.table.assign(temp_air=25.0))
    chain = Chain(mild)
    trace = chain.run(robot, keep="trace").trace
    hours = float(trace.on[: int(np.argmax(trace.on[:, 0] < 1)) + 1, 0].sum())
    # 2 %: the draw is taken at the pack's rest voltage, the balance has the drop in its resistance too
    assert autonomy_of(chain, robot).dark_worn_h == pytest.approx(hours, rel=0.02)


def test_hours_in_the_dark_are_usable_energy_over_the_draw(chain, robots):
    """At a small draw, where losses are small: usable watt-hours over watts, worn and new, at most a hair less."""
    robot = robots.robot(load_w=0.2, battery_ah=20.0)
    found = autonomy_of(chain, robot)
    asked = chain.demand(robot).essential.total_w.mean() + chain.supply(robot).own_use_w
    for age, hours in (("new", found.dark_new_h), ("worn", found.dark_worn_h)):
        warm_h = usable_wh(chain.pack(robot, age=age), 20.0, temp_c=25.0) / asked
        # at 1 degC the cells hold less, and self-discharge takes its part over some 300 hours
        assert 0.7 * warm_h < hours < 1.02 * warm_h
    assert found.dark_worn_h < found.dark_new_h


def test_light_lengthens_it_and_enough_light_carries_without_end(chain, robots):
    """The darkest week gives at least as many hours as the dark; a panel that carries the load has no end: null."""
    thin, fat = autonomy_of(chain, robots.robot(watts=5.0)), autonomy_of(chain, robots.robot(watts=400.0))
    assert thin.darkest_week_worn_h > thin.dark_worn_h
    assert fat.darkest_week_worn_h is None
    assert fat.to_dict()["darkest_week"] == {"new": None, "worn": None}


def test_the_hungriest_month_counts_and_of_equal_ones_the_coldest(chain, robots):
    """A lamp in May makes May the month; a steady load leaves it to the cold."""
    computer, lamp = robots.robot().loads[0], robots.robot().loads[0].model_copy(update={"name": "l", "months": (5,)})
    assert autonomy_of(chain, robots.robot().model_copy(update={"loads": (computer, lamp)})).worst_month == 5
    assert autonomy_of(chain, robots.robot()).worst_month in (1, 2, 12)


def in_frost(chain):
    """The same years without light in air a little around -8 degC: at which hour of the day it ends hardly counts."""
    hour = chain.weather.times.hour.to_numpy()
    air_c = -8.0 + np.sin(2 * np.pi * (hour - 9) / 24)
    return Chain(replace(chain.weather, table=chain.weather.table.assign(ghi=0.0, dni=0.0, dhi=0.0, temp_air=air_c)))


@pytest.mark.parametrize(
    ("heater", "share"),
    [
        ({"heater_w": 2.0}, 1.0),  # at full power without end
        ({"heater_w": 2.0, "box_loss_w_per_k": 0.1}, 0.9 / 2.0),  # 9 K in the mean
        ({"heater_w": 0.3, "box_loss_w_per_k": 0.1}, 1.0),  # never enough
        ({}, 0.0),
    ],
)
def test_the_hours_of_a_heated_pack_are_those_of_the_whole_balance_without_light(chain, robots, heater, share):
    """From a full start to the first cut of a January in frost, the heater's draw included: within 2 %."""
    frost = in_frost(chain)
    robot = robots.robot(deployment={"from": "01-01", "to": "01-31"}, battery_ah=20.0)
    robot = robot.model_copy(update={"battery": robot.battery.model_copy(update=heater)})
    run, lanes = frost.run(robot, keep="trace"), frost.lanes(robot)
    until_cut_h = (run.trace.on * lanes.step_h).sum(axis=0)
    assert (run.outages == 1).all()
    assert autonomy_of(frost, robot).dark_worn_h == pytest.approx(until_cut_h.mean(), rel=0.02)
    heated_wh = run.ledger.heater[:, 0]
    assert heated_wh == pytest.approx(share * heater.get("heater_w", 0.0) * until_cut_h, rel=0.05)


def test_a_heater_makes_the_cold_month_the_hungriest(chain, robots):
    """A lamp in July, outdone by the heater in the cold."""
    robot = robots.robot()
    lamp = robot.loads[0].model_copy(update={"name": "lamp", "months": (7,)})
    lit = robot.model_copy(update={"loads": (robot.loads[0], lamp)})
    heated = lit.model_copy(update={"battery": lit.battery.model_copy(update={"heater_w": 20.0})})
    assert autonomy_of(chain, lit).worst_month == 7
    assert autonomy_of(chain, heated).worst_month in (1, 2, 12)
    assert autonomy_of(chain, heated).dark_worn_h < 0.5 * autonomy_of(chain, robot).dark_worn_h


def test_a_load_the_pack_cannot_give_lasts_no_time_and_never_less(chain, robots):
    """No negative hours."""
    found = autonomy_of(chain, robots.robot(load_w=500.0, battery_ah=1.0))
    assert found.dark_worn_h == pytest.approx(0.0, abs=0.05)
    assert min(found.dark_worn_h, found.dark_new_h) >= 0.0


def test_no_light_at_all_is_the_dark(robots):
    """Where no light comes in, both answers are the same."""
    weather = robots.quick_weather(robots.hill(), years=1)
    dark = Chain(replace(weather, table=weather.table.assign(ghi=0.0, dni=0.0, dhi=0.0)))
    found = autonomy_of(dark, robots.robot())
    assert found.darkest_week_worn_h == pytest.approx(found.dark_worn_h)


def warmer_air(chain, kelvin):
    table = chain.weather.table
    return Chain(replace(chain.weather, table=table.assign(temp_air=table["temp_air"] + kelvin)))


def test_a_box_warmer_than_the_air_is_a_box_in_warmer_air(chain, robots):
    """What the cells feel decides: 12 K in the box or outside give the same hours, and more than none of it."""
    robot = robots.robot()
    boxed = robot.model_copy(update={"battery": robot.battery.model_copy(update={"box_rise_c": 12.0})})
    found, outside = autonomy_of(chain, boxed), autonomy_of(warmer_air(chain, 12.0), robot)
    assert found.dark_worn_h == pytest.approx(outside.dark_worn_h, rel=1e-9)
    assert found.dark_worn_h > 1.01 * autonomy_of(chain, robot).dark_worn_h


def test_the_arithmetic_counts_the_cold_in_the_box(chain, robots):
    """The share of capacity left is that of the box: 12 K in it or outside size the same, smaller, battery."""
    robot = robots.robot()
    boxed = robot.model_copy(update={"battery": robot.battery.model_copy(update={"box_rise_c": 12.0})})
    found_ah = size_by_autonomy(chain, boxed, taken=None).battery_ah
    assert found_ah == pytest.approx(size_by_autonomy(warmer_air(chain, 12.0), robot, taken=None).battery_ah, rel=1e-9)
    assert found_ah < 0.99 * size_by_autonomy(chain, robot, taken=None).battery_ah
