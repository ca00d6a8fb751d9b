"""Rails one formula at a time: efficiencies, diodes, wires, sagging, margins."""

from __future__ import annotations

import numpy as np
import pytest

from sunbot.demand.rails import (
    added_wire_loss_w,
    bare_regulator_limit_w,
    battery_per_output,
    linear_heat_w,
    margin_v,
    output_v,
    sagged_v,
)

BATTERY_V = np.array([11.0, 13.0])


def test_a_converter_takes_its_output_over_its_efficiency():
    """A lossless converter takes what it gives, at any battery voltage; a straight rail too."""
    ideal = {"volts": 5.0, "efficiency": 1.0}
    assert battery_per_output("step-down", BATTERY_V, **ideal).tolist() == [1.0, 1.0]
    assert battery_per_output("step-up", BATTERY_V, volts=24.0, efficiency=0.8) == pytest.approx([1.25, 1.25])
    assert battery_per_output("none", BATTERY_V, volts=None, efficiency=0.9).tolist() == [1.0, 1.0]


def test_a_linear_rail_takes_the_output_current_at_battery_voltage():
    """The power is battery voltage times output current, and never less than the output."""
    taken = battery_per_output("linear", np.array([12.0, 5.0, 4.0]), volts=5.0, efficiency=0.9)
    assert taken == pytest.approx([2.4, 1.0, 1.0])


def test_a_linear_rail_loses_its_diode_however_low_the_battery():
    """Output current times drop is lost in the diode at least, also where the battery is under output and drop."""
    # First principles: the output's current flows through the diode.
    taken = battery_per_output("linear", np.array([12.0, 5.4, 5.0]), volts=5.0, efficiency=0.9, diode_drop_v=0.7)
    assert taken == pytest.approx([2.4, 1.0 + 0.7 / 5.0, 1.0 + 0.7 / 5.0])


def test_a_diode_loses_its_drop_times_the_current_behind_it():
    """Before a converter: 0.4 V times the input current is lost; a straight rail sees the voltage behind it."""
    out_w, drop_v = 10.0, 0.4
    taken_w = out_w * battery_per_output("step-down", BATTERY_V, volts=5.0, efficiency=0.9, diode_drop_v=drop_v)
    amps = taken_w / BATTERY_V
    assert taken_w - amps * drop_v == pytest.approx(out_w / 0.9)
    assert output_v("none", BATTERY_V, volts=None, diode_drop_v=drop_v) == pytest.approx([10.6, 12.6])
    assert output_v("linear", BATTERY_V, volts=5.0, diode_drop_v=drop_v).tolist() == [5.0, 5.0]


def test_regulator_heat_is_what_goes_in_less_what_comes_out():
    """Input power less output power, ground current included."""
    assert linear_heat_w(9.0, 5.0, amps=0.3, ground_a=0.01) == pytest.approx(9.0 * 0.31 - 5.0 * 0.3)
    assert bare_regulator_limit_w(125.0) == 0.0


def test_losses_added_in_turn_are_those_of_the_mean_square_current():
    """Three loads of one wire lose R times the mean of the squared sum, with loads that run together."""
    rng = np.random.default_rng(3)
    shares = np.round(rng.uniform(0.0, 1.0, (3, 5)), 2)
    amps = rng.uniform(0.1, 4.0, (3, 2))
    lost_w = sum(
        added_wire_loss_w(shares[k], amps[k], resistance_ohm=0.07, others=list(zip(shares[:k], amps[:k], strict=True)))
        for k in range(3)
    )
    instants = (np.arange(100) + 0.5) / 100
    current = ((instants < shares[:, :, None])[:, :, None, :] * amps[:, None, :, None]).sum(axis=0)
    assert lost_w == pytest.approx(0.07 * (current**2).mean(axis=-1), rel=1e-12)


def test_the_sagging_battery_obeys_its_own_equation():
    """Rest voltage = voltage + R x current for fixed currents and powers behind diodes; no load, no sag."""
    rest_v = np.array([11.0, 12.8, 13.5])
    drawn = {"amps": 2.0, "watts": np.array([30.0, 5.0]), "diode_drop_v": np.array([0.0, 0.7])}
    v = sagged_v(rest_v, resistance_ohm=0.12, **drawn)
    assert v + 0.12 * (2.0 + 30.0 / v + 5.0 / (v - 0.7)) == pytest.approx(rest_v, abs=1e-7)
    assert np.all(v > rest_v / 2)
    none = sagged_v(rest_v, resistance_ohm=0.12, amps=0.0, watts=np.zeros(1), diode_drop_v=np.zeros(1))
    assert none.tolist() == rest_v.tolist()


def test_one_power_sags_to_the_root_of_the_quadratic_and_too_much_collapses():
    """The upper root of v = E - R P/v exists up to P = E^2/4R; past it the voltage is 0."""
    rest_v, ohm = np.array([12.0]), 0.5
    most_w = 12.0**2 / (4 * ohm)
    for watts in (1.0, 40.0, 0.99 * most_w):
        v = sagged_v(rest_v, resistance_ohm=ohm, amps=0.0, watts=np.array([watts]), diode_drop_v=np.zeros(1))
        assert v[0] == pytest.approx((12.0 + np.sqrt(144.0 - 4 * ohm * watts)) / 2, rel=1e-6)
    beyond = np.array([1.02 * most_w])
    assert sagged_v(rest_v, resistance_ohm=ohm, amps=0.0, watts=beyond, diode_drop_v=np.zeros(1))[0] == 0.0


def test_the_margin_is_the_lesser_of_tolerance_and_dropout():
    """In regulation the wire eats the 5 % of 5 V; under the dropout the regulator itself is short."""
    limits = {"volts": 5.0, "dropout_v": 2.0, "tolerance_pct": 5.0}
    assert margin_v(np.array([9.0]), wire_drop_v=0.10, **limits) == pytest.approx([0.15])
    assert margin_v(np.array([9.0]), wire_drop_v=0.28, **limits) == pytest.approx([-0.03])
    assert margin_v(np.array([6.9]), wire_drop_v=0.0, **limits) == pytest.approx([-0.10])
    step_up = {**limits, "dropout_v": None}
    assert margin_v(np.array([2.0]), wire_drop_v=0.1, **step_up) == pytest.approx([0.15])
