"""What the cold had to do with outages, against a plain reading of the trace."""

from dataclasses import replace

import pytest

from sunbot.studies import check


@pytest.fixture(scope="module")
def place(robots):
    return robots.quick_weather(robots.hill(), years=3)


def frozen(robots, **battery):
    """A robot with harvest enough, whose box is 9 K colder than the air."""
    body = {"chemistry": "lifepo4", "cells_in_series": 4, "capacity_ah": 12.0, "box_rise_c": -9.0}
    return robots.robot(watts=80.0, load_w=1.2, battery=body | battery)


def test_frost_before_an_outage_is_what_the_trace_shows(robots, place):
    """Harvest of the five days before the cut, and how much of it came below the least charging temperature."""
    answer = check(frozen(robots), weather=place, trace=True)
    trace, lanes, first = answer.trace, answer.lanes, answer.balance.first_out[:, :, 0]
    total = blocked = 0.0
    temps = []
    for month in range(12):
        for year in range(3):
            if first[month, year] >= 0:
                days = slice(max(int(first[month, year]) - 19, 0), int(first[month, year]) + 1)
                harvest_w, box_c = trace.harvest_w[days, year], trace.box_temp_c[days, year]
                total, blocked = total + harvest_w.sum(), blocked + harvest_w[box_c < 0.0].sum()
                temps.append(box_c[-1])
    assert lanes.step_h.max() == 6.0  # 20 steps are five days
    cause = answer.outages.cause
    assert cause.frost_share == pytest.approx(blocked / total, rel=1e-6)
    assert cause.frost_share > 0.3
    assert cause.box_c == pytest.approx(sum(temps) / len(temps), abs=0.1)
    assert cause.empty_at_soc > answer.robot.battery.cutoff_soc


def test_a_warmer_box_is_named_where_it_is_enough(robots, place):
    """So is how much, and fed back it is enough; where the light is short, it is not named."""
    answer = check(frozen(robots), weather=place)
    way = next(way for way in answer.ways_out if way.what == "box")
    assert check(frozen(robots, box_rise_c=way.value), weather=place).met
    starved = check(robots.robot(watts=6.0, load_w=1.2), weather=place)
    assert "box" not in {way.what for way in starved.ways_out}


def test_no_outage_has_no_cause(robots, place):
    """A robot that lives is told none, and its document says null."""
    answer = check(robots.robot(watts=200.0, battery_ah=60.0, load_w=0.3), weather=place)
    assert answer.outages.first is None
    assert answer.outages.cause is None
    assert answer.to_dict()["outages"]["cold"] is None


def test_the_charge_a_cold_pack_is_cut_at_is_told(robots, place):
    """From memory: lithium cells hold 0.8 of their charge at 0 degC, so that cut-off at 0.1 lies at 0.28 of it."""
    robot = frozen(robots)
    still = replace(place, table=place.table.assign(temp_air=9.0))
    answer = check(robot.model_copy(update={"panels": robots.robot(watts=4.0).panels}), weather=still)
    assert answer.outages.cause.box_c == pytest.approx(0.0, abs=1e-9)
    assert answer.outages.cause.empty_at_soc == pytest.approx(1.0 - 0.8 * 0.9, abs=1e-9)
