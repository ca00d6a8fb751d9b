"""The stages joined once per weather, with what they made kept under the frozen parts it was made from."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Hashable
from dataclasses import replace
from typing import Any, Literal, TypeVar

import numpy as np

from ..calendar import Lanes, energy_years, standard_clock
from ..demand import Demand, demand
from ..harvest import HarvestYield, Supply, follows_battery, harvest_yield, supply
from ..inputs.robot import Robot
from ..light import Light, Sun, lights_on, parked_otherwise, sun_over, weather_in_room
from ..sky import Weather
from ..storage import Balance, Designs, Pack, as_filed, balance, battery_voltages, pack_of, working_weights
from ..types import BoolArray, FloatArray, IntArray

Age = Literal["worn", "new"]
Keep = Literal["verdict", "months", "trace"]
T = TypeVar("T")

PARKED = ("random", "mean", "worst", "to-sun")
"""Where it may stand when parked; the last has one heading more, which the others can do with."""
SUPPLY_VOLTS, DEMAND_VOLTS = 5, 3
"""Battery voltages tabulated where something follows the battery: a panel bends with it, a rail is nearly straight."""


class _Kept:
    """The last few results of a stage, by key."""

    def __init__(self, most: int) -> None:
        self._most = most
        self._kept: OrderedDict[Hashable, Any] = OrderedDict()

    def find(self, key: Hashable) -> Any:
        """What is kept under ``key``, or None."""
        return self._kept.get(key)

    def get(self, key: Hashable, make: Callable[[], T]) -> T:
        if key in self._kept:
            self._kept.move_to_end(key)
        else:
            self._kept[key] = make()
            if len(self._kept) > self._most:
                self._kept.popitem(last=False)
        found: T = self._kept[key]
        return found


class Chain:
    """Weather above one site, and everything studies work out of it.

    Robots that share a stage's inputs share its result: designs that differ in watts, capacity or factors cost one
    balance, a change of tilt or heading re-runs the light.
    """

    def __init__(self, weather: Weather, *, seed: int = 1) -> None:
        self.weather = weather
        self.seed = seed
        self.months: IntArray = standard_clock(weather.times, weather.place.time_zone).month
        self._sun: Sun | None = None
        self._lights = _Kept(2)
        self._supplies = _Kept(4)
        self._demands = _Kept(4)
        self._lanes = _Kept(4)
        self._first_months = _Kept(64)
        self._at_robot = _Kept(2)

    @property
    def reference(self) -> bool:
        """Whether the weather lives in the calendar of 2001."""
        return self.weather.kind != "record"

    def sun(self) -> Sun:
        """The sun over the reference rows."""
        if self._sun is None:
            self._sun = sun_over(self.weather)
        return self._sun

    def in_other_air(self, warmer_k: float) -> Chain:
        """The same years with the air warmer by ``warmer_k`` throughout; shares what does not depend on the air."""
        table = self.weather.table.assign(temp_air=self.weather.table["temp_air"] + warmer_k)
        other = Chain(replace(self.weather, table=table), seed=self.seed)
        other._sun, other._lights, other._demands, other._lanes = self.sun(), self._lights, self._demands, self._lanes
        return other

    def weather_at(self, robot: Robot) -> Weather:
        """The weather as cells and battery of ``robot`` feel it: behind a window the room's air, without wind."""
        return self._at_robot.get(robot.window, lambda: weather_in_room(self.weather, robot.window))

    def lights(self, robot: Robot) -> tuple[Light, ...]:
        """Light on each panel of ``robot``; where it stands when parked only changes the weights of its headings."""

        def make() -> tuple[Light, ...]:
            for parked in PARKED if robot.parked != "to-sun" else ():
                other = self._lights.find(_light_key(robot.model_copy(update={"parked": parked})))
                if other is not None:
                    return parked_otherwise(other, robot, self.weather, seed=self.seed)
            return lights_on(robot, self.weather, self.sun(), seed=self.seed, within=self.out(robot))

        return self._lights.get(_light_key(robot), make)

    def out(self, robot: Robot) -> BoolArray | None:
        """Steps in which the robot is out, (n_times,); None where it is out all year."""
        if robot.deployment is None:
            return None
        lanes, out = self.lanes(robot), np.zeros(len(self.weather.table), dtype=bool)
        out[lanes.row[lanes.step_h > 0]] = True
        return out

    def while_out(self, robot: Robot, values: FloatArray) -> FloatArray:
        """Values by weather step, of the steps in which the robot is out."""
        within = self.out(robot)
        return values if within is None else values[within]

    def supply(self, robot: Robot, *, watts: FloatArray | None = None, accounts: bool = True) -> Supply:
        """What the panels offer at the battery, for the robot's own wattage or for each of ``watts``."""
        sizes = np.array([robot.watts]) if watts is None else np.asarray(watts, dtype=float)
        volts = self.supply_v(robot)
        key = (_light_key(robot), robot.panels, robot.controller, tuple(sizes), tuple(volts), accounts)
        return self._supplies.get(
            key,
            lambda: supply(
                self.lights(robot), self.weather_at(robot), robot, watts=sizes, battery_v=volts, accounts=accounts
            ),
        )

    def harvest_yield(self, robot: Robot) -> HarvestYield:
        """What the cells give in a year after each step."""
        return harvest_yield(self.lights(robot), self.weather_at(robot), robot, within=self.out(robot))

    def demand(self, robot: Robot) -> Demand:
        """What the loads ask for at the battery."""
        volts = self.demand_v(robot)
        key = (robot.loads, robot.rails, robot.site.time_zone, robot.site.longitude, tuple(volts))
        return self._demands.get(
            key, lambda: demand(robot, self.weather.ref_times, battery_v=volts, reference=self.reference)
        )

    def asked_w(self, robot: Robot) -> FloatArray:
        """All that the loads ask for at the battery in each step, mean over its charge [W]; (n_times,)."""
        asked = self.demand(robot)
        by_row = asked.essential.total_w + asked.work.total_w.sum(axis=1)
        return np.asarray((by_row @ self._at_work(robot, asked.battery_v))[self.weather.row])

    def essential_w(self, robot: Robot) -> FloatArray:
        """What the essential loads ask for at the battery in each step, mean over its charge [W]; (n_times,)."""
        asked = self.demand(robot)
        return np.asarray((asked.essential.total_w @ self._at_work(robot, asked.battery_v))[self.weather.row])

    def offer_w(self, robot: Robot, *, accounts: bool = True) -> FloatArray:
        """What the robot's own panels offer in each step, mean over the battery's charge [W]; (n_times,)."""
        return np.asarray(self.offers_w(robot, self.supply(robot, accounts=accounts))[:, 0])

    def offers_w(self, robot: Robot, supply: Supply) -> FloatArray:
        """What each wattage offers in each step, mean over the battery's charge [W]; (n_times, n_watts)."""
        return np.asarray(supply.offer_w @ self._at_work(robot, supply.battery_v))

    def _at_work(self, robot: Robot, battery_v: FloatArray) -> FloatArray:
        return working_weights(self.pack(robot), battery_v)

    def supply_v(self, robot: Robot) -> FloatArray:
        """Pack voltages at which the supply is tabulated: one where it does not follow the battery."""
        return _nodes(robot, SUPPLY_VOLTS if follows_battery(robot) else 1)

    def demand_v(self, robot: Robot) -> FloatArray:
        """Pack voltages at which the demand is tabulated: one where no rail follows the battery."""
        follows = any(rail.kind in ("linear", "none") or rail.diode_drop_v > 0 for rail in robot.rails)
        return _nodes(robot, DEMAND_VOLTS if follows else 1)

    def first_month(self, robot: Robot) -> int:
        """The month energy years start with: the one after that of the largest surplus of the robot as filed."""
        if robot.deployment is not None:
            return robot.deployment.first[0]
        key = (_light_key(robot), robot.panels, robot.controller, robot.battery, robot.rails, robot.loads)
        return self._first_months.get(key, lambda: int(self.first_months(robot, self.supply(robot))[0]))

    def first_months(self, robot: Robot, supply: Supply) -> IntArray:
        """The month energy years would start with, for each wattage of ``supply``; (n_watts,)."""
        if robot.deployment is not None:
            return np.full(supply.watts.size, robot.deployment.first[0])
        asked_w = self.asked_w(robot)
        steps = np.bincount(self.months, minlength=13)[1:]
        best = []
        for offer_w in self.offers_w(robot, supply).T:
            total = np.bincount(self.months, weights=offer_w - asked_w, minlength=13)[1:]
            best.append(int(np.argmax(np.where(steps > 0, total / np.maximum(steps, 1), -np.inf))))
        return (np.array(best) + 1) % 12 + 1

    def lanes(self, robot: Robot, *, first_month: int | None = None) -> Lanes:
        """Energy years (or deployments) of ``robot`` as filed, side by side; ``first_month`` overrules its own."""
        deployment = None if robot.deployment is None else (robot.deployment.first, robot.deployment.last)
        month = self.first_month(robot) if first_month is None else first_month
        return self._lanes.get(
            (month, deployment),
            lambda: energy_years(
                self.weather.times,
                step_h=self.weather.step_h,
                zone=self.weather.place.time_zone,
                first_month=month,
                deployment=deployment,
            ),
        )

    def pack(self, robot: Robot, *, age: Age = "worn") -> Pack:
        """The robot's pack, worn (as it is judged) or new."""
        return pack_of(robot.battery, age=age)

    def run(
        self,
        robot: Robot,
        designs: Designs | None = None,
        *,
        watts: FloatArray | None = None,
        supply: Supply | None = None,
        lanes: Lanes | None = None,
        age: Age = "worn",
        keep: Keep = "months",
    ) -> Balance:
        """Balance of the robot as filed, or of every one of ``designs`` (whose ``watts_at`` index ``watts``).

        ``supply`` takes the place of the robot's own and of ``watts``; ``lanes`` holds several robots to one calendar.
        """
        asked = self.demand(robot)
        return balance(
            self.supply(robot, watts=watts, accounts=watts is None or keep != "verdict") if supply is None else supply,
            asked,
            self.pack(robot, age=age),
            self.lanes(robot) if lanes is None else lanes,
            as_filed(robot, n_levels=len(asked.level_loads)) if designs is None else designs,
            air_temp_c=self.weather_at(robot).table["temp_air"].to_numpy(),
            row=self.weather.row,
            keep=keep,
        )


def _nodes(robot: Robot, n: int) -> FloatArray:
    pack = pack_of(robot.battery)
    return battery_voltages(pack, n=n) if n > 1 else np.array([battery_voltages(pack, n=2).mean()])


def _light_key(robot: Robot) -> Hashable:
    """All of a robot that its light depends on."""
    moving = tuple((load.hours, load.months, load.weekdays, load.clock) for load in robot.loads if load.moves)
    mounts = tuple(
        (
            panel.tilt_deg,
            panel.tilt_hours,
            panel.azimuth_deg,
            panel.dirt_loss,
            panel.obstructions,
            panel.bypass_groups,
        )
        for panel in robot.panels
    )
    # behind a window the size of a panel decides how much of it the sun reaches
    sizes = () if robot.window is None else tuple(panel.total_watts for panel in robot.panels)
    ways = (robot.heading, robot.heading_deg, robot.headings, robot.parked)
    return (robot.site, *ways, robot.window, moving, mounts, sizes, robot.deployment)
