"""A robot with panels and battery of another size, as its file would then read."""

from __future__ import annotations

from ..inputs.robot import Battery, Panel, Robot


def resized(robot: Robot, *, watts: float | None = None, battery_ah: float | None = None) -> Robot:
    """The robot with all panels scaled to a total of ``watts`` and a battery of ``battery_ah`` when new.

    Currents, mass and price go with the size, voltages stay, resistances fall: more of the same beside each other.
    """
    panel_x = 1.0 if watts is None else watts / robot.watts
    battery_x = 1.0 if battery_ah is None else battery_ah / robot.battery.capacity_ah
    return robot.model_copy(
        update={
            "panels": tuple(_panel(panel, panel_x) for panel in robot.panels),
            "battery": _battery(robot.battery, battery_x),
        }
    )


def _panel(panel: Panel, x: float) -> Panel:
    return panel.model_copy(
        update=_scaled(panel, ("watts", "imp_a", "isc_a", "mass_kg", "price"), x)
        | _scaled(panel, ("shunt_ohm",), 1 / x)
    )


def _battery(battery: Battery, x: float) -> Battery:
    grows = _scaled(battery, ("capacity_ah", "mass_kg", "price"), x)
    return battery.model_copy(update=grows | _scaled(battery, ("resistance_mohm",), 1 / x))


def _scaled(part: Panel | Battery, names: tuple[str, ...], x: float) -> dict[str, float]:
    """The figures the file gives, times x."""
    return {name: getattr(part, name) * x for name in names if getattr(part, name) is not None}
