"""The assembler of the room: light on the panels in, `Supply` at the battery and `HarvestYield` out."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field

import numpy as np

from ..inputs.robot import Controller, Robot
from ..light.carriers import Light
from ..sky.weather import Weather
from ..types import BoolArray, FloatArray, IntArray
from .carriers import HarvestYield, Supply
from .cells import STC_W_M2
from .controller import converted_w, shared_peak, tracked_current_a
from .panels import Array, above_battery_v, arrays_of, battery_v
from .samples import Samples, all_samples, samples, stretches
from .tables import Spots, current_table, look_up, spots

_THREADS = min(4, os.cpu_count() or 1)
_HOTTEST_CELL_C = 75.0
"""Cells in full sun without wind. Common practice."""

_BRIGHTEST = 1.6
"""No cell gives more than so many times its name-plate: 1600 W/m2, which the tables reach too. Ours."""


def supply(
    lights: Sequence[Light],
    weather: Weather,
    robot: Robot,
    *,
    watts: FloatArray,
    battery_v: FloatArray,
    accounts: bool = True,
) -> Supply:
    """What the panels offer at the battery, for several panel sizes and battery voltages.

    Parameters
    ----------
    lights : one per panel of the robot
        Light on each; the mean over the headings is taken of the harvest, with their weights.
    weather : Weather
        Air temperature and wind, step by step.
    robot : Robot
        Panels, wires and controller as filed.
    watts : (n_watts,)
        Total name-plate powers [W], at least 0; every panel is scaled alike, its wire stays as it is.
    battery_v : (n_volts,)
        Rest voltages of the pack [V], ascending.
    accounts : bool
        False leaves out panel_w and wire_w.

    Raises
    ------
    InputError
        A data sheet no cell can have, a panel voltage that cannot reach the battery.
    ValueError
        Lights that do not belong to these panels, or are not finite.

    Source
    ------
    Published: Faiman 2008 (cell temperature); De Soto, Klein & Beckman 2006 (current and voltage). Converter: the
    user's figures.
    """
    arrays = arrays_of(robot)
    _must_fit(lights, weather, arrays)
    sizes, volts = np.atleast_1d(np.asarray(watts, dtype=float)), np.atleast_1d(np.asarray(battery_v, dtype=float))
    if not (sizes >= 0.0).all() or not (volts > 0.0).all():
        raise ValueError("watts at least 0 and battery_v above 0 are needed")
    plant = _Plant(arrays, robot.controller, scales=tuple(sizes / robot.watts), volts=tuple(volts))
    shape = (len(weather.table), len(sizes), len(volts))
    made = [np.zeros(shape) for _ in range(3 if accounts else 1)]

    def work(within: slice) -> None:
        lit = samples(lights, weather, arrays, within=within)
        if lit is not None:
            for whole, part in zip(made, plant.run(lit, accounts=accounts), strict=True):
                whole[lit.rows] = part

    with ThreadPoolExecutor(_THREADS) as pool:
        list(pool.map(work, stretches(lights, len(weather.table))))
    return Supply(
        battery_v=volts,
        watts=sizes,
        offer_w=made[0],
        panel_w=made[1] if accounts else None,
        wire_w=made[2] if accounts else None,
        own_use_w=robot.controller.own_use_w,
    )


def follows_battery(robot: Robot) -> bool:
    """Whether the harvest depends on the battery's voltage, so that one node would not do.

    Not so for a tracker whose hot panels clear the full battery and whose current limit is out of reach.
    """
    controller = robot.controller
    if controller.kind != "mppt":
        return True
    if controller.max_charge_a is not None:
        highest_a = _BRIGHTEST * robot.watts / battery_v(robot, 0.0)
        if highest_a > controller.max_charge_a:
            return True
    needed_v = battery_v(robot, 1.0) + above_battery_v(robot)
    for array in arrays_of(robot):
        hot_v = array.vmp_v + array.voc_v * array.panel.voc_pct_per_k / 100.0 * (_HOTTEST_CELL_C - 25.0)
        if hot_v - array.watts / array.vmp_v * array.wire_ohm < needed_v:
            return True
    return False


def harvest_yield(
    lights: Sequence[Light], weather: Weather, robot: Robot, *, within: BoolArray | None = None
) -> HarvestYield:
    """What the cells give in a year after each step, for the robot as filed.

    Parameters
    ----------
    lights : one per panel
        As in `supply`.
    weather : Weather
        As in `supply`.
    robot : Robot
        As filed.
    within : (n_times,), optional
        Steps that count; left out, all.
    """
    arrays = arrays_of(robot)
    _must_fit(lights, weather, arrays)
    nominal = heat = low_light = 0.0
    for lit in all_samples(lights, weather, arrays):
        weight = lit.weight if within is None else lit.weight * lit.spread(within[lit.rows])
        for array, light, temp_c, spot in zip(arrays, lit.cells_w_m2, lit.temp_c, lit.at, strict=True):
            suns = light / STC_W_M2 * weight
            nominal += array.watts * float(suns.sum())
            bright = spots(np.full_like(light, STC_W_M2), temp_c)
            heat += float((suns * look_up(array.peak_table, bright)[0]).sum())
            low_light += float((suns * look_up(array.peak_table, spot)[0]).sum())
    per_year = weather.step_h / weather.n_years
    return HarvestYield(nominal=nominal * per_year, heat=heat * per_year, low_light=low_light * per_year)


def _must_fit(lights: Sequence[Light], weather: Weather, arrays: Sequence[Array]) -> None:
    """One finite light per panel, as long as the weather."""
    if len(lights) != len(arrays):
        raise ValueError(f"{len(lights)} lights for {len(arrays)} panels")
    for light in lights:
        if len(light.cells_w_m2) != len(weather.table):
            raise ValueError(f"light of {len(light.cells_w_m2)} steps under weather of {len(weather.table)}")
        if not np.isfinite(light.cells_w_m2.sum()):
            raise ValueError("light on the cells is not finite throughout")


Powers = tuple[FloatArray, FloatArray, FloatArray]
"""Offered at the battery, at the panels' terminals, and lost in their wires; (n_samples,) each."""
Tracker = tuple[FloatArray, dict[int, FloatArray]]
"""Its best voltage, and by number of the panel the current there as filed."""


@dataclass(frozen=True, eq=False)
class _Held:
    """A tracker at its best voltage: the current of each of its panels there, and the voltage behind the worst wire."""

    best_v: FloatArray
    amps: dict[int, FloatArray]
    reached_v: FloatArray


@dataclass(frozen=True, eq=False)
class _Plant:
    """Panels and controller at some sizes (as multiples of the file) and battery voltages."""

    arrays: tuple[Array, ...]
    controller: Controller
    scales: tuple[float, ...]
    volts: tuple[float, ...]
    _tables: dict[tuple[int, float, float], FloatArray] = field(default_factory=dict)

    def run(self, lit: Samples, *, accounts: bool) -> tuple[FloatArray, ...]:
        """Offered, and with ``accounts`` panel and wire power, each (n_lit, n_watts, n_volts)."""
        shape = (len(lit.rows), len(self.scales), len(self.volts))
        made = tuple(np.empty(shape) for _ in range(3 if accounts else 1))
        mppt = self.controller.kind == "mppt"
        trackers = self._trackers(lit) if mppt else []
        for i, scale in enumerate(self.scales):
            before, means = None, []
            for j, powers in enumerate(self._tracked(lit, trackers, scale) if mppt else self._coupled(lit, scale)):
                limited = self._limited(powers, volts=self.volts[j])
                if limited is not before:
                    before, means = limited, [lit.mean(part) for part, _ in zip(limited, made, strict=False)]
                for whole, mean in zip(made, means, strict=True):
                    whole[:, i, j] = mean
        return made

    def _trackers(self, lit: Samples) -> list[Tracker]:
        """For each tracker the best voltage and, by number of the panel, the current there as filed."""
        peak_v, peak_a = [], []
        for array, light, spot in zip(self.arrays, lit.cells_w_m2, lit.at, strict=True):
            at_full, volts = look_up(array.peak_table, spot)
            peak_v.append(volts)
            peak_a.append(at_full * light / (STC_W_M2 * volts))
        if len(self.arrays) == 1 or self.controller.trackers == "per-panel":
            return [(volts, {k: amps}) for k, (volts, amps) in enumerate(zip(peak_v, peak_a, strict=True))]
        parameters = [
            array.cell.at(light, temp_c)
            for array, light, temp_c in zip(self.arrays, lit.cells_w_m2, lit.temp_c, strict=True)
        ]
        volts, amps = shared_peak(parameters, peak_a, peak_v)
        return [(volts, dict(enumerate(amps)))]

    def _tracked(self, lit: Samples, trackers: list[Tracker], scale: float) -> Iterator[Powers]:
        """Behind trackers, by battery voltage; the same object again where the voltage makes no difference."""
        held = [self._at_best(tracker, scale=scale) for tracker in trackers]
        panel_w, wire_w = np.zeros(len(lit.weight)), np.zeros(len(lit.weight))
        for one in held:
            for k, amps in one.amps.items():
                panel_w += one.best_v * amps
                wire_w += amps**2 * self.arrays[k].wire_ohm
        at_best = (self._converted(panel_w - wire_w), panel_w, wire_w)
        for volts in self.volts:
            floor_v = float("-inf") if self.controller.step_up else volts + self.controller.headroom_v
            low = [np.flatnonzero(one.reached_v < floor_v) for one in held]
            yield (
                self._dragged(lit, held, low, at_best, scale=scale, floor_v=floor_v) if any(map(len, low)) else at_best
            )

    def _at_best(self, tracker: Tracker, *, scale: float) -> _Held:
        best_v, filed_a = tracker
        amps = {
            k: tracked_current_a(filed * scale, best_v, wire_ohm=self.arrays[k].wire_ohm)
            for k, filed in filed_a.items()
        }
        drop_v = np.maximum.reduce([a * self.arrays[k].wire_ohm for k, a in amps.items()])
        return _Held(best_v, amps, best_v - drop_v)

    def _dragged(
        self, lit: Samples, held: list[_Held], low: list[IntArray], at_best: Powers, *, scale: float, floor_v: float
    ) -> Powers:
        """The powers with some samples of each tracker, ``low``, at ``floor_v`` behind their wires.

        A converter that only lowers is fully on there: the panel is dragged down to the battery.
        """
        panel_w, wire_w = at_best[1].copy(), at_best[2].copy()
        for one, at in zip(held, low, strict=True):
            for k, best_a in one.amps.items():
                ohm, amps = self.arrays[k].wire_ohm, self._current(k, lit.at[k], scale=scale, volts=floor_v, only=at)
                panel_w[at] += (floor_v + amps * ohm) * amps - one.best_v[at] * best_a[at]
                wire_w[at] += (amps**2 - best_a[at] ** 2) * ohm
        return self._converted(panel_w - wire_w), panel_w, wire_w

    def _coupled(self, lit: Samples, scale: float) -> Iterator[Powers]:
        """All panels at the battery's voltage, by battery voltage."""
        for volts in self.volts:
            controller_v = volts + (self.controller.diode_drop_v if self.controller.kind == "direct" else 0.0)
            panel_w, wire_w, sum_a = (np.zeros(len(lit.weight)) for _ in range(3))
            for k, array in enumerate(self.arrays):
                amps = self._current(k, lit.at[k], scale=scale, volts=controller_v)
                lost_w = amps**2 * array.wire_ohm
                panel_w += controller_v * amps + lost_w
                wire_w += lost_w
                sum_a += amps
            yield volts * sum_a, panel_w, wire_w

    def _current(self, k: int, at: Spots, *, scale: float, volts: float, only: IntArray | None = None) -> FloatArray:
        """Current of panel k held at a voltage behind its wire [A]; none flows back."""
        array = self.arrays[k]
        extra_ohm = array.wire_ohm * scale
        key = (k, volts, extra_ohm)
        if key not in self._tables:
            self._tables[key] = current_table(array.cell, volts=volts, extra_ohm=extra_ohm)
        if only is not None:
            at = Spots(at.mesh[only], at.across_light[only], at.across_temp[only])
        return scale * np.maximum(look_up(self._tables[key], at)[0], 0.0)

    def _converted(self, feed_w: FloatArray) -> FloatArray:
        """Power the tracker puts out."""
        own = self.controller
        return converted_w(feed_w, efficiency=own.efficiency, curve=own.efficiency_curve, rated_w=own.rated_w)

    def _limited(self, powers: Powers, *, volts: float) -> Powers:
        """With start-up and current limit: below the one nothing flows, above the other panels are throttled.

        The same object where neither makes a difference.
        """
        own, (offer_w, panel_w, wire_w) = self.controller, powers
        if own.start_up_w > 0.0:
            awake = panel_w >= own.start_up_w
            offer_w, wire_w = offer_w * awake, wire_w * awake
            powers = (offer_w, panel_w, wire_w)
        if own.max_charge_a is None or not len(over := np.flatnonzero(offer_w > own.max_charge_a * volts)):
            return powers
        part = own.max_charge_a * volts / offer_w[over]
        offer_w, panel_w, wire_w = (power.copy() for power in powers)
        for power in (offer_w, panel_w, wire_w):
            power[over] *= part
        return offer_w, panel_w, wire_w
