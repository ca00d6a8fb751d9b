"""The work calendar: how many minutes a day of each skippable load every month affords."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..demand import traction_w
from ..inputs.robot import Load, Robot
from ..storage import Designs, as_filed
from ..types import BoolArray, FloatArray, IntArray
from .chain import Chain
from .designs import repeated
from .months import month_hours
from .verdict import Verdict, verdict_on

STEP_MIN = 5.0
"""Minutes a day by which the longest skippable load is raised, or a multiple of it; the others go in proportion."""

_MOST_STEPS = 60
_MOST_ROUNDS = 30
_MOST_LOWERED = 3


@dataclass(frozen=True)
class CalendarEntry:
    """Largest minutes a day asked of one load in one month, on the days on which it works."""

    month: int
    load: str
    minutes_per_day: float


@dataclass(frozen=True, eq=False)
class WorkCalendar:
    """Minutes of every skippable load by month.

    factors : (12,) what each month multiplies the filed minutes by, no load beyond its hours; 0 where none works or
        the robot is not out.
    step, step_min : the smallest step of a factor, and what it is in minutes of the longest load.
    bound : (12,) whether one more step in that month alone fails the target; else its hours are used up, or none works.
    possible : false where the target is missed even with no skippable work at all.
    confirmed : whether the calendar, written as one load for each month, meets the target when run as a robot.
    """

    entries: tuple[CalendarEntry, ...]
    factors: FloatArray
    step: float
    step_min: float
    bound: BoolArray
    possible: bool
    confirmed: bool


def work_calendar(chain: Chain, robot: Robot) -> WorkCalendar | None:
    """Raise all months together until the target binds, fix the months that bind, go on with the rest.

    A load is raised by its ``on_fraction``, up to 1: its hours, months and weekdays stay as filed. None where the robot
    has no skippable work. In the search the loss in a rail's wire grows in proportion to the work, while loads that
    share a wire part-time pay a little more or less than that; so the calendar is run once more as a robot and, should
    that fail, its tightest month is lowered by steps until it passes.
    """
    loads = [load for load in robot.loads if load.skip_below_soc is not None and load.on_fraction > 0]
    if not loads:
        return None
    step_min, step = _step_of(loads)
    trial = _Trial(chain, robot, step, loads=loads)
    steps, bound, possible = _fill(trial)
    confirmed = possible and _meets(chain, trial, steps)
    for _ in range(_MOST_LOWERED):
        open_months = bound & (steps > 0)
        if confirmed or not possible or not open_months.any():
            break
        steps[np.argmin(np.where(open_months, steps, trial.top))] -= 1
        confirmed = _meets(chain, trial, steps)
    factors = trial.factors(steps)
    return WorkCalendar(_entries(loads, factors, trial.out), factors, step, step_min, bound, possible, confirmed)


def calendar_robot(robot: Robot, factors: FloatArray) -> Robot:
    """The robot with a calendar written into it: each skippable load becomes one load for each of its months.

    Parameters
    ----------
    factors : (12,)
        What each month multiplies the filed ``on_fraction`` by; the result is at most 1.

    What the load draws while it waits stays with the first of its months, so that it is drawn once, all year. Months
    without work keep their load, at 0, since a load that moves the robot turns its panels too.
    """
    battery_v = (robot.battery.lowest_v + robot.battery.highest_v) / 2.0
    volts = {rail.name: rail.volts or battery_v for rail in robot.rails}
    loads: list[Load] = []
    for load in robot.loads:
        if load.skip_below_soc is None or load.on_fraction == 0:
            loads.append(load)
            continue
        for place, month in enumerate(sorted(load.months)):
            part = load if place == 0 else _without_idle(load, volts[load.rail])
            share = _share(load, factors, month)
            update = {"name": f"{load.name} {month:02d}", "months": (month,), "on_fraction": share}
            loads.append(part.model_copy(update=update))
    return robot.model_copy(update={"loads": tuple(loads)})


class _Trial:
    """Holds calendars, in whole steps by month, against the target: many in one balance."""

    def __init__(self, chain: Chain, robot: Robot, step: float, *, loads: list[Load]) -> None:
        self.robot = robot
        self._chain, self._step = chain, step
        self._lanes = chain.lanes(robot)
        self.out: BoolArray = month_hours(self._lanes) > 0
        self.works = self.out & [any(month in load.months for load in loads) for month in range(1, 13)]
        levels = chain.demand(robot).level_loads
        self._filed: Designs = as_filed(robot, n_levels=len(levels))
        most = {load.name: 1.0 / load.on_fraction for load in loads}
        self._most = np.array([most.get(name, 0.0) for name in levels])
        self._highest = 1.0 / max(loads, key=_minutes_filed).on_fraction
        self.top = int(np.ceil(self._highest / step - 1e-9))

    def factors(self, steps: IntArray) -> FloatArray:
        """What steps (..., 12) multiply the filed minutes by; the last one ends where the hours do."""
        return np.asarray(np.minimum(steps * self._step, self._highest))

    def verdict(self, steps: IntArray) -> Verdict:
        """Verdict on calendars, (n_calendars, 12)."""
        many = repeated(self._filed, len(steps))
        work_x = np.minimum(self.factors(steps).T[:, None, :], self._most[:, None])
        balance = self._chain.run(self.robot, replace(many, work_x=work_x), lanes=self._lanes, keep="verdict")
        return verdict_on(balance, self.robot.target)


def _fill(trial: _Trial) -> tuple[IntArray, BoolArray, bool]:
    """Steps by month, which months bind, and whether any calendar meets the target."""
    steps = _raised(trial, np.zeros(12, dtype=np.int64), np.where(trial.works, trial.top, 0))
    if not steps.any() and not trial.verdict(steps[None, :]).target_met[0]:
        return steps, trial.works.copy(), False
    can_rise = _can_rise(trial, steps)
    for _ in range(_MOST_ROUNDS):
        if not can_rise.any():
            break
        raised = _raised(trial, steps, np.where(can_rise, trial.top, steps))
        if (raised == steps).all():
            raised = _some_raised(trial, steps, np.flatnonzero(can_rise))
        steps = raised
        can_rise = _can_rise(trial, steps)
    return steps, trial.works & (steps < trial.top) & ~can_rise, True


def _raised(trial: _Trial, steps: IntArray, caps: IntArray) -> IntArray:
    """Raise all months that stand below their cap, the lowest first and then together, until each of them binds.

    Where work falls short along that path, each month's own work tells where it will bind; the rest then go on to
    there, as long as the target is met.
    """
    reached, ends = _along(trial, steps, caps)
    return reached if (ends == caps).all() else _along(trial, reached, np.maximum(ends, reached))[0]


def _along(trial: _Trial, steps: IntArray, caps: IntArray) -> tuple[IntArray, IntArray]:
    """The last calendar on the path from steps to caps that meets the target, and where each month's own work ends."""
    rising = caps > steps
    if not rising.any():
        return steps, caps
    levels = np.arange(steps[rising].min() + 1, caps[rising].max() + 1)
    path = np.vstack([steps, np.clip(levels[:, None], steps, np.maximum(caps, steps))])
    verdict = trial.verdict(path[1:])
    enough = ~(verdict.month_work_done < trial.robot.target.work_done - 1e-9)
    ends = path[np.cumprod(enough, axis=1).sum(axis=1), np.arange(12)]
    return path[np.cumprod(verdict.target_met).sum()], np.where(rising, ends, caps)


def _some_raised(trial: _Trial, steps: IntArray, months: IntArray) -> IntArray:
    """Where each of some months could take one step, but not all of them: as many as can, the lowest first."""
    order = months[np.argsort(steps[months], kind="stable")]
    path = np.vstack([steps, steps + np.cumsum(np.eye(12, dtype=np.int64)[order], axis=0)])
    return np.asarray(path[np.cumprod(trial.verdict(path[1:]).target_met).sum()])


def _can_rise(trial: _Trial, steps: IntArray) -> BoolArray:
    """Which months could take one more step alone, (12,)."""
    months = np.flatnonzero(trial.works & (steps < trial.top))
    can = np.zeros(12, dtype=bool)
    if months.size:
        one_more = np.repeat(steps[None, :], months.size, axis=0)
        one_more[np.arange(months.size), months] += 1
        can[months] = trial.verdict(one_more).target_met
    return can


def _meets(chain: Chain, trial: _Trial, steps: IntArray) -> bool:
    """Whether the calendar meets the target when run as a robot file would be."""
    fed_back = calendar_robot(trial.robot, trial.factors(steps))
    return bool(verdict_on(chain.run(fed_back, keep="verdict"), fed_back.target).target_met[0])


def _entries(loads: list[Load], factors: FloatArray, out: BoolArray) -> tuple[CalendarEntry, ...]:
    return tuple(
        CalendarEntry(month, load.name, round(_hours_a_day(load) * 60.0 * _share(load, factors, month), 3))
        for month in range(1, 13)
        for load in loads
        if month in load.months and out[month - 1]
    )


def _share(load: Load, factors: FloatArray, month: int) -> float:
    """The load's ``on_fraction`` in a month."""
    return float(min(load.on_fraction * factors[month - 1], 1.0))


def _step_of(loads: list[Load]) -> tuple[float, float]:
    """The step in minutes of the longest load, and as a factor."""
    longest = max(loads, key=_minutes_filed)
    step_min = STEP_MIN * np.ceil(_hours_a_day(longest) * 60.0 / STEP_MIN / _MOST_STEPS)
    return float(step_min), float(step_min / _minutes_filed(longest))


def _hours_a_day(load: Load) -> float:
    return 24.0 if load.hours is None else sum(end - start for start, end in load.hours)


def _minutes_filed(load: Load) -> float:
    return _hours_a_day(load) * 60.0 * load.on_fraction


def _without_idle(load: Load, volts: float) -> Load:
    """The load with nothing drawn while it waits, and as much less while it works, on a rail of ``volts``."""
    if load.idle_watts == 0:
        return load
    if load.amps is not None:
        return load.model_copy(update={"amps": load.amps - load.idle_watts / volts, "idle_watts": 0.0})
    watts = load.watts if load.traction is None else traction_w(**load.traction.model_dump())
    return load.model_copy(update={"watts": (watts or 0.0) - load.idle_watts, "traction": None, "idle_watts": 0.0})
