"""Designs to compute, and how long a pack lasts by itself."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..calendar import Lanes
from ..demand.carriers import Asked, Demand
from ..harvest.carriers import Supply
from ..inputs.robot import Robot
from .carriers import Designs
from .pack import Pack
from .ring import balance


def as_filed(robot: Robot, n_levels: int) -> Designs:
    """The one design of the robot file; ``n_levels`` skippable loads; watts_at 0."""
    one = np.ones(1)
    return Designs(
        watts_at=np.zeros(1, dtype=np.int64),
        battery_ah=one * robot.battery.capacity_ah,
        light_x=one,
        essential_x=one,
        work_x=np.ones((12, n_levels, 1)),
        extra_w=np.zeros(1),
    )


def autonomy_h(pack: Pack, *, battery_ah: float, draw_w: float, temp_c: float = 25.0) -> float:
    """Hours from full to cut-off under a constant draw, by the same steps as the balance.

    Parameters
    ----------
    pack : Pack
        Of the age to be judged.
    battery_ah : float
        Capacity when new [Ah].
    draw_w : float
        Net draw at the battery terminals [W], above 0.
    temp_c : float
        Temperature of the battery [°C].

    Raises
    ------
    ValueError
        draw_w is not above 0.
    """
    if draw_w <= 0:
        raise ValueError(f"draw_w must be above 0, not {draw_w}")
    longest_h = pack.curve.full_wh_ah * battery_ah * pack.capacity_share / draw_w
    n_steps = 500
    rows = np.zeros((n_steps, 1), dtype=np.int64)
    lanes = Lanes(
        rows,
        np.full((n_steps, 1), 1.01 * longest_h / n_steps),
        np.ones(n_steps, dtype=np.int64),
        -np.ones(1, dtype=np.int64),
        1,
    )
    still = replace(pack, start_soc=1.0, box_rise_c=0.0, box_lag_h=0.0, heater_w=0.0, off_draw_w=0.0)
    none = np.zeros((1, 1))
    draw = Asked(*(np.full((1, 1), draw_w) if k < 2 else none for k in range(5)))
    work = Asked(*(np.zeros((1, 0, 1)) for _ in range(5)))
    demand = Demand(np.zeros(1), draw, work, np.zeros(0), ())
    supply = Supply(np.zeros(1), np.ones(1), np.zeros((1, 1, 1)), None, None, 0.0)
    one = np.ones(1)
    design = Designs(np.zeros(1, dtype=np.int64), one * battery_ah, one, one, np.ones((12, 0, 1)), np.zeros(1))
    result = balance(
        supply,
        demand,
        still,
        lanes,
        design,
        air_temp_c=np.array([temp_c]),
        row=np.zeros(1, dtype=np.int64),
        keep="verdict",
    )
    return max(0.0, float(lanes.step_h.sum() - result.hours_out.sum()))
