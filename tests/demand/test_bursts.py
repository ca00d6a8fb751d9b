"""What the pack is asked for at one moment, against Ohm's law by hand."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.demand import burst_cautions
from sunbot.demand.together import groups_together

STRAIGHT = {"name": "motors", "kind": "none"}
LOGIC = {"name": "logic", "kind": "step-down", "volts": 5.0, "efficiency": 0.8}


def told(robot, hours, *, rest_v=12.0, ohm=0.1, also_w=None):
    found = burst_cautions(
        robot, hours, reference=True, lowest_v=rest_v, resistance_ohm=np.full(len(hours), ohm), also_w=also_w or {}
    )
    return {caution.code: caution for caution in found}


def drive(**keys):
    return {"name": "drive", "rail": "motors", "watts": 5.0, **keys}


@pytest.mark.parametrize(("watts", "fires"), [(361.0, True), (359.0, False)])
def test_a_load_for_a_fiftieth_of_the_time_is_held_in_full_against_what_the_pack_gives(
    robot_of, hours_2001, watts, fires
):
    """12 V behind 0.1 ohm give 12²/0.4 = 360 W at most, however short the load is on."""
    # Published: Ohm's law, the greatest power of a source is V²/(4R).
    robot = robot_of([STRAIGHT], [drive(watts=watts, hours=[[11, 14]], on_fraction=0.02)])
    found = told(robot, hours_2001)
    assert ("pack-too-weak" in found) == fires
    if fires:
        text = found["pack-too-weak"].text
        assert '"drive" alone asks for 361 W' in text
        assert "12.0 V at rest, 100 mohm" in text
        assert "give 360 W at most" in text


def test_loads_add_up_only_while_they_run_together(robot_of, hours_2001):
    """Two of 200 W at noon are 400 W; one after the other in the same hour, in other months or on other days 200 W."""
    one = {"name": "a", "rail": "motors", "watts": 200.0, "hours": [[11, 12]], "on_fraction": 0.1}
    other = {**one, "name": "b"}
    together = told(robot_of([STRAIGHT], [one, other]), hours_2001)
    assert 'Running at once, "a" and "b" ask for 400 W' in together["pack-too-weak"].text
    for apart in (
        ({"hours": [[11, 11.2]]}, {"hours": [[11.2, 11.5]]}),
        ({"months": [6, 7]}, {"months": [8]}),
        ({"weekdays": ["mon", "tue"]}, {"weekdays": ["wed"]}),
    ):
        assert not told(robot_of([STRAIGHT], [{**one, **apart[0]}, {**other, **apart[1]}]), hours_2001)


def test_the_resistance_is_that_of_the_time_the_loads_run(robot_of, hours_2001):
    """A pack too weak in January only is told where the load runs in January."""
    ohm = np.where(hours_2001.month == 1, 0.2, 0.1)

    def found(months):
        robot = robot_of([STRAIGHT], [drive(watts=300.0, hours=[[10, 12]], months=months)])
        return burst_cautions(robot, hours_2001, reference=True, lowest_v=12.0, resistance_ohm=ohm, also_w={})

    assert [caution.code for caution in found([1])] == ["pack-too-weak"]
    assert "give 180 W at most" in found([1])[0].text
    assert not found([2, 3])


def test_converter_and_wire_count_and_so_does_what_else_the_battery_feeds(robot_of, hours_2001):
    """260 W behind 80 % are 325 W at the battery; 40 W of heater take it over 360 W, 30 W do not."""
    robot = robot_of([LOGIC], [{"name": "computer", "rail": "logic", "watts": 260.0}])
    assert not told(robot, hours_2001, also_w={"the heater": 30.0})
    text = told(robot, hours_2001, also_w={"the heater": 40.0})["pack-too-weak"].text
    assert 'Running at once, "computer" and the heater ask for 365 W' in text
    # 0.04 ohm of wire (19.5 ohm/km, IEC 60228) at 52 A take 108 W more, 135 W before the converter
    wired = {**LOGIC, "wire": {"length_m": 0.04 / 2 / 0.0195, "area_mm2": 1.0}}
    robot = robot_of([wired], [{"name": "computer", "rail": "logic", "watts": 260.0}])
    assert "asks for 460 W" in told(robot, hours_2001)["pack-too-weak"].text


@pytest.mark.parametrize(("peak_a", "fires"), [(57.7, True), (57.5, False)])
def test_a_start_behind_a_converter_asks_for_power(robot_of, hours_2001, peak_a, fires):
    """5 V x 57.6 A / 0.8 = 360 W, in place of the running load."""
    robot = robot_of([LOGIC], [{"name": "servo", "rail": "logic", "watts": 2.0, "peak_a": peak_a}])
    found = told(robot, hours_2001)
    assert ("pack-too-weak" in found) == fires
    if fires:
        assert 'while "servo" starts at 57.7 A' in found["pack-too-weak"].text
        assert "a lower start" in found["pack-too-weak"].text


@pytest.mark.parametrize(
    ("peak_a", "code"), [(59.9, None), (60.1, "start-sag"), (119.9, "start-sag"), (120.1, "pack-too-weak")]
)
def test_a_start_straight_from_the_battery_is_told_from_half_its_voltage_on(robot_of, hours_2001, peak_a, code):
    """12 V behind 0.1 ohm stand at 6 V under 60 A and at nothing under 120 A."""
    found = told(robot_of([STRAIGHT], [drive(peak_a=peak_a)]), hours_2001)
    assert list(found) == ([] if code is None else [code])
    if code == "start-sag":
        assert found[code].where == "rail motors"
        assert f'"drive" starts at {peak_a:g} A' in found[code].text
        assert f"from 12.0 to {12.0 - 0.1 * peak_a:.1f} V" in found[code].text


def test_a_start_counts_on_top_of_what_runs_with_it(robot_of, hours_2001):
    """50 A take 5 V of 12 V; 40 W beside them leave 6.4 V, 80 W 5.6 V."""
    # by hand: v = (7 + sqrt(49 - 4 x 0.1 x watts)) / 2
    beside = {"name": "lamp", "rail": "motors", "watts": 40.0}
    assert not told(robot_of([STRAIGHT], [drive(peak_a=50.0), beside]), hours_2001)
    text = told(robot_of([STRAIGHT], [drive(peak_a=50.0), {**beside, "watts": 80.0}]), hours_2001)["start-sag"].text
    assert "to 5.6 V" in text


def test_a_long_list_of_loads_is_shortened(robot_of, hours_2001):
    """Three names and how many more."""
    loads = [drive(watts=100.0, name=name) for name in "abcde"]
    text = told(robot_of([STRAIGHT], loads), hours_2001)["pack-too-weak"].text
    assert '"a", "b", "c" and 2 more ask for 500 W' in text


def test_groups_of_loads_keep_the_worst_of_their_steps(robot_of, hours_2001):
    """Always alone at night, together by day: two groups, each with its own largest figure."""
    robot = robot_of([STRAIGHT], [drive(name="base"), drive(hours=[[9, 17]], on_fraction=0.5)])
    groups, worst = groups_together(robot, hours_2001, np.arange(8760.0), reference=True)
    assert {tuple(group) for group in groups} == {(True, False), (True, True)}
    # the last step of the year is 23 to 24 h, the last of the working day 16 to 17 h
    assert dict(zip(map(tuple, groups), worst, strict=True)) == {(True, False): 8759.0, (True, True): 8752.0}
