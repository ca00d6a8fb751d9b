"""How long a full battery lasts: in the dark, and in the light of the darkest week."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..inputs.robot import Robot
from ..storage import autonomy_h
from ..types import FloatArray
from .chain import Age, Chain
from .heating import box_of
from .months import month_hours, month_sums

WEEK_H = 168.0


@dataclass(frozen=True)
class Autonomy:
    """Hours from full to cut-off under the essential load and heater of the hungriest month, in its mean cold.

    None: no end.
    """

    dark_new_h: float | None
    dark_worn_h: float | None
    darkest_week_new_h: float | None
    darkest_week_worn_h: float | None
    worst_month: int

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        return {
            "dark": {"new": self.dark_new_h, "worn": self.dark_worn_h},
            "darkest_week": {"new": self.darkest_week_new_h, "worn": self.darkest_week_worn_h},
            "worst_month": self.worst_month,
        }


def autonomy_of(chain: Chain, robot: Robot) -> Autonomy:
    """Autonomy of the robot as filed; of months equally hungry the coldest counts."""
    lanes, box = chain.lanes(robot), box_of(chain, robot)
    essential_w = chain.essential_w(robot) + robot.controller.own_use_w + box.heater_w
    air_c = chain.weather_at(robot).table["temp_air"].to_numpy()
    hours_out = month_hours(lanes)
    months = np.flatnonzero(hours_out > 0)
    means = (month_sums(values, lanes)[months] / hours_out[months] for values in (essential_w, air_c, box.lift_k))
    load_w, cold_c, lift_k = means
    hungry = load_w >= load_w.max() * (1.0 - 1e-6)
    at = int(np.flatnonzero(hungry)[np.argmin(cold_c[hungry])])
    week_w = darkest_week_w(chain.offer_w(robot)[lanes.row], lanes.step_h, ring=robot.deployment is None)
    temp_c = float(cold_c[at] + lift_k[at]) + robot.battery.box_rise_c

    def hours(age: Age, harvest_w: float) -> float | None:
        draw_w = float(load_w[at]) - harvest_w
        if draw_w <= 0:
            return None
        return autonomy_h(
            chain.pack(robot, age=age), battery_ah=robot.battery.capacity_ah, draw_w=draw_w, temp_c=temp_c
        )

    return Autonomy(
        dark_new_h=hours("new", 0.0),
        dark_worn_h=hours("worn", 0.0),
        darkest_week_new_h=hours("new", week_w),
        darkest_week_worn_h=hours("worn", week_w),
        worst_month=int(months[at]) + 1,
    )


def darkest_week_w(offer_w: FloatArray, step_h: FloatArray, *, ring: bool) -> float:
    """Mean harvest of the darkest 7 days in a row [W].

    Parameters
    ----------
    offer_w, step_h : (n_steps, n_years)
        Harvest offered in the steps of the energy years, and their length [h], 0 where a year has no such step.
    ring : bool
        The years follow on each other, the first on the last; else no week runs over the end of one.
    """
    years = [(watts[hours > 0], hours[hours > 0]) for watts, hours in zip(offer_w.T, step_h.T, strict=True)]
    if ring:
        years = [(np.concatenate([watts for watts, _ in years]), np.concatenate([hours for _, hours in years]))]
    return max(0.0, min(_least_mean_w(watts, hours, ring=ring) for watts, hours in years))


def _least_mean_w(watts: FloatArray, hours: FloatArray, *, ring: bool) -> float:
    steps = min(round(WEEK_H / float(hours[0])), watts.size)
    run_on = watts[: steps - 1] if ring else watts[:0]
    total = np.concatenate(([0.0], np.cumsum(np.concatenate((watts, run_on)))))
    return float((total[steps:] - total[:-steps]).min()) / steps
