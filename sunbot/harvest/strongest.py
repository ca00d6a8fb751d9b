"""The most current the panels can push into the battery."""

from __future__ import annotations

from ..inputs.robot import Robot
from .panels import arrays_of


def strongest_charge_a(robot: Robot, *, battery_v: float) -> float:
    """Charge current in full sun, all panels facing it [A]; the controller's max_charge_a holds it, a diode nothing.

    Parameters
    ----------
    robot : Robot
        As filed, or resized.
    battery_v : float
        At which a converter gives its current [V]; the lower, the more.

    Source
    ------
    Common practice: a panel coupled to the battery gives its short-circuit current, a converter the name-plate power
    times its efficiency.
    """
    controller = robot.controller
    if controller.kind == "mppt":
        curve = controller.efficiency_curve
        efficiency = controller.efficiency if curve is None else max(share for _, share in curve)
        amps = robot.watts * efficiency / battery_v
    else:
        amps = sum(array.sheet.isc_a * array.panel.in_parallel for array in arrays_of(robot))
    if controller.kind == "direct" or controller.max_charge_a is None:
        return amps
    return min(amps, controller.max_charge_a)
