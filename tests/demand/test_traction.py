"""Drive power from mass, speed and ground."""

from __future__ import annotations

from math import radians, tan

import pytest

from sunbot.demand.traction import traction_w

ROVER = {"rolling_resistance": 0.05, "slope_deg": 0.0, "drivetrain_efficiency": 0.6}


def test_climbing_straight_work_against_gravity_only():
    """Without rolling resistance the power is the rate of potential energy over the efficiency."""
    climbed_w = traction_w(10.0, 2.0, **{**ROVER, "rolling_resistance": 0.0, "slope_deg": 30.0})
    assert climbed_w == pytest.approx(10.0 * 9.80665 * 2.0 * 0.5 / 0.6)


def test_power_is_proportional_to_mass_and_speed():
    """Twice the mass or twice the speed takes twice the power."""
    assert traction_w(40.0, 0.5, **ROVER) == pytest.approx(2 * traction_w(20.0, 0.5, **ROVER))
    assert traction_w(20.0, 1.0, **ROVER) == pytest.approx(2 * traction_w(20.0, 0.5, **ROVER))


def test_a_steeper_or_softer_way_takes_more():
    """Power grows with slope and with rolling resistance."""
    base_w = traction_w(20.0, 0.5, **ROVER)
    assert traction_w(20.0, 0.5, **{**ROVER, "slope_deg": 5.0}) > base_w
    assert traction_w(20.0, 0.5, **{**ROVER, "rolling_resistance": 0.1}) == pytest.approx(2 * base_w)


def test_on_the_slope_whose_tangent_is_the_rolling_resistance_it_rolls_by_itself():
    """Down the angle of repose, tan a = c, neither a push nor a brake is needed."""
    # Published: Coulomb's law of friction (1785), the angle of repose; steep, where c and c cos a differ.
    repose_deg = 35.0
    down = {"rolling_resistance": tan(radians(repose_deg)), "slope_deg": -repose_deg, "drivetrain_efficiency": 1.0}
    assert traction_w(20.0, 0.5, **down) == pytest.approx(0.0, abs=1e-9)
