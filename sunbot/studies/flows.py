"""Where the energy goes: from the light on the level to the loads."""

from __future__ import annotations

from dataclasses import dataclass, fields
from itertools import pairwise

from ..harvest import HarvestYield
from ..inputs.robot import Robot
from ..light import Light
from ..storage import Ledger

STANDARD_W_M2 = 1000.0
"""Irradiance at standard test conditions, to which name-plate watts refer."""


@dataclass(frozen=True)
class Step:
    """What one step between light and panel takes a year [Wh]; below 0 = what it adds (a tilt that faces the sun)."""

    step: str
    wh_per_year: float


@dataclass(frozen=True)
class EnergyYear:
    """Energy by fate, mean per year [Wh]: what came in, where it went, and the change of store."""

    panel: float
    out: dict[str, float]
    stored: float


def light_to_panel(
    robot: Robot, lights: tuple[Light, ...], harvest: HarvestYield, *, panel_wh: float
) -> tuple[Step, ...]:
    """What each step from the light on the level to the panel's terminals takes, in rated watt-hours a year.

    ``panel_wh`` : what leaves the terminals in a year of the balance, where the controller holds the panel.
    """
    sums = {"level": 0.0, "angle": 0.0, "horizon": 0.0, "glass": 0.0, "dirt": 0.0, "snow": 0.0}
    for panel, light in zip(robot.panels, lights, strict=True):
        for name in sums:
            sums[name] += panel.total_watts * getattr(light.yearly, name) / STANDARD_W_M2
    left = [*sums.values(), harvest.heat, harvest.low_light, panel_wh]
    names = ("angle", "horizon", "glass", "dirt", "snow", "heat", "low-light", "off-peak")
    return tuple(Step(name, before - after) for name, (before, after) in zip(names, pairwise(left), strict=True))


def energy_year(ledger: Ledger, *, design: int = 0) -> EnergyYear:
    """The ledger of one design, mean over its years."""
    means = {field.name: float(getattr(ledger, field.name)[:, design].mean()) for field in fields(ledger)}
    panel, stored = means.pop("panel"), means.pop("stored")
    return EnergyYear(panel=panel, out=means, stored=stored)
