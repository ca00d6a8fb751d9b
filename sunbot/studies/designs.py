"""Designs side by side, made from the robot as filed."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..inputs.robot import Robot
from ..storage import Designs, as_filed
from ..types import FloatArray, IntArray


def design_grid(
    robot: Robot, *, n_levels: int, watts_at: IntArray | None = None, battery_ah: FloatArray | None = None
) -> Designs:
    """The robot as filed with other wattages (by index) and capacities; arrays are (n_designs,) and go together."""
    filed = as_filed(robot, n_levels=n_levels)
    count = max(np.size(watts_at) if watts_at is not None else 1, np.size(battery_ah) if battery_ah is not None else 1)
    many = repeated(filed, count)
    return replace(
        many,
        watts_at=many.watts_at if watts_at is None else np.asarray(watts_at, dtype=np.int64).ravel(),
        battery_ah=many.battery_ah if battery_ah is None else np.asarray(battery_ah, dtype=float).ravel(),
    )


def repeated(filed: Designs, count: int) -> Designs:
    """One design, ``count`` times."""
    return Designs(
        watts_at=np.repeat(filed.watts_at, count),
        battery_ah=np.repeat(filed.battery_ah, count),
        light_x=np.repeat(filed.light_x, count),
        essential_x=np.repeat(filed.essential_x, count),
        work_x=np.repeat(filed.work_x, count, axis=2),
        extra_w=np.repeat(filed.extra_w, count),
    )
