"""Whether the battery can give what is asked of it at once, and take what the panels push into it."""

from __future__ import annotations

from collections.abc import Iterator
from math import ceil, floor

import numpy as np

from ..demand import burst_cautions
from ..harvest import strongest_charge_a
from ..inputs.robot import Robot
from ..storage import Pack, pack_conditions
from ..types import BoolArray, Caution, FloatArray
from .chain import Chain
from .heating import box_of, two_digits

LEAST_BOX_C = -20.0
"""Colder than that no resistance is known; common practice: cells are not made to work below."""

COLD_X = 1.25
"""In the cold a current may stand so far above what the cells take before it is worth a word: where the cold begins
and how much is then taken are rough figures. Common practice."""


def pack_cautions(chain: Chain, robot: Robot, *, filed: Robot | None = None) -> tuple[Caution, ...]:
    """What a battery is too small for, of all that can happen within a step.

    filed : the robot of which ``robot`` is a resized copy, where the chain already holds its supply.
    """
    out = chain.out(robot)
    box_c = box_of(chain, robot).warm_c
    out = np.ones(box_c.size, dtype=bool) if out is None else out
    return (*_bursts(chain, robot, box_c, out), *_charge_rate(chain, robot, filed or robot, box_c, out))


def _bursts(chain: Chain, robot: Robot, box_c: FloatArray, out: BoolArray) -> tuple[Caution, ...]:
    pack, weather, battery = chain.pack(robot), chain.weather, robot.battery
    coldest_c = np.full(len(weather.ref_times), np.inf)
    np.minimum.at(coldest_c, weather.row[out], box_c[out])
    rows = np.isfinite(coldest_c)
    cold = pack_conditions(pack, np.maximum(coldest_c[rows], LEAST_BOX_C), skip_below_soc=np.empty(0))
    heats = battery.heater_w > 0 and bool((coldest_c[rows] <= battery.heater_on_below_c).any())
    return burst_cautions(
        robot,
        weather.ref_times[rows],
        reference=chain.reference,
        lowest_v=battery.lowest_v,
        resistance_ohm=cold.r4 / (4.0 * battery.capacity_ah * pack.capacity_share),
        also_w={"the heater": battery.heater_w if heats else 0.0, "the controller": robot.controller.own_use_w},
    )


def _charge_rate(chain: Chain, robot: Robot, filed: Robot, box_c: FloatArray, out: BoolArray) -> Iterator[Caution]:
    """Whether the panels can push more into the cells than these may take; the balance throws that away."""
    pack, battery, controller = chain.pack(robot), robot.battery, robot.controller
    pushed_a, rate_c, when = strongest_charge_a(robot, battery_v=battery.lowest_v), pack.max_charge_c, "in full sun"
    # No cells take less than at the cold end of what they may be charged at.
    slowest_c = float(_may_c(pack, np.array([pack.charge_min_c]))[0])
    if COLD_X * slowest_c * battery.capacity_ah < pushed_a <= rate_c * battery.capacity_ah:
        may_c = _may_c(pack, box_c[out])
        slow = (may_c > 0.0) & (may_c < rate_c)
        offered_a = float(_offered_a(chain, robot, filed)[out][slow].max(initial=0.0))
        rate_c, when = slowest_c, "while the box is cold"
        pushed_a = offered_a if offered_a > COLD_X * rate_c * battery.capacity_ah else 0.0
    limit_a = rate_c * battery.capacity_ah
    if pushed_a <= limit_a:
        return
    in_cold = f"; {slowest_c * battery.capacity_ah:.3g} A in the cold" if slowest_c < rate_c else ""
    safe_a = two_digits(limit_a, floor)
    remedy = f"The controller must be set to that limit (max_charge_a = {safe_a})"
    if controller.kind == "direct":
        remedy = f"A diode limits nothing: take a controller with max_charge_a = {safe_a}"
    yield Caution(
        "charge-rate",
        "controller",
        f"The panels can push {pushed_a:.3g} A into the battery {when}; its cells take {limit_a:.3g} A "
        f"({rate_c:g} x {battery.capacity_ah:.3g} Ah{in_cold}), and nothing given holds it there. The answer counts "
        f"only what they may take; real cells would be damaged. {remedy}, or take a battery of "
        f"{two_digits(pushed_a / rate_c, ceil)} Ah.",
    )


def _may_c(pack: Pack, box_c: FloatArray) -> FloatArray:
    """Charge current over capacity that the cells may take at box temperatures [1/h]; 0 where none."""
    return pack_conditions(pack, box_c, skip_below_soc=np.empty(0)).max_c


def _offered_a(chain: Chain, robot: Robot, filed: Robot) -> FloatArray:
    """Most that the panels offer in each step [A]; (n_times,)."""
    supply, controller = chain.supply(filed), robot.controller
    volts = np.maximum(supply.battery_v, robot.battery.lowest_v)
    amps: FloatArray = (supply.offer_w[:, 0, :] / volts).max(axis=-1) * (robot.watts / filed.watts)
    if controller.kind == "direct" or controller.max_charge_a is None:
        return amps
    return np.asarray(np.minimum(amps, controller.max_charge_a))
