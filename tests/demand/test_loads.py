"""What loads ask for at the battery, against instants written out one by one."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.demand import demand
from sunbot.errors import InputError
from sunbot.wires import resistance_ohm

WIRE = {"length_m": 2.0, "area_mm2": 0.75}
WIRE_OHM = resistance_ohm(2.0, 0.75)
VOLTS = np.array([12.0, 13.2])
KINDS = [
    {"kind": "step-down", "volts": 5.0, "efficiency": 0.85, "idle_w": 0.05},
    {"kind": "step-up", "volts": 24.0, "efficiency": 0.8, "diode_drop_v": 0.4, "idle_w": 0.1},
    {"kind": "linear", "volts": 5.0, "idle_a": 0.006, "diode_drop_v": 0.7},
    {"kind": "none", "diode_drop_v": 0.3},
]


def watts_from_battery(rail, battery_v, out_v, out_w):
    """Battery power of one instant, written out kind by kind."""
    if rail["kind"] == "linear":
        return battery_v * (out_w / out_v + rail["idle_a"])
    if rail["kind"] == "none":
        return battery_v * out_w / out_v
    in_w = out_w / rail["efficiency"] + rail["idle_w"]
    return battery_v * in_w / (battery_v - rail.get("diode_drop_v", 0.0))


@pytest.mark.parametrize("rail", KINDS, ids=lambda rail: rail["kind"])
def test_mean_power_is_that_of_a_thousand_instants(robot_of, hours_2001, rail):
    """Loads switched on and off one instant at a time ask for the same mean power on every kind of rail."""
    on = (0.6, 1.0, 0.25)
    watts, idle = (3.0, 2.0, 5.0), (0.2, 0.0, 0.5)
    loads = [
        {"name": f"l{k}", "rail": "main", "watts": watts[k], "idle_watts": idle[k], "on_fraction": on[k]}
        for k in range(3)
    ]
    loads[2]["skip_below_soc"] = 0.4
    asked = demand(robot_of([{"name": "main", "wire": WIRE, **rail}], loads), hours_2001[:24], battery_v=VOLTS)
    for at, battery_v in enumerate(VOLTS):
        out_v = rail.get("volts", battery_v - rail.get("diode_drop_v", 0.0))
        instants_w = []
        for u in (np.arange(1000) + 0.5) / 1000:
            load_w = sum(watts[k] if u < on[k] else idle[k] for k in range(3))
            out_w = load_w + WIRE_OHM * (load_w / out_v) ** 2
            instants_w.append(watts_from_battery(rail, battery_v, out_v, out_w))
        total_w = asked.essential.total_w[:, at] + asked.work.total_w[:, 0, at]
        assert total_w == pytest.approx(np.full(24, np.mean(instants_w)), rel=1e-12)


@pytest.mark.parametrize("rail", KINDS, ids=lambda rail: rail["kind"])
def test_the_parts_sum_to_the_total_and_none_is_negative(robot_of, hours_2001, rail):
    """Loads + rails + wire + idle = total, for essential and skippable alike."""
    loads = [
        {"name": "a", "rail": "main", "watts": 2.0, "idle_watts": 0.3},
        {"name": "b", "rail": "main", "amps": 0.7, "hours": [[9.0, 15.25]], "skip_below_soc": 0.3},
    ]
    asked = demand(robot_of([{"name": "main", "wire": WIRE, **rail}], loads), hours_2001, battery_v=VOLTS)
    for part in (asked.essential, asked.work):
        pieces = (part.loads_w, part.rails_w, part.wire_w, part.idle_w)
        assert np.array_equal(part.total_w, sum(pieces[1:], start=pieces[0]))
        assert all((piece >= 0).all() for piece in pieces)
    assert asked.essential.total_w.shape == (8760, 2)
    assert asked.work.total_w.shape == (8760, 1, 2)
    assert (asked.work.idle_w == 0).all()


@pytest.mark.parametrize("kind", ["linear", "none"])
def test_a_load_in_amps_draws_its_current_from_the_battery(robot_of, hours_2001, kind):
    """Straight and linear rails pass the current on: battery voltage times amps, whatever the wire takes."""
    rail = {"name": "main", "kind": kind, "wire": WIRE} | ({"volts": 5.0} if kind == "linear" else {})
    robot = robot_of([rail], [{"name": "servo", "rail": "main", "amps": 1.5}])
    asked = demand(robot, hours_2001[:2], battery_v=VOLTS).essential
    assert asked.total_w[0] == pytest.approx(1.5 * VOLTS)
    assert asked.wire_w[0] == pytest.approx([WIRE_OHM * 1.5**2] * 2)
    assert asked.loads_w[0] == pytest.approx((5.0 if kind == "linear" else VOLTS) * 1.5 - WIRE_OHM * 1.5**2)


def test_a_skippable_load_changes_nothing_of_what_is_served_before_it(robot_of, hours_2001):
    """Taking the last-served load out leaves the essential and the other level as they were, but its idle draw."""
    rails = [{"name": "main", "wire": WIRE, **KINDS[0]}]
    loads = [
        {"name": "drive", "rail": "main", "watts": 9.0, "hours": [[8.0, 12.0]], "skip_below_soc": 0.5},
        {"name": "computer", "rail": "main", "watts": 4.0},
        {"name": "camera", "rail": "main", "watts": 2.0, "on_fraction": 0.3, "skip_below_soc": 0.2},
    ]
    both = demand(robot_of(rails, loads), hours_2001[:200], battery_v=VOLTS)
    one = demand(robot_of(rails, loads[1:]), hours_2001[:200], battery_v=VOLTS)
    assert both.level_loads == ("camera", "drive")
    assert both.skip_below_soc.tolist() == [0.2, 0.5]
    assert np.array_equal(both.essential.total_w, one.essential.total_w)
    assert np.array_equal(both.work.total_w[:, 0], one.work.total_w[:, 0])
    assert one.level_loads == ("camera",)


def test_the_idle_draw_of_a_skippable_load_is_essential(robot_of, hours_2001):
    """A motor driver that idles at 0.4 W and works at 10 W: 0.4 W always, 9.6 W more as work."""
    load = {"name": "drive", "rail": "main", "watts": 10.0, "idle_watts": 0.4, "months": [6], "skip_below_soc": 0.4}
    asked = demand(robot_of([{"name": "main", "kind": "none"}], [load]), hours_2001, battery_v=VOLTS)
    assert (asked.essential.total_w == 0.4).all()
    assert (asked.essential.idle_w == 0.4).all()
    # June of the wall clock: 720 h
    assert asked.work.total_w.sum(axis=0)[0] == pytest.approx([720 * 9.6] * 2)


def test_no_skippable_load_means_no_level(robot_of, hours_2001):
    """The work arrays are empty on their level axis."""
    asked = demand(
        robot_of([{"name": "m", "kind": "none"}], [{"name": "a", "rail": "m", "watts": 1.0}]),
        hours_2001,
        battery_v=VOLTS,
    )
    assert asked.work.total_w.shape == (8760, 0, 2)
    assert asked.skip_below_soc.shape == (0,)
    assert asked.level_loads == ()


def test_one_voltage_equals_many(robot_of, hours_2001):
    """Each battery voltage is worked out as if alone; converters do not care, linear rails take in proportion."""
    rails = [{"name": f"r{n}", "wire": WIRE, **kind} for n, kind in enumerate(KINDS)]
    loads = [{"name": f"l{n}", "rail": f"r{n}", "watts": 2.0 + n} for n in range(4)]
    robot = robot_of(rails, loads)
    many = demand(robot, hours_2001[:3], battery_v=VOLTS).essential.total_w
    for at, battery_v in enumerate(VOLTS):
        one = demand(robot, hours_2001[:3], battery_v=np.array([battery_v])).essential.total_w
        assert np.array_equal(one[:, 0], many[:, at])


def test_a_rail_idles_without_loads(robot_of, hours_2001):
    """A converter that feeds nothing still draws."""
    rails = [{"name": "spare", "kind": "step-down", "volts": 5.0, "idle_w": 0.07}, {"name": "main", "kind": "none"}]
    asked = demand(robot_of(rails, [{"name": "a", "rail": "main", "watts": 1.0}]), hours_2001[:1], battery_v=VOLTS)
    assert asked.essential.idle_w[0] == pytest.approx([0.07, 0.07])
    assert asked.essential.total_w[0] == pytest.approx([1.07, 1.07])


def test_what_no_load_or_diode_can_do_is_refused(robot_of, hours_2001):
    """Idling above work, and a diode that takes the whole battery, name the key and the remedy."""
    lazy = robot_of([{"name": "m", "kind": "none"}], [{"name": "a", "rail": "m", "watts": 1.0, "idle_watts": 2.0}])
    with pytest.raises(
        InputError, match=r'load "a": idle_watts: 2 is more than the 1 W .* Write a value from 0 to 1\.'
    ):
        demand(lazy, hours_2001[:1], battery_v=VOLTS)
    blocked = robot_of(
        [{"name": "m", "kind": "none", "diode_drop_v": 13.0}], [{"name": "a", "rail": "m", "watts": 1.0}]
    )
    with pytest.raises(
        InputError, match=r'rail "m": diode_drop_v: 13 is not below the lowest battery voltage, 12\.00 V'
    ):
        demand(blocked, hours_2001[:1], battery_v=VOLTS)
