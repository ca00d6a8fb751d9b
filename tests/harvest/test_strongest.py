"""The most current panels can push, by hand."""

import pytest

from sunbot.harvest import strongest_charge_a


@pytest.mark.parametrize(
    ("controller", "amps"),
    [
        ({"kind": "direct"}, 2 * 2.35 + 2.35),
        ({"kind": "direct", "max_charge_a": 1.0}, 3 * 2.35),
        ({"kind": "pwm"}, 3 * 2.35),
        ({"kind": "pwm", "max_charge_a": 5.0}, 5.0),
        ({"kind": "mppt", "efficiency": 0.9}, 120 * 0.9 / 12.0),
        ({"kind": "mppt", "efficiency_curve": [[0.1, 0.8], [1.0, 0.96]], "rated_w": 100}, 120 * 0.96 / 12.0),
        ({"kind": "mppt", "max_charge_a": 8.0}, 8.0),
    ],
)
def test_short_circuit_current_or_power_over_voltage_and_the_limit_of_a_controller(make_robot, controller, amps):
    """Two strings and a panel of 2.35 A short: their sum, 120 W over 12 V, or what the controller allows."""
    robot = make_robot({"in_parallel": 2}, {}, **controller)
    assert strongest_charge_a(robot, battery_v=12.0) == pytest.approx(amps)
