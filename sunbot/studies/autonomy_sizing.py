"""Sizing by days of autonomy, the arithmetic done by hand in the trade: a cross-check beside the simulation."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from ..inputs.robot import Robot
from ..storage import Pack, usable_share
from ..types import FloatArray
from .chain import Chain
from .heating import box_of
from .months import month_hours, month_sums

if TYPE_CHECKING:
    from .pick_result import Recommended

AUTONOMY_DAYS = 5.0
DEEPEST_DISCHARGE = 0.8
DAILY_DISCHARGE = 0.2
END_OF_LIFE = 0.8
MARGIN = 1.15
ARRAY_TO_LOAD = 1.3
"""From memory, after the logic of IEEE Std 1562: 1.1-1.2 for an uncritical load, 1.3-1.4 for a critical one."""

WHY_DIFFERENT = (
    f"The arithmetic takes {AUTONOMY_DAYS:g} days without any sun, the mean harvest of the worst month and one load "
    "for every day; the simulation takes the dark spells of the place as they come, lets skippable work give way, and "
    "counts cold, charge limits and losses hour by hour."
)


@dataclass(frozen=True)
class AutonomySizing:
    """Panel and battery by the arithmetic of autonomy days, and why the simulation differs."""

    watts: float | None
    battery_ah: float
    days: float
    why_different: str

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        return dict(self.__dict__)


def autonomy_battery_ah(
    load_wh_day: float,
    battery_v: float,
    *,
    days: float = AUTONOMY_DAYS,
    cold_capacity: float = 1.0,
    end_of_life: float = END_OF_LIFE,
) -> float:
    """Capacity for ``days`` without sun [Ah], new, with end of life, cold and margin on top.

    ``cold_capacity`` and ``end_of_life`` are the shares of the capacity left, above 0 up to 1.

    Source
    ------
    From memory: the logic of IEEE Std 1013 (lead-acid batteries for stand-alone systems): the larger of the capacity
    for the days of autonomy down to the deepest discharge and of that for the daily discharge, over the share of
    capacity left at end of life, over the share left in the cold, times a design margin.
    """
    day_ah = load_wh_day / battery_v
    unadjusted_ah = max(day_ah * days / DEEPEST_DISCHARGE, day_ah / DAILY_DISCHARGE)
    return unadjusted_ah / end_of_life / cold_capacity * MARGIN


def autonomy_watts(load_wh_day: float, harvest_wh_day_per_w: float) -> float | None:
    """Panel for the worst month [W] at the array-to-load ratio; None where that month gives nothing."""
    if harvest_wh_day_per_w <= 0:
        return None
    return ARRAY_TO_LOAD * load_wh_day / harvest_wh_day_per_w


def size_by_autonomy(chain: Chain, robot: Robot, *, taken: Recommended | None) -> AutonomySizing:
    """Panel and battery of ``robot`` by the arithmetic of autonomy days, in the month hardest on each.

    ``taken``: the pair the simulation recommends, to say where the two differ.
    """
    load_wh_day, harvest_wh_day, air_c = _by_month(chain, robot)
    hardest = int(np.argmin(harvest_wh_day / np.maximum(load_wh_day, 1e-9)))
    pack = chain.pack(robot)
    most_wh_day = float(load_wh_day.max())
    watts = autonomy_watts(float(load_wh_day[hardest]), float(harvest_wh_day[hardest]) / robot.watts)
    return AutonomySizing(
        watts=watts,
        battery_ah=autonomy_battery_ah(
            most_wh_day,
            pack.curve.full_wh_ah,
            cold_capacity=float(usable_share(pack, float(air_c.min()) + robot.battery.box_rise_c)),
        ),
        days=AUTONOMY_DAYS,
        why_different=WHY_DIFFERENT + _against(taken, robot, pack, most_wh_day=most_wh_day, watts=watts),
    )


def _by_month(chain: Chain, robot: Robot) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Load with heater and harvest [Wh/day], and air as warm as the heater makes it [°C]; (n_months,) each.

    Means of each month the robot is out.
    """
    lanes, box = chain.lanes(robot), box_of(chain, robot)
    air_c = chain.weather_at(robot).table["temp_air"].to_numpy() + box.lift_k
    hours = month_hours(lanes)
    series = (24.0 * (chain.asked_w(robot) + box.heater_w), 24.0 * chain.offer_w(robot), air_c)
    out = [month_sums(values, lanes)[hours > 0] / hours[hours > 0] for values in series]
    return out[0], out[1], out[2]


def _against(taken: Recommended | None, robot: Robot, pack: Pack, *, most_wh_day: float, watts: float | None) -> str:
    """One sentence that holds the two against each other."""
    if taken is None or most_wh_day <= 0:
        return ""
    usable_wh = taken.battery_ah * pack.capacity_share * pack.curve.full_wh_ah * (1.0 - pack.cutoff_soc)
    panel = "" if watts is None else f", and its panel is {taken.watts / watts:.2g} times the one of the arithmetic"
    return (
        f" The pair taken holds {usable_wh / most_wh_day:.1f} days of the hungriest month's whole load, worn and down "
        f"to cut-off{panel}."
    )
