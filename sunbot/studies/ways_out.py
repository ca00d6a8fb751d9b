"""How close the answer is: the smallest single change that meets the target, or the largest load that still fits."""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from ..harvest import Supply
from ..inputs.robot import Robot
from ..storage import Designs, as_filed, usable_share
from ..types import BoolArray, FloatArray, IntArray
from .chain import Chain
from .designs import repeated
from .heating import box_of
from .months import month_sums
from .outage_cause import COLD_NOTED
from .search import smallest
from .tilts import few_years, tilted, worst_ratio
from .verdict import Verdict, verdict_on, years_needed
from .what_ifs import offers_by_parking

PANEL, BATTERY, DRAW, WORK = "panel", "battery", "constant draw", "skippable work"
MOST_X = {PANEL: 10.0, BATTERY: 20.0, DRAW: 20.0, WORK: 20.0}
"""How far each lever is pushed before it is given up: as a multiple, or a share of one in it."""
RESOLUTION = 0.02
LEAST_X = 1.02
WIDTH, MOST_WIDTH, LANES = 12, 200, 2400
"""Steps of a lever tried at once: as many as fill so many lanes, of which fewer cost hardly less. The most resolve
every lever in one round."""
PANEL_STEPS = np.array([1.0, 1.04, 1.12])
"""Panels held against their own supply, above the one that as much more light would ask for."""
LOADS_X = np.geomspace(1 / 30, 1.5, 48)
"""Extra loads tried, as multiples of the mean load asked: to 9 %."""
LEAST_W, MOST_ROUNDS = 1e-3, 6
"""A robot that asks for next to nothing is tried from here on, each round 45 times as far as the one before."""
FEW_YEARS, SCARCE = 5, 1.2
"""Over more years, a robot whose worst month brings less than so many times what it asks is run by itself first."""
RARE = 0.02
"""Share of the steps, or of the harvest, from which on the cold is looked into."""
TILTS_DEG = np.arange(0.0, 91.0, 15.0)
TILT_YEARS = 3
WARMER_K = (20.0, 10.0, 5.0)
"""Boxes tried where the cold is a cause: the warmest first, for if that is not enough, none is."""


def rounded_up(value: float, digits: int) -> float:
    """To so many significant digits, never less: what is printed is at least what was found to be enough."""
    return -rounded_down(-value, digits)


def rounded_down(value: float, digits: int) -> float:
    """To so many significant digits, never more."""
    if value == 0.0:
        return 0.0
    scale = 10.0 ** (digits - 1 - math.floor(math.log10(abs(value))))
    return math.floor(value * scale + 1e-9) / scale


@dataclass(frozen=True)
class WayOut:
    """One change that alone meets the target.

    what : the lever. change : one line for people. value : the lever's new value [W panel, Ah, W less, share of the
    minutes, deg]. times : how far it goes, as a ratio above 1, by which ways out are ordered.
    """

    what: str
    change: str
    value: float
    times: float


@dataclass(frozen=True, eq=False)
class _Levers:
    """The levers that apply to a robot."""

    chain: Chain
    robot: Robot
    names: tuple[str, ...]
    filed: Designs
    least_essential_w: float

    @classmethod
    def of(cls, chain: Chain, robot: Robot) -> _Levers:
        asked = chain.demand(robot)
        least_w = float(chain.essential_w(robot).min())
        n_levels = len(asked.level_loads)
        names = (PANEL, BATTERY) + ((DRAW,) if least_w > 0 else ()) + ((WORK,) if n_levels else ())
        return cls(chain, robot, names, as_filed(robot, n_levels=n_levels), least_w)

    def meets(self, cases: IntArray, times: FloatArray) -> BoolArray:
        """Whether the target is met with each lever pushed so far; a panel is as much more light."""
        name, x = np.repeat(np.array(self.names)[cases], times.shape[1]), times.ravel()
        many = repeated(self.filed, x.size)
        designs = replace(
            many,
            light_x=np.where(name == PANEL, x, 1.0),
            battery_ah=many.battery_ah * np.where(name == BATTERY, x, 1.0),
            extra_w=np.where(name == DRAW, -self.less_w(x), 0.0),
            work_x=many.work_x / np.where(name == WORK, x, 1.0),
        )
        balance = self.chain.run(self.robot, designs, keep="verdict")
        return verdict_on(balance, self.robot.target).target_met.reshape(times.shape)

    def less_w(self, times: FloatArray | float) -> FloatArray:
        """What is saved of the least essential draw when it is divided [W]."""
        return np.asarray(self.least_essential_w * (1.0 - 1.0 / np.asarray(times)))

    def panel_x(self, light_x: float) -> float:
        """The panel that does what so much more light does, its own wires and limits counted; NaN: none near."""
        watts = light_x * PANEL_STEPS * self.robot.watts
        many = replace(repeated(self.filed, watts.size), watts_at=np.arange(watts.size))
        lanes = self.chain.lanes(self.robot)
        balance = self.chain.run(self.robot, many, watts=watts, lanes=lanes, keep="verdict")
        met = verdict_on(balance, self.robot.target).target_met
        return light_x * float(PANEL_STEPS[np.argmax(met)]) if met.any() else np.nan

    def way_out(self, name: str, times: float) -> WayOut:
        """A found ratio in words."""
        robot, battery_ah = self.robot, self.robot.battery.capacity_ah
        if name == PANEL:
            value = rounded_up(robot.watts * times, 4)
            return WayOut(name, f"panel {robot.watts:.4g} W -> {value:.4g} W", value, times)
        if name == BATTERY:
            value = rounded_up(battery_ah * times, 4)
            return WayOut(name, f"battery {battery_ah:.4g} Ah -> {value:.4g} Ah", value, times)
        if name == DRAW:
            value = rounded_up(float(self.less_w(times)), 3)
            of = f"of {self.least_essential_w:.3g} W at the battery"
            return WayOut(name, f"draw {value:.3g} W less, day and night ({of})", value, times)
        loads = ", ".join(load.name for load in robot.loads if load.skip_below_soc is not None)
        share = rounded_down(1.0 / times, 2)
        return WayOut(name, f"skippable work ({loads}) cut to {100 * share:g} % of its minutes", share, times)


@dataclass(frozen=True)
class Nearness:
    """What it would take (but for tilt and box) where the target is missed; how much more it would carry where met.

    extra_load_w : largest constant load at the battery that can be added [W], to 9 % below, 0 where not even a
    thirtieth of the mean load can; None where the target is missed. survival_worst_parked : share of years alive if it
    always parks the wrong way; None where no way is.
    """

    ways_out: tuple[WayOut, ...]
    extra_load_w: float | None
    survival_worst_parked: float | None


def nearness(chain: Chain, robot: Robot) -> Nearness:
    """How close the robot is to the other answer, whichever its own is, and what parking the wrong way does to it."""
    offers = offers_by_parking(chain, robot)
    if chain.weather.n_years > FEW_YEARS and (offers.watts.size > 1 or _scarce(chain, robot)):
        # Told apart first: with more load a robot that fails would be cut often, which is slow.
        met, worst = _loaded(chain, robot, np.zeros(1), offers)
        extra_w = _extra_load_w(chain, robot, offers)[0] if met[0] else None
    else:
        extra_w, worst = _extra_load_w(chain, robot, offers)
    if extra_w is not None:
        return Nearness((), extra_w, worst)
    return Nearness(_ways_out(_Levers.of(chain, robot)), None, worst)


def _scarce(chain: Chain, robot: Robot) -> bool:
    """Whether some month brings little more than is asked, harvest that frost keeps out of the pack left out."""
    lanes, offer_w, asked_w = chain.lanes(robot), chain.offer_w(robot), chain.asked_w(robot)
    frozen = box_of(chain, robot).warm_c < chain.pack(robot).charge_min_c
    usable_wh = month_sums(np.where(frozen, np.minimum(offer_w, asked_w), offer_w), lanes)
    return bool((usable_wh < SCARCE * month_sums(asked_w, lanes)).any())


def _extra_load_w(chain: Chain, robot: Robot, offers: Supply) -> tuple[float | None, float | None]:
    """Largest extra load tried up to which every smaller one fits, and the share of years alive parked the wrong way.

    None for the load where not even the robot as filed meets its target.
    """
    asked = chain.demand(robot)
    mean_w = float(asked.essential.total_w.mean() + asked.work.total_w.sum(axis=1).mean())
    extra_w = max(mean_w, LEAST_W) * np.concatenate(([0.0], LOADS_X))
    met, worst = _loaded(chain, robot, extra_w, offers)
    for _ in range(MOST_ROUNDS):
        fits = int(np.cumprod(met).sum())
        if fits < extra_w.size:
            return (rounded_down(float(extra_w[fits - 1]), 3) if fits else None), worst
        extra_w = extra_w[-1] * np.concatenate(([1.0], LOADS_X / LOADS_X[0]))
        met, _ = _loaded(chain, robot, extra_w, offers)
    return rounded_down(float(extra_w[0]), 3), worst


def _loaded(chain: Chain, robot: Robot, extra_w: FloatArray, offers: Supply) -> tuple[BoolArray, float | None]:
    """Whether the target is met with so much more load, and the share of years alive parked the wrong way."""
    filed = as_filed(robot, n_levels=len(chain.demand(robot).level_loads))
    columns = np.concatenate((np.zeros(extra_w.size, dtype=np.int64), np.arange(1, offers.watts.size)))
    more_w = np.concatenate((extra_w, np.zeros(offers.watts.size - 1)))
    designs = replace(repeated(filed, columns.size), watts_at=columns, extra_w=more_w)
    verdict = verdict_on(chain.run(robot, designs, supply=offers, keep="verdict"), robot.target)
    return verdict.target_met[: extra_w.size], float(verdict.survival[-1]) if offers.watts.size > 1 else None


def _ways_out(levers: _Levers) -> tuple[WayOut, ...]:
    """Every lever but the tilt that alone meets the target; each found by running the study."""
    high = np.array([MOST_X[name] for name in levers.names])
    width = min(max(LANES // (high.size * levers.chain.weather.n_years), WIDTH), MOST_WIDTH)
    found = smallest(levers.meets, np.full(high.size, LEAST_X), high, rel=RESOLUTION, width=width)
    times = dict(zip(levers.names, found, strict=True))
    light_x = float(times[PANEL])
    if not np.isnan(light_x):
        times[PANEL] = levers.panel_x(light_x)
    return tuple(levers.way_out(name, float(x)) for name, x in times.items() if not np.isnan(x))


def tilt_way_out(chain: Chain, robot: Robot) -> WayOut | None:
    """A tilt of the first panel that meets the target: the best for the dark months, or half way to it.

    The best is looked for on a few years, then held against all; None behind a window, where the panel turns, and
    where no tilt brings more.
    """
    if robot.window is not None or robot.heading == "turns-to-sun":
        return None
    few, filed = few_years(chain, TILT_YEARS), robot.panels[0].tilt_deg
    ratios = [worst_ratio(few, tilted(robot, tilt)) for tilt in TILTS_DEG]
    if max(ratios) < LEAST_X * worst_ratio(few, robot):
        return None
    best = float(TILTS_DEG[int(np.argmax(ratios))])
    month, years = chain.first_month(robot), chain.weather.n_years
    # A robot that loses more of the few years than it may of all is not tried on all.
    lost = int(_at_tilt(few, robot, best, first_month=month).lost.sum()) if few is not chain else 0
    if lost > years - years_needed(robot.target, years) or not _meets_at(chain, robot, best):
        return None
    half_way = (best + filed) / 2
    least = half_way if _meets_at(chain, robot, half_way) else best
    return WayOut("tilt", f"tilt {filed:.3g} deg -> {least:.3g} deg", least, 1.0 + abs(least - filed) / 90.0)


def warm_way_out(chain: Chain, robot: Robot) -> WayOut | None:
    """The least of a few warmer boxes that meets the target; None where none does, or the box is never cold."""
    if not _in_the_cold(chain, robot):
        return None
    battery, enough = robot.battery, None
    for more_k in WARMER_K:
        rise_c = battery.box_rise_c + more_k
        warm = robot.model_copy(update={"battery": battery.model_copy(update={"box_rise_c": rise_c})})
        balance = chain.run(warm, supply=chain.supply(robot), lanes=chain.lanes(robot), keep="verdict")
        if not verdict_on(balance, robot.target).target_met[0]:
            break
        change = f"box {more_k:g} K warmer (box_rise_c = {rise_c:g}: insulation, or the waste heat of the electronics)"
        enough = WayOut("box", change, rise_c, 1.0 + more_k / WARMER_K[0])
    return enough


def _in_the_cold(chain: Chain, robot: Robot) -> bool:
    """Whether the box is at times so cold that much charge is locked, or that harvest is kept out of the pack."""
    pack = chain.pack(robot)
    box_c, offer_w = (chain.while_out(robot, x) for x in (box_of(chain, robot).warm_c, chain.offer_w(robot)))
    locked = 1.0 - float(usable_share(pack, np.quantile(box_c, RARE)))
    return locked >= COLD_NOTED or float(offer_w[box_c < pack.charge_min_c].sum()) >= RARE * float(offer_w.sum()) > 0


def _meets_at(chain: Chain, robot: Robot, tilt_deg: float) -> bool:
    return bool(_at_tilt(chain, robot, tilt_deg, first_month=chain.first_month(robot)).target_met[0])


def _at_tilt(chain: Chain, robot: Robot, tilt_deg: float, *, first_month: int) -> Verdict:
    """The verdict on the robot with its first panel at another tilt, in energy years that start with a given month."""
    other = tilted(robot, tilt_deg)
    lanes = chain.lanes(robot, first_month=first_month)
    balance = chain.run(other, supply=chain.supply(other, accounts=False), lanes=lanes, keep="verdict")
    return verdict_on(balance, robot.target)
