"""What the pack cannot give or take within a step, in the answers of check and pick."""

from __future__ import annotations

import pytest

from sunbot.studies import pick
from sunbot.studies.cautions import check_cautions
from sunbot.studies.chain import Chain
from sunbot.studies.pack_cautions import pack_cautions
from sunbot.studies.verdict import verdict_on


@pytest.fixture(scope="module")
def chain(robots):
    return Chain(robots.quick_weather(robots.hill(), years=3))


def told(chain, robot):
    found = pack_cautions(chain, robot)
    assert len({caution.code for caution in found}) == len(found)
    return {caution.code: caution.text for caution in found}


def charged_by(robots, kind, *, watts=60.0, battery_ah=2.0, chemistry="li-ion", cells=3, **controller):
    battery = {"chemistry": chemistry, "cells_in_series": cells, "capacity_ah": battery_ah, "box_lag_h": 0.0}
    return robots.robot(watts=watts, battery=battery, controller={"kind": kind, **controller})


def test_a_short_burst_is_told_where_the_balance_sees_only_its_mean(robots, chain):
    """600 W for a hundredth of the time: 6 W in the mean, more than the cold, worn pack gives."""
    # Three li-ion cells at 10 % stand at 3 x 3.392 = 10.18 V; worn, 12 Ah have 0.18 ohm Ah x 2 / 12 = 30 mohm at
    # 25 degC, which doubles every 35 K: at most 863 W at 25 degC and 354 W at -20 degC.
    burst = {"name": "drill", "rail": "motors", "watts": 600.0, "hours": [[6, 18]], "on_fraction": 0.01}
    robot = robots.robot(watts=90.0, load=[burst])
    balance = chain.run(robot)
    assert not balance.cannot_give[0]
    found = check_cautions(chain, robot, balance, verdict_on(balance, robot.target), survival_coarse=0.0)
    (weak,) = [caution for caution in found if caution.code == "pack-too-weak"]
    assert '"drill" alone asks for 600 W' in weak.text
    assert "10.2 V at rest" in weak.text
    most_w = float(weak.text.split("can give ")[1].split(" W")[0])
    assert 354.0 < most_w < 863.0
    for watts, fires in ((most_w + 2.0, True), (most_w - 2.0, False)):
        near = robots.robot(watts=90.0, load=[{**burst, "watts": watts}])
        assert ("pack-too-weak" in told(chain, near)) == fires


def test_a_pack_too_weak_is_told_once(robots, chain):
    """Where the balance finds it too, there is still one word."""
    robot = robots.robot(watts=60.0, battery_ah=2.0, load_w=200.0)
    balance = chain.run(robot)
    assert balance.cannot_give[0]
    found = check_cautions(chain, robot, balance, verdict_on(balance, robot.target), survival_coarse=0.0)
    assert [caution.code for caution in found].count("pack-too-weak") == 1


def test_a_load_of_the_months_the_robot_is_away_asks_for_nothing(robots, chain):
    """Out from May to August, a burst in December does not count."""
    burst = {"name": "drill", "rail": "motors", "watts": 3000.0, "on_fraction": 0.01, "months": [12]}
    assert "pack-too-weak" in told(chain, robots.robot(load=[burst]))
    assert "pack-too-weak" not in told(chain, robots.robot(load=[burst], deployment={"from": "05-01", "to": "08-31"}))


@pytest.mark.parametrize(
    ("kind", "pushed", "remedy"),
    [
        # isc = 60 W / 16.7 V = 3.59 A; 60 W x 0.95 / 10.18 V = 5.60 A
        ("direct", "3.59 A", "A diode limits nothing"),
        ("pwm", "3.59 A", "must be set to that limit (max_charge_a = 1)"),
        ("mppt", "5.6 A", "must be set to that limit (max_charge_a = 1)"),
    ],
)
def test_more_than_the_cells_take_is_told(robots, chain, kind, pushed, remedy):
    """2 Ah of li-ion take half their capacity per hour, 1 A; the panels can push more."""
    text = told(chain, charged_by(robots, kind))["charge-rate"]
    assert f"can push {pushed} into the battery" in text
    assert "take 1 A (0.5 x 2 Ah)" in text
    assert remedy in text


@pytest.mark.parametrize(("kind", "enough_ah"), [("direct", 7.186), ("pwm", 7.186), ("mppt", 11.2)])
def test_a_battery_that_takes_it_draws_no_word(robots, chain, kind, enough_ah):
    """Half its capacity per hour against 3.593 and 5.601 A: just enough is silent, 2 % less is not."""
    assert "charge-rate" not in told(chain, charged_by(robots, kind, battery_ah=1.01 * enough_ah))
    assert "charge-rate" in told(chain, charged_by(robots, kind, battery_ah=0.98 * enough_ah))


@pytest.mark.parametrize("kind", ["pwm", "mppt"])
def test_a_controller_set_to_what_the_cells_take_holds_it(robots, chain, kind):
    """1 A for 2 Ah is silent, 1.1 A is not; behind a diode the key holds nothing."""
    assert "charge-rate" not in told(chain, charged_by(robots, kind, max_charge_a=1.0))
    assert "can push 1.1 A" in told(chain, charged_by(robots, kind, max_charge_a=1.1))["charge-rate"]
    assert "can push 3.59 A" in told(chain, charged_by(robots, "direct", max_charge_a=1.0))["charge-rate"]


def test_in_the_cold_lithium_iron_phosphate_takes_less(robots, chain):
    """A fifth of its capacity per hour below 15 degC: told by what the panels do give then, not by their name-plate."""
    # common practice: 0.5 and 0.2 per hour; 60 W x 0.95 / 12.4 V = 4.6 A, under 5 A but over 2 A
    cells = {"chemistry": "lifepo4", "cells": 4, "battery_ah": 10.0}
    text = told(chain, charged_by(robots, "mppt", **cells))["charge-rate"]
    assert "while the box is cold" in text
    assert "take 2 A (0.2 x 10 Ah)" in text
    assert "max_charge_a = 2)" in text
    warm = told(chain, charged_by(robots, "mppt", **{**cells, "battery_ah": 5.0}))["charge-rate"]
    assert "take 2.5 A (0.5 x 5 Ah; 1 A in the cold)" in warm
    for found in (
        told(chain, charged_by(robots, "mppt", **cells, max_charge_a=2.0)),
        told(chain, charged_by(robots, "mppt", **{**cells, "battery_ah": 23.0})),
    ):
        assert "charge-rate" not in found


def test_pick_speaks_of_the_pair_it_recommends_not_of_the_one_filed(robots):
    """A filed battery that takes the current is no comfort where a tenth of it is recommended."""
    weather = robots.quick_weather(robots.hill(), years=2)
    filed = robots.robot(watts=60.0, battery_ah=200.0, load_w=0.2)
    assert not pack_cautions(Chain(weather), filed)
    result = pick(filed, watts=(60.0,), weather=weather)
    (found,) = [caution for caution in result.cautions if caution.code == "charge-rate"]
    assert f"x {result.recommended.battery_ah:.3g} Ah" in found.text
