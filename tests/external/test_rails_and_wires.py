"""Low-voltage supplies against data sheets, standards and facts of the trade."""

from __future__ import annotations

import numpy as np
import pandas as pd
import pytest

from sunbot.demand import demand, rail_cautions, traction_w
from sunbot.demand.rails import bare_regulator_limit_w, linear_heat_w
from sunbot.inputs.chemistries import REST_VOLTAGES
from sunbot.inputs.robot import Robot
from sunbot.inputs.site import Site

NOON = pd.DatetimeIndex(["2001-06-01 11:30", "2001-06-01 12:30"], tz="UTC")


def rover(*, rails, loads, cells=5):
    """A little rover on NiMH cells."""
    site = Site(name="Invented bench", latitude=47.0, longitude=8.0, time_zone="Europe/Zurich")
    battery = {"chemistry": "nimh", "cells_in_series": cells, "capacity_ah": 2.1}
    panel = {"name": "lid", "watts": 5.0, "vmp_v": 9.0, "tilt_deg": 0.0}
    return Robot(name="Rover", site=site, panel=(panel,), battery=battery, rail=rails, load=loads)


def cautions_of(robot, *, lowest_v, highest_v, resistance_ohm=0.1, hottest_c=40.0):
    curve = REST_VOLTAGES["nimh"]
    return rail_cautions(
        robot,
        lowest_v=lowest_v,
        highest_v=highest_v,
        resistance_ohm=resistance_ohm,
        soc_nodes=np.array(curve.soc),
        rest_v_nodes=robot.battery.cells_in_series * np.array(curve.cell_v),
        hottest_c=hottest_c,
    )


def test_five_nimh_cells_are_6_v_and_7_v_fresh():
    """Five cells are 6 V nominal and at least 7 V freshly charged."""
    # Common practice.
    curve = REST_VOLTAGES["nimh"]
    assert 5 * curve.nominal_v == pytest.approx(6.0)
    assert 5 * curve.cell_v[-1] >= 7.0 - 1e-9


def test_a_rover_burns_0_8_w_in_its_regulator():
    """A computer-and-servo rover, 0.4 A through a linear 5 V regulator from 7 V: 0.8 W of heat, bearable bare."""
    # Common practice: about 0.8 W at 0.4 A and 7 V in, roughly the limit without a heatsink.
    assert linear_heat_w(7.0, 5.0, amps=0.4) == pytest.approx(0.8)
    robot = rover(
        rails=({"name": "logic", "kind": "linear", "volts": 5.0, "dropout_v": 0.5},),
        loads=({"name": "computer", "rail": "logic", "amps": 0.3}, {"name": "servo", "rail": "logic", "amps": 0.1}),
    )
    asked = demand(robot, NOON, battery_v=np.array([7.0])).essential
    assert asked.rails_w == pytest.approx(np.full((2, 1), 0.8))
    assert asked.total_w == pytest.approx(np.full((2, 1), 7.0 * 0.4))
    # Published: 54 to 65 K/W from junction to air, TO-220 without heatsink, in two makers' data sheets: the 0.8 W
    # heat the junction by 43 to 52 K, which 125 degC allow up to air of 73 to 82 degC.
    codes = {c.code for c in cautions_of(robot, lowest_v=5.95, highest_v=7.0, hottest_c=72.0)}
    assert "regulator-heat" not in codes
    codes = {c.code for c in cautions_of(robot, lowest_v=5.95, highest_v=7.0, hottest_c=83.0)}
    assert "regulator-heat" in codes


def test_from_12_v_a_linear_regulator_needs_a_large_heatsink():
    """12 V to 5 V at 0.43 A burns 3 W, over twice what a bare case sheds."""
    # Common practice: 3 W need a large heatsink.
    assert linear_heat_w(12.0, 5.0, amps=0.43) == pytest.approx(3.0, abs=0.05)
    robot = rover(
        rails=({"name": "logic", "kind": "linear", "volts": 5.0},),
        loads=({"name": "computer", "rail": "logic", "amps": 0.43},),
        cells=10,
    )
    (hot,) = [c for c in cautions_of(robot, lowest_v=11.9, highest_v=12.0) if c.code == "regulator-heat"]
    assert hot.text.startswith("With all its loads on it turns 3.0 W into heat")


@pytest.mark.parametrize(("air_c", "watts"), [(40.0, 1.3), (60.0, 1.0)])
def test_a_bare_regulator_sheds_about_a_watt(air_c, watts):
    """1.3 W at 40 degC and 1.0 W in a box of 60 degC."""
    # Published: 125 degC junction and 65 K/W in free air, data sheets of TO-220 regulators; tolerance: printed digits.
    assert bare_regulator_limit_w(air_c) == pytest.approx(watts, abs=0.05)


def test_a_thin_lead_leaves_a_computer_at_4_79_v():
    """A lead that drops 0.28 V from 5.07 V leaves 4.79 V, just inside 6 % of it; a start current on top crashes it."""
    # Common practice: the three voltages. The lead is ours: 1.0 A in 1.24 m of 0.153 mm2 (26 AWG), out and back.
    lead = {"length_m": 1.24, "area_mm2": 0.153}
    rail = {"name": "usb", "kind": "step-down", "volts": 5.07, "wire": lead, "tolerance_pct": 6.0}
    steady = ({"name": "computer", "rail": "usb", "amps": 1.0},)
    asked = demand(rover(rails=(rail,), loads=steady, cells=6), NOON, battery_v=np.array([7.2])).essential
    at_load_v = float(asked.loads_w[0, 0]) / 1.0
    assert 5.07 - at_load_v == pytest.approx(0.28, abs=0.005)
    assert at_load_v == pytest.approx(4.79, abs=0.005)
    pack = {"lowest_v": 7.1, "highest_v": 8.4, "resistance_ohm": 0.05}
    codes = [c.code for c in cautions_of(rover(rails=(rail,), loads=steady, cells=6), **pack)]
    assert codes == ["wire-drop"]
    start = (*steady, {"name": "disk", "rail": "usb", "amps": 0.0, "peak_a": 0.8})
    (crash, _) = cautions_of(rover(rails=(rail,), loads=start, cells=6), **pack)
    assert crash.code == "rail-brownout"
    # 1.8 A x 0.2795 ohm = 0.503 V, against 6 % of 5.07 V = 0.304 V
    assert "by 0.20 V" in crash.text


def test_two_diodes_and_contacts_starve_a_5_v_regulator():
    """Two diodes and contacts take about 1.8 V: 5 fresh cells of 7 V leave 5.2 V, too little for 5 V and a dropout."""
    # Common practice: 1.8 V. The loss is drop times current, whatever stands behind.
    rail = {"name": "logic", "kind": "linear", "volts": 5.0, "dropout_v": 0.5, "diode_drop_v": 1.8}
    robot = rover(rails=(rail,), loads=({"name": "computer", "rail": "logic", "amps": 0.4},), cells=7)
    asked = demand(robot, NOON, battery_v=np.array([8.3])).essential
    assert asked.rails_w[0, 0] == pytest.approx(1.8 * 0.4 + (8.3 - 1.8 - 5.0) * 0.4)
    (brown_out, *_) = cautions_of(robot, lowest_v=7.0, highest_v=7.0)
    assert brown_out.code == "rail-brownout"
    # 7.0 - 0.1 ohm x 0.4 A - 1.8 - 5.0 - 0.5
    assert "by 0.34 V" in brown_out.text


def test_a_wire_pair_in_a_rail_loses_what_the_standard_says():
    """2 m of 0.75 mm2 at 1.5 A, out and back: 0.156 V and 0.234 W."""
    # Published: IEC 60228 class 5, 26.0 ohm/km at 20 degC.
    rail = {"name": "arm", "kind": "none", "wire": {"length_m": 2.0, "area_mm2": 0.75}}
    robot = rover(rails=(rail,), loads=({"name": "arm", "rail": "arm", "amps": 1.5, "on_fraction": 0.5},))
    asked = demand(robot, NOON, battery_v=np.array([6.0])).essential
    # half the time at full current, not all the time at half of it
    assert asked.wire_w[0, 0] == pytest.approx(0.5 * 0.234, rel=1e-9)


def test_traction_of_a_20_kg_robot():
    """20 kg on soft ground (0.05) at 0.5 m/s with 60 % of drive train: 8.17 W."""
    # First principles, by hand: 20 x 9.80665 x 0.05 x 0.5 / 0.6.
    watts = traction_w(20.0, 0.5, rolling_resistance=0.05, slope_deg=0.0, drivetrain_efficiency=0.6)
    assert watts == pytest.approx(8.17, abs=0.005)


def test_sand_takes_many_times_the_power_of_asphalt():
    """Published rolling resistances span a factor of 7 to 40 between asphalt and sand, and so does the power."""
    # Published: Carvill, Mechanical Engineer's Data Handbook (1993): asphalt 0.010-0.015, sand 0.1-0.4.
    ground = {"slope_deg": 0.0, "drivetrain_efficiency": 0.6}
    asphalt = [traction_w(20.0, 0.5, rolling_resistance=c, **ground) for c in (0.010, 0.015)]
    sand = [traction_w(20.0, 0.5, rolling_resistance=c, **ground) for c in (0.1, 0.4)]
    assert sand[0] / asphalt[1] == pytest.approx(6.7, abs=0.1)
    assert sand[1] / asphalt[0] == pytest.approx(40.0)
