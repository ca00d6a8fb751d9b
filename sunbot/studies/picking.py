"""`pick`: for every panel wattage the smallest battery that meets the target, and which pair to take."""

from __future__ import annotations

from collections.abc import Callable, Collection, Sequence
from dataclasses import dataclass, replace
from functools import partial
from typing import Literal

import numpy as np

from ..errors import Fault, InputError
from ..inputs.robot import Robot
from ..sky import Weather, weather_for
from ..sky.other_years import other_years
from ..types import Caution, FloatArray, IntArray
from .autonomy_sizing import size_by_autonomy
from .beside import Beside
from .cautions import coarse_climate, few_years, off_the_world_table, standing_cautions
from .chain import Chain
from .effort import Effort, Watcher, balance_cost, supply_cost
from .frontier import WIDTH, Frontier, Judged
from .inputs_used import inputs_used
from .ladder import STEPS_UP, Ladder
from .pick_result import ControllerOption, Neighbour, Pair, PickResult, Recommended, Shortfall, SurvivalMap
from .resizing import resized
from .what_ifs import filed_and_dimmed

USUAL_X = (0.5, 0.75, 1.0, 1.25, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0)
"""Panels tried when none are named, as multiples of the one filed."""
KINDS: tuple[Literal["direct", "pwm", "mppt"], ...] = ("direct", "pwm", "mppt")
MAP_ROWS = 16
UNITS = {"mass_kg": "kg", "price": "in the file's money"}


def pick(
    robot: Robot,
    *,
    watts: Sequence[float] | FloatArray | None = None,
    battery_ah: tuple[float, float] | None = None,
    weather: Weather | None = None,
    years: int = 50,
    seed: int = 1,
    also: Collection[str] = (),
    watcher: Watcher | None = None,
) -> PickResult:
    """The smallest battery for every panel wattage, and the pair to take.

    Parameters
    ----------
    watts : (n_watts,), optional
        Total name-plate wattages to try [W]; left out, twelve from half to eight times the filed one.
    battery_ah : (low, high), optional
        Range of capacities when new [Ah]; left out, from half an hour to sixty days of the mean need.
    weather, years, seed : as in `check`
    also : of "map" and "controllers"
        Also the share of years survived over both axes, for the plot; also the answer for each kind of controller.
    watcher : callable, optional
        Is told the share of the work done, 0 to 1.

    Raises
    ------
    InputError
        Sizes that are not above 0, weather that cannot be used, a robot that cannot be built.
    """
    sizes = _sizes(robot, watts)
    _must_be_range(battery_ah)
    weather = weather_for(robot.site, years=years, seed=seed) if weather is None else weather
    effort = Effort(watcher, _planned(weather, sizes.size, also))
    chain = Chain(weather, seed=seed)
    search = _Search(chain, sizes, battery_ah, effort)
    found = search.of(robot)
    result = PickResult(
        robot=robot,
        weather=weather,
        inputs=inputs_used(robot, weather, years=weather.n_years, seed=seed, first_month=chain.first_month(robot)),
        pairs=found.pairs,
        recommended=found.recommended,
        neighbours=found.neighbours,
        by_autonomy=size_by_autonomy(chain, robot, taken=found.recommended),
        cautions=_cautions(chain, robot, found.recommended),
        battery_range_ah=found.battery_range_ah,
        shortfalls=found.shortfalls,
        survival_map=_survival_map(found.frontier, found.pairs) if "map" in also else None,
    )
    return replace(result, controllers=_controllers(result, search)) if "controllers" in also else result


@dataclass(frozen=True, eq=False)
class _Found:
    """What one search comes to."""

    frontier: Frontier
    battery_range_ah: tuple[float, float]
    pairs: tuple[Pair, ...]
    shortfalls: tuple[Shortfall, ...]
    recommended: Recommended | None
    neighbours: tuple[Neighbour, ...]


Asked = tuple[IntArray, FloatArray]


@dataclass(frozen=True, eq=False)
class _Search:
    """One space of designs over one weather."""

    chain: Chain
    sizes: FloatArray
    battery_ah: tuple[float, float] | None
    effort: Effort

    def of(self, robot: Robot) -> _Found:
        """Pairs, the one to take and its neighbours, for one robot; other years are tried beside."""
        # The supply uses all cores by itself; the search after it leaves one to the other years.
        frontier = Frontier(self.chain, robot, self.sizes, effort=self.effort)
        self.effort.did(supply_cost(len(self.chain.weather.table), self.sizes.size))
        with Beside(partial(_other_years, self.chain, robot, self.sizes)) as others:
            smallest_ah = frontier.smallest_batteries(self.battery_ah)
            within = frontier.battery_range_ah(self.battery_ah)
            pairs, short = _sized(frontier, smallest_ah), frontier.shortfalls(smallest_ah, most_ah=within[1])
            chosen = _choose(pairs)
            if chosen is None:
                return _Found(frontier, within, pairs, short, None, ())
            have = np.array([at for at, pair in enumerate(pairs) if pair.battery_ah is not None])
            sized_ah = np.array([pairs[at].battery_ah for at in have])
            ladder = Ladder(frontier, pairs.index(chosen[0]), float(chosen[0].battery_ah or 0.0))
            others.ask((np.append(have, np.full(STEPS_UP, ladder.at)), np.append(sized_ah, ladder.up_ah)))
            ladder.climb()
            there = others.answer()
        most_ah = np.inf if self.battery_ah is None else self.battery_ah[1]
        taken, step = ladder.taken(chosen[1], None if there is None else there[-STEPS_UP:], most_ah=most_ah)
        if there is not None:
            seen = {int(at): here for at, here in zip(have, there, strict=False)}
            pairs = tuple(
                replace(pair, confirmed=seen[at].survival, confirmed_met=seen[at].met) if at in seen else pair
                for at, pair in enumerate(pairs)
            )
        return _Found(frontier, within, pairs, short, taken, ladder.neighbours(step))


def _other_years(chain: Chain, robot: Robot, sizes: FloatArray) -> Callable[[Asked], list[Judged] | None]:
    """What judges pairs in as many other years of the same climate; answers None where there are none."""
    others = other_years(chain.weather, robot.site, seed=chain.seed)
    if others is None:
        return lambda _: None
    frontier = Frontier(Chain(others, seed=chain.seed), robot, sizes, effort=Effort(None, 1.0))
    return lambda asked: frontier.judge(*asked)


def _sizes(robot: Robot, watts: Sequence[float] | FloatArray | None) -> FloatArray:
    if watts is None:
        return np.asarray(robot.watts * np.array(USUAL_X))
    sizes = np.unique(np.asarray(watts, dtype=float))
    if not sizes.size or not np.isfinite(sizes).all() or sizes[0] <= 0:
        raise InputError(Fault("watts", "the wattages to try are not all above 0", "one or more, e.g. 20, 40, 60"))
    return sizes


def _must_be_range(battery_ah: tuple[float, float] | None) -> None:
    if battery_ah is not None and not 0 < battery_ah[0] < battery_ah[1] < np.inf:
        wrong = f"{battery_ah[0]:g} to {battery_ah[1]:g} is no range above 0"
        raise InputError(Fault("battery_ah", wrong, "the smaller capacity first, e.g. 5 to 60 Ah"))


def _planned(weather: Weather, sizes: int, also: Collection[str]) -> float:
    """Work ahead, as `Effort` counts it: the supply, two rounds of the search, the steps of the chosen pair."""
    steps, years = round(8760 / weather.step_h), weather.n_years
    cost = supply_cost(len(weather.table), sizes) + 2 * balance_cost(steps, years * sizes * WIDTH)
    cost += balance_cost(steps, years * 3 * STEPS_UP)
    whole = cost * (len(KINDS) if "controllers" in also else 1)
    return whole + (balance_cost(steps, years * sizes * MAP_ROWS) if "map" in also else 0.0)


def _sized(frontier: Frontier, capacity_ah: FloatArray) -> tuple[Pair, ...]:
    """Every wattage with its battery and what that survives."""
    pairs = [Pair(float(watts), None) for watts in frontier.sizes]
    have = np.flatnonzero(~np.isnan(capacity_ah))
    for at, here in zip(have, frontier.judge(have, capacity_ah[have]), strict=True):
        sized = resized(frontier.robot, watts=float(frontier.sizes[at]), battery_ah=float(capacity_ah[at]))
        pairs[at] = Pair(
            watts=float(frontier.sizes[at]),
            battery_ah=float(capacity_ah[at]),
            survival=here.survival,
            work_done=None if np.isnan(here.work_done) else here.work_done,
            mass_kg=_total(sized, "mass_kg"),
            price=_total(sized, "price"),
        )
    return tuple(pairs)


def _total(robot: Robot, name: str) -> float | None:
    """Mass or price of panels and battery; None where the file does not give all of them."""
    panels = [getattr(panel, name) for panel in robot.panels]
    battery = getattr(robot.battery, name)
    if battery is None or any(value is None for value in panels):
        return None
    counts = [panel.in_series * panel.in_parallel for panel in robot.panels]
    return float(sum(value * count for value, count in zip(panels, counts, strict=True)) + battery)


def _choose(pairs: tuple[Pair, ...]) -> tuple[Pair, str] | None:
    """The pair to take and why: the lightest, else the cheapest, else where panel and battery trade evenly."""
    have = [pair for pair in pairs if pair.battery_ah is not None]
    if not have:
        return None
    for name, word in (("mass_kg", "lightest"), ("price", "cheapest")):
        if all(getattr(pair, name) is not None for pair in have):
            best = min(have, key=lambda pair: (getattr(pair, name), pair.watts))
            why = f"it is the {word} pair tried that meets the target ({getattr(best, name):.3g} {UNITS[name]})"
            return best, why + _edge(pairs, best)
    best = min(have, key=lambda pair: (pair.watts * (pair.battery_ah or 0.0), pair.watts))
    weighed = "(the file gives neither mass nor price of both panel and battery to weigh them by)"
    return best, f"{_trade(pairs, best)} {weighed}{_edge(pairs, best)}"


def _trade(pairs: tuple[Pair, ...], best: Pair) -> str:
    """What was found on either side of the pair where panel and battery trade evenly."""
    others = [pair for pair in pairs if pair.battery_ah is not None and pair is not best]
    if not others:
        return "it is the only panel tried that meets the target"
    found = []
    if any(pair.watts > best.watts for pair in others):
        found.append("a larger panel saves less battery, in per cent, than it adds panel")
    if any(pair.watts < best.watts for pair in others):
        found.append("a smaller panel costs more battery, in per cent, than it saves panel")
    elif pairs[0] is not best:
        found.append("no battery in range does for the smaller ones tried")
    return ", and ".join(found)


def _edge(pairs: tuple[Pair, ...], best: Pair) -> str:
    """That the pair stands at the end of the wattages tried, if it does."""
    if len(pairs) == 1:
        return "; no other panel was tried, --watts names more"
    for end, extreme, beyond in ((0, "smallest", "smaller"), (-1, "largest", "larger")):
        if best is pairs[end]:
            return f"; it is the {extreme} panel tried: {beyond} ones were not tried, --watts names them"
    return ""


def _controllers(result: PickResult, search: _Search) -> tuple[ControllerOption, ...]:
    """The pair to take behind each kind of controller, all else as filed."""
    robot, options = result.robot, []
    for kind in KINDS:
        if kind == robot.controller.kind:
            options.append(ControllerOption(kind, result.pairs, result.recommended))
            continue
        other = robot.model_copy(update={"controller": robot.controller.model_copy(update={"kind": kind})})
        try:
            found = search.of(other)
        except InputError as error:
            options.append(ControllerOption(kind, (), None, why_not=str(error)))
        else:
            options.append(ControllerOption(kind, found.pairs, found.recommended))
    return tuple(options)


def _survival_map(frontier: Frontier, pairs: tuple[Pair, ...]) -> SurvivalMap | None:
    """Share of years survived on a grid around the frontier."""
    have = [pair.battery_ah for pair in pairs if pair.battery_ah is not None]
    if not have:
        return None
    ah = np.geomspace(min(have) / 2.0, max(have) * 1.5, MAP_ROWS)
    watts_at, capacity = np.meshgrid(np.arange(frontier.sizes.size), ah)
    survival = np.array([pair.survival for pair in frontier.judge(watts_at.ravel(), capacity.ravel())])
    return SurvivalMap(watts=frontier.sizes, battery_ah=ah, survival=survival.reshape(watts_at.shape))


def _survival_dimmed(chain: Chain, robot: Robot, sized: Robot | None) -> float | None:
    """Share of years the pair taken survives with 0.15 less light; None where nothing asks for it."""
    if sized is None or not off_the_world_table(robot.site, chain.weather):
        return None
    return float(filed_and_dimmed(chain, sized)[1][1])


def _cautions(chain: Chain, robot: Robot, taken: Recommended | None) -> tuple[Caution, ...]:
    sized = None if taken is None else resized(robot, watts=taken.watts, battery_ah=taken.battery_ah)
    found = list(standing_cautions(chain, robot, sized=sized))
    found += coarse_climate(robot.site, chain.weather, survival=_survival_dimmed(chain, robot, sized))
    if taken is not None and chain.weather.kind in ("generated", "record"):
        found += few_years(round(taken.survival * chain.weather.n_years), chain.weather.n_years, robot=robot)
    limit_a = robot.controller.max_charge_a
    full_v = chain.pack(robot).curve.rest_v[-1]
    if taken is not None and limit_a is not None and taken.watts * 0.9 > limit_a * full_v:
        found.append(
            Caution(
                "controller-limit",
                "controller",
                f"Its limit of {limit_a:g} A passes on about {limit_a * full_v:.0f} W; a panel of {taken.watts:g} W is "
                "held back in strong light. A larger controller may allow a smaller panel.",
            )
        )
    if chain.weather.kind != "generated":
        found.append(
            Caution(
                "not-confirmed",
                "weather",
                "The weather has no other years to confirm the pairs on; a battery shrunk until it just passes these "
                "years may fail the next. Take a step more, or size on a climate.",
            )
        )
    return tuple(found)
