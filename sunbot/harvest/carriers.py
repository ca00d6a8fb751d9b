"""What the harvest room hands on."""

from __future__ import annotations

from dataclasses import dataclass

from ..types import FloatArray


@dataclass(frozen=True, eq=False)
class HarvestYield:
    """What the cells give, of the robot as filed, mean over the weather's years [Wh per year].

    nominal : name-plate efficiency times light on the cells. heat : after cell temperature. low_light : after the
    fall of efficiency in dim light (= maximum power).
    """

    nominal: float
    heat: float
    low_light: float


@dataclass(frozen=True, eq=False)
class Supply:
    """What the panels offer at the battery, a table over total name-plate watts and battery voltage.

    battery_v : (n_volts,) pack rest voltage nodes, ascending and evenly spaced; one where nothing depends on it.
    watts : (n_watts,) total name-plate power; every panel is scaled by watts / robot.watts.
    offer_w : (n_times, n_watts, n_volts) at the battery terminals, after limits, before the controller's own use; >= 0.
    panel_w, wire_w : same shape, or None where not asked for: power at the panel's terminals, and lost in its wires.
        controller loss = panel_w - wire_w - offer_w >= 0.
    own_use_w : drawn by the controller from the battery day and night.
    """

    battery_v: FloatArray
    watts: FloatArray
    offer_w: FloatArray
    panel_w: FloatArray | None
    wire_w: FloatArray | None
    own_use_w: float
