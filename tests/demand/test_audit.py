"""What the audit of rails finds, and what it must not."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.demand import rail_cautions
from sunbot.demand.audit import rail_margin_v

SOC = np.array([0.0, 0.1, 0.5, 1.0])
REST_V = np.array([10.0, 12.0, 13.0, 14.0])
COMPUTER = {"name": "computer", "rail": "logic", "watts": 5.0}
SHORT = {"length_m": 0.01, "area_mm2": 1.5}


def cautions(robot, **keys):
    pack = {"lowest_v": 12.0, "highest_v": 14.4, "resistance_ohm": 0.1, "soc_nodes": SOC, "rest_v_nodes": REST_V}
    return rail_cautions(robot, **{**pack, "hottest_c": 40.0, **keys})


def of_code(code, found):
    return [caution for caution in found if caution.code == code]


def test_a_sound_robot_has_no_cautions(robot_of):
    """Short wires, a step-down converter with volts to spare: nothing to say."""
    rail = {"name": "logic", "kind": "step-down", "volts": 5.0, "wire": SHORT}
    assert cautions(robot_of([rail], [COMPUTER])) == ()


def test_a_start_current_takes_the_regulator_out_of_dropout_up_to_a_charge(robot_of):
    """An 11 V rail with 0.5 V dropout loses it when 20 A sag the battery by 2 V and a bit, up to 78 % charge."""
    rails = [
        {"name": "logic", "kind": "linear", "volts": 11.0, "dropout_v": 0.5, "wire": SHORT},
        {"name": "motors", "kind": "none", "wire": SHORT},
    ]
    loads = [
        {"name": "radio", "rail": "logic", "amps": 0.5},
        {"name": "drive", "rail": "motors", "amps": 4.0, "peak_a": 20.0, "skip_below_soc": 0.4},
    ]
    robot = robot_of(rails, loads)
    (found,) = of_code("rail-brownout", cautions(robot))
    # by hand: 20.5 A x 0.1 ohm = 2.05 V; 12 - 2.05 - 11 - 0.5 = -1.55 V at the lowest voltage,
    # held from 13.55 V at rest, which is 0.5 + 0.5 x 0.55 = 0.78 of charge
    assert found.where == "rail logic"
    assert 'When "drive" starts at 20 A' in found.text
    assert "by 1.55 V" in found.text
    assert "up to 78 % charge" in found.text
    # without the start current the margin is 12 - 0.45 - 11.5
    steady = rail_margin_v(robot, robot.rails[0], rest_v=np.array([12.0]), resistance_ohm=0.1)
    assert steady == pytest.approx([0.05])


def test_a_start_current_on_the_rail_itself_drops_its_wire(robot_of):
    """4 A through a thin lead leave less than 5 % under 5 V at the load, at any charge; without the start it holds."""
    rail = {"name": "logic", "kind": "step-down", "volts": 5.0, "wire": {"length_m": 1.0, "area_mm2": 0.75}}
    servo = {"name": "servo", "rail": "logic", "watts": 1.0, "peak_a": 4.0}
    (found,) = of_code("rail-brownout", cautions(robot_of([rail], [COMPUTER, servo])))
    # 2 x 0.026 ohm x (1 + 4) A = 0.26 V against 0.25 V of tolerance
    assert "by 0.01 V" in found.text
    assert "up to 100 % charge" in found.text
    del servo["peak_a"]
    assert not of_code("rail-brownout", cautions(robot_of([rail], [COMPUTER, servo])))


def test_a_start_the_pack_cannot_give_is_a_brown_out_of_every_rail(robot_of):
    """When the battery collapses a step-up rail goes down with it."""
    rails = [
        {"name": "high", "kind": "step-up", "volts": 24.0, "wire": SHORT},
        {"name": "motors", "kind": "step-down", "volts": 5.0, "wire": SHORT},
    ]
    loads = [
        {"name": "radio", "rail": "high", "watts": 1.0},
        {"name": "drive", "rail": "motors", "watts": 5.0, "peak_a": 100.0},
    ]
    found = of_code("rail-brownout", cautions(robot_of(rails, loads)))
    assert [caution.where for caution in found] == ["rail high", "rail motors"]


def test_a_better_battery_and_a_lighter_start_widen_the_margin(robot_of):
    """The margin falls with resistance and with the start current, never with charge."""
    rail = {"name": "logic", "kind": "linear", "volts": 9.0, "dropout_v": 2.0, "wire": SHORT}
    loads = [{"name": "drive", "rail": "logic", "amps": 1.0, "peak_a": 6.0}]
    robot = robot_of([rail], loads)
    margins = [
        rail_margin_v(robot, robot.rails[0], rest_v=REST_V, resistance_ohm=ohm, starting=start)
        for ohm in (0.01, 0.1, 0.4)
        for start in (None, robot.loads[0])
    ]
    assert all((np.diff(margin) >= 0).all() for margin in margins)
    assert (margins[1] <= margins[0]).all()
    assert (margins[4] <= margins[2]).all()
    assert (margins[5] < margins[3]).any()


def test_a_linear_rail_is_hot_above_what_bare_metal_sheds(robot_of):
    """14.4 V down to 5 V at 0.2 A is over the limit of 1.3 W in 40 degC air, 0.1 A is under it."""
    rail = {"name": "logic", "kind": "linear", "volts": 5.0, "wire": SHORT}
    hot = robot_of([rail], [{"name": "a", "rail": "logic", "amps": 0.2}])
    (found,) = of_code("regulator-heat", cautions(hot))
    assert "1.9 W" in found.text
    assert "1.3 W in air of 40 C" in found.text
    cool = robot_of([rail], [{"name": "a", "rail": "logic", "amps": 0.1}])
    assert not of_code("regulator-heat", cautions(cool))
    # nothing is shed where the air is as hot as the junction may be
    assert of_code("regulator-heat", cautions(cool, hottest_c=125.0))


def test_a_thin_wire_and_a_missing_one_are_named(robot_of):
    """More than 3 % in the wire is a caution; rails without a wire are listed together, those without loads not."""
    thin = {"name": "logic", "kind": "step-down", "volts": 5.0, "wire": {"length_m": 2.0, "area_mm2": 0.75}}
    bare = [{"name": "motors", "kind": "none"}, {"name": "aux", "kind": "none"}, {"name": "spare", "kind": "none"}]
    loads = [COMPUTER, {"name": "m", "rail": "motors", "watts": 9.0}, {"name": "x", "rail": "aux", "watts": 1.0}]
    found = cautions(robot_of([thin, *bare], [{**COMPUTER, "watts": 7.5}, *loads[1:]]))
    (drop,) = of_code("wire-drop", found)
    # 2 m of 0.75 mm2 at 1.5 A: 0.156 V, 3.1 % of 5 V
    assert drop.where == "rail logic"
    assert "take 0.16 V of 5.0 V at 1.50 A" in drop.text
    (missing,) = of_code("no-wire", found)
    assert missing.where == "rails motors, aux"
    assert not of_code("wire-drop", cautions(robot_of([thin, *bare], loads)))
