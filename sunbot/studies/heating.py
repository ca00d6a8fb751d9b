"""The heater of the battery's box in the weather of the place: how warm it keeps the box, and what it draws."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from ..inputs.robot import Battery, Robot
from ..storage import box_temp_c, heated_box_c
from ..types import Caution, FloatArray
from .chain import Chain

HELD_WITHIN_K = 0.1
"""A box this close below what its heater is to hold counts as held."""


@dataclass(frozen=True, eq=False)
class Box:
    """The box of a robot in every step of its weather while its loads are on; (n_times,) each.

    box_c, warm_c : without and with its heater [°C]. heater_w : what the heater draws.
    """

    box_c: FloatArray
    warm_c: FloatArray
    heater_w: FloatArray

    @property
    def lift_k(self) -> FloatArray:
        """How much the heater warms it [K]."""
        return self.warm_c - self.box_c


def box_of(chain: Chain, robot: Robot) -> Box:
    """The box of ``robot`` in the weather of ``chain``; worn or new makes no difference to it."""
    weather, pack = chain.weather_at(robot), chain.pack(robot)
    box_c = box_temp_c(
        weather.table["temp_air"].to_numpy(), step_h=weather.step_h, lag_h=pack.box_lag_h, rise_c=pack.box_rise_c
    )
    warm_c, share = heated_box_c(pack, box_c)
    return Box(box_c, warm_c, pack.heater_w * share)


def heater_cautions(
    battery: Battery, box_c: FloatArray, warm_c: FloatArray, *, step_h: float, years: int
) -> Iterator[Caution]:
    """A heater that is taken to be strong enough, or one that is not.

    box_c, warm_c : as in `Box`, over the steps of ``years`` years in which the robot is out.
    """
    lack_k = battery.heater_on_below_c - float(box_c.min())
    if battery.heater_w <= 0 or lack_k <= 0:
        return
    loss_w_per_k = battery.box_loss_w_per_k
    held = f"the box at {battery.heater_on_below_c:g} degC"
    lack, most = f"{two_digits(lack_k)} K", f"{two_digits(battery.heater_w / lack_k, math.floor)} W/K"
    if loss_w_per_k is None:
        yield Caution(
            "heater-taken-as-enough",
            "battery",
            f"{battery.heater_w:g} W are taken to hold {held} in the coldest hour too, {lack} above what it would be "
            f"without. They do only if the box loses no more than {most}. Write box_loss_w_per_k to have that counted; "
            "until then the heater never fails and always draws all its watts.",
        )
        return
    below = warm_c < battery.heater_on_below_c - HELD_WITHIN_K
    if below.any():
        hours = float(below.sum()) * step_h / years
        yield Caution(
            "heater-too-weak",
            "battery",
            f"The heater does not hold {held} for {two_digits(hours)} h a year: {battery.heater_w:g} W lift it by "
            f"{two_digits(battery.heater_w / loss_w_per_k)} K, the coldest hour asks for {lack}. That takes "
            f"{two_digits(lack_k * loss_w_per_k, math.ceil)} W, or a box that loses no more than {most}.",
        )


def two_digits(value: float, to_whole: Callable[[float], float] = round) -> str:
    """A number above 0 in two digits and no power of ten; ``to_whole`` floor or ceil keeps it on the safe side."""
    place = 10.0 ** (math.floor(math.log10(value)) - 1)
    return f"{to_whole(round(value / place, 6)) * place:.6g}"
