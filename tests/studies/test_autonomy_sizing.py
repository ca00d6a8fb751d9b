"""The arithmetic of autonomy days on a robot and its weather."""

from __future__ import annotations

from dataclasses import replace

import pytest

from sunbot.studies.autonomy_sizing import size_by_autonomy
from sunbot.studies.chain import Chain


def test_the_heater_is_part_of_the_load_and_its_warmth_of_the_cold(robots):
    """At -9 degC all year 10 K at 0.1 W/K are 1 W more all day: panel and battery grow by it, the cold by 10 K less."""
    weather = robots.quick_weather(robots.hill(), years=1)
    chain = Chain(replace(weather, table=weather.table.assign(temp_air=-9.0)))
    robot = robots.robot()
    heater = {"heater_w": 3.0, "box_loss_w_per_k": 0.1, "heater_on_below_c": 1.0}
    heated = robot.model_copy(update={"battery": robot.battery.model_copy(update=heater)})
    plain, warm = (size_by_autonomy(chain, one, taken=None) for one in (robot, heated))
    load_w = chain.asked_w(robot).mean()
    assert warm.watts == pytest.approx(plain.watts * (load_w + 1.0) / load_w)
    # From memory: lithium cells hold 80 % at 0 degC and 0.8 + 0.2 / 25 at 1 degC; 55 % at -20 degC, so 68.75 % at -9.
    cold, at_one = 0.8 - 9 * 0.25 / 20, 0.8 + 0.2 / 25
    assert warm.battery_ah == pytest.approx(plain.battery_ah * (load_w + 1.0) / load_w * cold / at_one)
