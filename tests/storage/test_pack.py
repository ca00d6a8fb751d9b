"""The pack: stored energy, voltage and charge, and what age and temperature do."""

import numpy as np
import pytest

from sunbot.inputs.robot import Battery
from sunbot.storage import battery_voltages, pack_of, resistance_ohm, usable_share, usable_wh
from sunbot.storage.pack import conditions

CELLS = {"lifepo4": 4, "li-ion": 3, "nimh": 5, "lead-acid": 6}


def battery(chemistry="lifepo4", **keys):
    return Battery(**({"chemistry": chemistry, "cells_in_series": CELLS[chemistry], "capacity_ah": 12.0} | keys))


@pytest.mark.parametrize("chemistry", CELLS)
def test_charge_and_stored_energy_are_inverse_and_the_energy_is_the_area_under_the_voltage(chemistry):
    """Charge to energy to charge comes back, and the Wh equal a fine sum of volts over charge."""
    curve = pack_of(battery(chemistry)).curve
    soc = np.linspace(0, 1, 20001)
    energy = curve.energy_at(soc)
    assert curve.soc_at(energy) == pytest.approx(soc, abs=1e-12)
    volts = np.interp(soc, curve.soc, curve.rest_v)
    area = np.concatenate(([0.0], np.cumsum((volts[1:] + volts[:-1]) / 2 * np.diff(soc))))
    # The nodes lie on the fine grid, so the sum of trapezes is exact.
    assert energy == pytest.approx(area, abs=1e-10)


@pytest.mark.parametrize("chemistry", CELLS)
def test_the_table_reads_voltage_within_three_millivolts_per_cell_of_the_curve(chemistry):
    """Look-up in stored energy against the curve itself, between the table's nodes."""
    pack = pack_of(battery(chemistry))
    energy = np.linspace(0, pack.curve.full_wh_ah, 9973)
    soc = pack.curve.soc_at(energy)
    place = energy * pack.places_per_wh_ah
    assert pack.soc.at(place) == pytest.approx(soc, abs=2e-5)
    assert np.abs(pack.rest_v.at(place) - np.interp(soc, pack.curve.soc, pack.curve.rest_v)).max() < 3e-3 * pack.cells


def test_voltage_nodes_reach_from_empty_to_full_evenly():
    """battery_voltages spans the rest voltages, which supply and demand tables must."""
    volts = battery_voltages(pack_of(battery("li-ion")), n=7)
    assert volts[[0, -1]] == pytest.approx([9.0, 12.6])
    assert np.diff(volts) == pytest.approx(np.full(6, 0.6))


def test_a_worn_pack_has_less_capacity_and_twice_the_resistance():
    """worn_capacity scales what can be used; the resistance of the pack doubles, whatever the capacity."""
    new, worn = pack_of(battery(), age="new"), pack_of(battery(), age="worn")
    assert usable_wh(worn, 12.0) == pytest.approx(0.8 * usable_wh(new, 12.0))
    assert resistance_ohm(worn, 12.0) == pytest.approx(2 * resistance_ohm(new, 12.0))


def test_resistance_written_in_the_file_scales_with_the_capacity_tried():
    """A pack of twice the size is two packs side by side."""
    pack = pack_of(battery(resistance_mohm=50.0), age="new")
    assert resistance_ohm(pack, 12.0) == pytest.approx(0.050)
    assert resistance_ohm(pack, 24.0) == pytest.approx(0.025)


def test_resistance_doubles_in_the_frost():
    """Twice as much at -10 °C as at 25 °C, no less than that in the heat."""
    # Common practice.
    pack = pack_of(battery())
    assert resistance_ohm(pack, 12.0, temp_c=-10.0) == pytest.approx(2 * resistance_ohm(pack, 12.0))
    assert resistance_ohm(pack, 12.0, temp_c=40.0) == pytest.approx(resistance_ohm(pack, 12.0))


@pytest.mark.parametrize(
    ("chemistry", "temp_c", "share"),
    [
        ("lifepo4", 30, 1.0),
        ("lifepo4", 0, 0.8),
        ("li-ion", -20, 0.55),
        ("nimh", -10, 0.675),
        ("lead-acid", 5, 0.8),
        ("lead-acid", -20, 0.55),
        ("nimh", -80, 0.05),
    ],
)
def test_the_cold_locks_part_of_the_capacity(chemistry, temp_c, share):
    """Usable share of the capacity by temperature."""
    # From memory: lithium and NiMH 0.8 at 0 °C and 0.55 at -20 °C; lead-acid 1 % per K below 25 °C.
    assert usable_share(pack_of(battery(chemistry)), temp_c) == pytest.approx(share)


def test_thresholds_rise_in_the_cold_so_that_only_the_usable_charge_is_shared_out():
    """At 0.8 usable, a cut-off at 0.10 of the usable charge lies at 0.28 of all of it."""
    pack = pack_of(battery(cutoff_soc=0.10, restart_soc=0.25))
    cold = conditions(pack, np.array([0.0, 25.0]), skip_below_soc=np.array([0.5]))
    assert pack.curve.soc_at(cold.cutoff) == pytest.approx([0.28, 0.10])
    assert pack.curve.soc_at(cold.restart) == pytest.approx([0.40, 0.25])
    assert pack.curve.soc_at(cold.skip[0]) == pytest.approx([0.60, 0.50])


def test_charging_keeps_to_its_window_and_lithium_iron_phosphate_is_slow_in_the_cold():
    """No current outside charge_min_c..charge_max_c; at most 0.2 C below 15 °C."""
    # Common practice.
    temp_c = np.array([-0.1, 0.0, 14.9, 15.0, 45.0, 45.1])
    of = conditions(pack_of(battery()), temp_c, skip_below_soc=np.zeros(0))
    assert of.max_c == pytest.approx([0.0, 0.2, 0.2, 0.5, 0.5, 0.0])
    gentle = conditions(pack_of(battery(max_charge_c=0.1)), temp_c, skip_below_soc=np.zeros(0))
    assert gentle.max_c == pytest.approx([0.0, 0.1, 0.1, 0.1, 0.1, 0.0])


def test_lead_acid_is_held_at_a_lower_voltage_when_warm():
    """2.40 V per cell at 25 °C, 4 mV less per K."""
    # Common practice.
    of = conditions(pack_of(battery("lead-acid")), np.array([25.0, 35.0, 0.0]), skip_below_soc=np.zeros(0))
    assert of.top_v == pytest.approx([14.4, 14.16, 15.0])


def test_self_discharge_halves_per_ten_kelvin():
    """The rate at 10 °C is half that at 20 °C, and the month's share at 20 °C is what is written."""
    pack = pack_of(battery(self_discharge_pct_month=20.0))
    of = conditions(pack, np.array([20.0, 10.0]), skip_below_soc=np.zeros(0))
    assert of.fade[1] == pytest.approx(of.fade[0] / 2)
    assert np.exp(-of.fade[0] * 365.25 * 2) == pytest.approx(0.8)  # a twelfth of a year in hours
