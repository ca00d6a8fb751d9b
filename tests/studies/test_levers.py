"""What moves the answer: each lever is the study run with one thing changed."""

from dataclasses import replace

import numpy as np
import pytest

from sunbot.studies.chain import Chain
from sunbot.studies.levers import levers
from sunbot.studies.verdict import verdict_on


@pytest.fixture(scope="module")
def case(robots):
    """A robot on the edge in ten years, and its levers."""
    robot = robots.robot(watts=30.0, battery_ah=12.0, load_w=0.5)
    chain = Chain(robots.quick_weather(robot.site, years=10))
    return chain, robot, levers(chain, robot)


def alone(chain, robot, lanes):
    """Survival and hours out of a robot run by itself."""
    balance = chain.run(robot, lanes=lanes, keep="verdict")
    return float(verdict_on(balance, robot.target).survival[0]), float(balance.hours_out.sum(axis=0).mean())


def lever(found, what, change):
    return next(entry for entry in found if (entry.what, entry.change) == (what, change))


def test_every_change_asked_for_is_there(case):
    """Light, load, panel and battery by 10 and 20 % either way, three of dirt, and the cold."""
    _, _, found = case
    changes = {(entry.what, entry.change) for entry in found}
    assert len(changes) == len(found) == 4 * 4 + 3 + 1
    for what in ("light", "load", "panel", "battery"):
        assert {change for name, change in changes if name == what} == {"-20%", "-10%", "+10%", "+20%"}
    assert ("air", "10 K colder") in changes
    assert ("dirt", "clean") in changes


def test_levers_equal_robots_with_that_one_thing_changed(case):
    """A larger battery, a smaller panel, a heavier load and cold air: the lever is what such a robot gets by itself."""
    chain, robot, found = case
    lanes = chain.lanes(robot)
    battery = robot.battery.model_copy(update={"capacity_ah": robot.battery.capacity_ah * 1.2})
    panel = robot.panels[0].model_copy(update={"watts": 24.0, "imp_a": 24.0 / 18, "isc_a": 24.0 / 16.7})
    colder = chain.weather.table.assign(temp_air=chain.weather.table["temp_air"] - 10.0)
    cases = {
        ("battery", "+20%"): (chain, robot.model_copy(update={"battery": battery})),
        ("panel", "-20%"): (chain, robot.model_copy(update={"panels": (panel,)})),
        ("air", "10 K colder"): (Chain(replace(chain.weather, table=colder)), robot),
    }
    for (what, change), (its_chain, changed) in cases.items():
        survival, hours = alone(its_chain, changed, lanes)
        assert lever(found, what, change).survival == survival
        assert lever(found, what, change).hours_out_per_year == pytest.approx(hours, rel=1e-6, abs=1e-6)


def test_a_clean_panel_is_as_much_more_light(case):
    """3 % dirt gone is 1 / 0.97 of the light; with 10 points more, 0.87 / 0.97."""
    chain, robot, found = case
    for change, loss in (("clean", 0.0), ("10 points more", 0.13)):
        dirty = robot.panels[0].model_copy(update={"dirt_loss": (loss,) * 12})
        _, hours = alone(chain, robot.model_copy(update={"panels": (dirty,)}), chain.lanes(robot))
        # 5 %: cells in dimmer light are a little less efficient than a plain factor says.
        assert lever(found, "dirt", change).hours_out_per_year == pytest.approx(hours, rel=0.05, abs=2.0)


def test_more_light_and_less_load_never_harm(case):
    """Law, without skippable work: survival rises with light, panel and battery, and falls with load."""
    _, _, found = case
    for what, sign in (("light", 1), ("panel", 1), ("battery", 1), ("load", -1)):
        row = [lever(found, what, change).survival for change in ("-20%", "-10%", "+10%", "+20%")]
        assert (sign * np.diff(row) >= 0).all()


def test_the_strongest_comes_first(case):
    """Ranked by reach in survival, the changes of one thing together."""
    chain, robot, found = case
    base, _ = alone(chain, robot, chain.lanes(robot))
    whats = list(dict.fromkeys(entry.what for entry in found))
    assert [entry.what for entry in found] == sorted((e.what for e in found), key=whats.index)
    reach = [max(abs(entry.survival - base) for entry in found if entry.what == what) for what in whats]
    assert reach == sorted(reach, reverse=True)
    assert reach[0] > 0, "this robot was to stand on the edge"
