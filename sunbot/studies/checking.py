"""`check`: does its panel keep this robot alive here, how sure is that, when does it fail, and why?"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import cached_property, partial
from typing import Any

import numpy as np
import pandas as pd

from .. import __version__
from ..calendar import Lanes
from ..harvest.temperatures import mean_cell_temp_c
from ..inputs.robot import Robot
from ..light import mean_plane_w_m2
from ..sky import Weather, weather_for
from ..storage import Balance, Trace
from ..types import Caution, FloatArray
from .autonomy import Autonomy, autonomy_of
from .beside import Beside
from .cautions import check_cautions
from .chain import Chain
from .effort import Watcher
from .flows import EnergyYear, Step, energy_year, light_to_panel
from .inputs_used import InputsUsed, inputs_used
from .months import month_table
from .outage_cause import OutageCause, outage_cause
from .plain import plain_document
from .statistics import wilson_interval
from .verdict import Verdict, verdict_on
from .ways_out import Nearness, WayOut, nearness, tilt_way_out, warm_way_out
from .what_ifs import filed_and_dimmed

WITH_WEATHER, WITH_SUPPLY, WITH_VERDICT = 0.08, 0.4, 0.75
"""Share of the work that is done when these are there; rough."""


@dataclass(frozen=True)
class Outages:
    """Outages of the essential loads over all years.

    first : instant the first one began. until_restart_h : mean time until it is back by itself or someone came.
    cause : what the cold had to do with them; None where there are none.
    """

    hours_per_year: float
    count_per_year: float
    longest_h: float
    first: pd.Timestamp | None
    until_restart_h: float | None
    cause: OutageCause | None


@dataclass(frozen=True, eq=False)
class CheckResult:
    """The answer of `check`.

    verdict : of the robot as filed (one design). survival_light_minus_10 : share alive with all light 10 % lower.
    survival_worst_parked : share alive if a robot that roams always parks the wrong way; None where it does not apply.
    survival_coated : share alive if coated glass passes COATED_FACTOR times less light; None without such glass.
    ways_out : single changes that would meet the target, the smallest first; none where it is met.
    extra_load_w : largest constant load that can be added with the target still met [W]; None where it is missed.
    months : DataFrame by month, columns as in the JSON. trace : step by step, None unless asked for.
    """

    robot: Robot
    weather: Weather
    inputs: InputsUsed
    verdict: Verdict
    survival_light_minus_10: float
    visits_per_year: float
    months: pd.DataFrame
    autonomy: Autonomy
    outages: Outages
    unserved_share: float
    energy: EnergyYear
    light_steps: tuple[Step, ...]
    cautions: tuple[Caution, ...]
    lanes: Lanes
    balance: Balance
    trace: Trace | None = None
    plane_w_m2: FloatArray | None = None
    cell_temp_c: FloatArray | None = None
    ways_out: tuple[WayOut, ...] = ()
    extra_load_w: float | None = None
    survival_worst_parked: float | None = None
    survival_coated: float | None = None

    @property
    def met(self) -> bool:
        """Whether the target is met; a cloudless year can show that it is missed, never that it is met."""
        return bool(self.verdict.target_met[0]) and self.weather.kind != "clear-sky"

    @cached_property
    def interval(self) -> tuple[float, float] | None:
        """95 % interval of the share of years survived; None for a single year."""
        if self.verdict.years == 1:
            return None
        return wilson_interval(int(self.verdict.years_survived[0]), self.verdict.years)

    def to_dict(self) -> dict[str, Any]:
        """The JSON document of ``sunbot check --json``."""
        verdict, target = self.verdict, self.robot.target
        low, high = self.interval or (None, None)
        worst = self.survival_worst_parked
        return plain_document(
            {
                "tool": {"name": "sunbot", "version": __version__},
                "inputs": self.inputs.to_dict(),
                "verdict": {
                    "target_met": self.met,
                    "survival_met": bool(verdict.survival_met[0]),
                    "work_met": bool(verdict.work_met[0]),
                    "years": verdict.years,
                    "years_survived": int(verdict.years_survived[0]),
                    "survival": float(verdict.survival[0]),
                    "survival_low": low,
                    "survival_high": high,
                    "survival_target": target.survival,
                    "survival_light_minus_10": self.survival_light_minus_10,
                    "work_done": float(verdict.work_done[0]),
                    "work_target": target.work_done,
                    "visits_per_year": self.visits_per_year,
                }
                | ({} if worst is None else {"survival_worst_parked": worst})
                | ({} if self.survival_coated is None else {"survival_coated": self.survival_coated}),
                "months": self.months.reset_index().to_dict(orient="records"),
                "autonomy_h": self.autonomy.to_dict(),
                "outages": {
                    "hours_per_year": self.outages.hours_per_year,
                    "count_per_year": self.outages.count_per_year,
                    "longest_h": self.outages.longest_h,
                    "first": self.outages.first,
                    "until_restart_h": self.outages.until_restart_h,
                    "cold": None if self.outages.cause is None else self.outages.cause.__dict__,
                },
                "ways_out": [way.__dict__ for way in self.ways_out],
                "extra_load_w": self.extra_load_w,
                "unserved_share": self.unserved_share,
                "energy_wh_per_year": {
                    "in": {"panel": self.energy.panel},
                    "out": self.energy.out,
                    "stored": self.energy.stored,
                },
                "light_to_panel": [{"step": step.step, "wh_per_year": step.wh_per_year} for step in self.light_steps],
                "cautions": [caution.__dict__ for caution in self.cautions],
            }
        )


def check(
    robot: Robot,
    *,
    weather: Weather | None = None,
    years: int = 50,
    seed: int = 1,
    trace: bool = False,
    watcher: Watcher | None = None,
) -> CheckResult:
    """Does its panel keep ``robot`` alive at its site?

    Parameters
    ----------
    weather : Weather, optional
        Light it is held against; left out, ``weather_for(robot.site, years=years, seed=seed)``.
    years, seed : int
        Weather years to try, and the seed of everything drawn.
    trace : bool
        Keep the balance step by step (``result.trace``), for the CSV and the plots.
    watcher : callable, optional
        Is told the share of the work done, 0 to 1.

    Raises
    ------
    InputError
        The site's weather cannot be used, or no such robot can be built.
    """
    watched = watcher or (lambda share: None)
    weather = weather_for(robot.site, years=years, seed=seed) if weather is None else weather
    watched(WITH_WEATHER)
    chain = Chain(weather, seed=seed)
    return check_with_nearness(chain, robot, years=years, seed=seed, trace=trace, watcher=watched)


def check_with_nearness(
    chain: Chain, robot: Robot, *, years: int, seed: int, trace: bool = False, watcher: Watcher | None = None
) -> CheckResult:
    """`check` on a chain that may already hold the stages' results."""
    watched = watcher or (lambda share: None)
    chain.lanes(robot)  # with all that both need, before they part
    watched(WITH_SUPPLY)
    with Beside(partial(_aside, chain, robot)) as helper:
        helper.ask(None)
        result = check_on(chain, robot, years=years, seed=seed, trace=trace)
        watched(WITH_VERDICT)
        met = bool(result.verdict.target_met[0])
        others = () if met else (tilt_way_out(chain, robot), warm_way_out(chain, robot))
        near: Nearness = helper.answer()
    watched(1.0)
    ways = [*near.ways_out, *(way for way in others if way is not None)]
    ways.sort(key=lambda way: way.times)
    worst = near.survival_worst_parked
    differs = worst is not None and worst != float(result.verdict.survival[0])
    return replace(
        result,
        ways_out=tuple(ways),
        extra_load_w=near.extra_load_w,
        survival_worst_parked=worst if differs else None,
    )


def _aside(chain: Chain, robot: Robot) -> Callable[[None], Nearness]:
    return lambda _: nearness(chain, robot)


def check_on(chain: Chain, robot: Robot, *, years: int, seed: int, trace: bool = False) -> CheckResult:
    """`check` but for what is worked out beside it: how close it was, and how it fares parked the wrong way."""
    lanes = chain.lanes(robot)
    balance, dimmed = filed_and_dimmed(chain, robot, keep="trace" if trace else "months")
    verdict = verdict_on(balance, robot.target)
    plane_w_m2 = mean_plane_w_m2(chain.lights(robot)[0])
    months = month_table(balance, lanes, plane_w_m2)
    if balance.ledger is None:
        raise RuntimeError("the balance kept no ledger")
    energy = energy_year(balance.ledger)
    return CheckResult(
        robot=robot,
        weather=chain.weather,
        inputs=inputs_used(robot, chain.weather, years=verdict.years, seed=seed, first_month=lanes.first_month),
        verdict=verdict,
        survival_light_minus_10=float(dimmed[0]),
        visits_per_year=float(balance.visits[:, 0].mean()),
        months=months,
        autonomy=autonomy_of(chain, robot),
        outages=_outages(balance, lanes, chain.weather, cause=outage_cause(chain, robot, balance, lanes)),
        unserved_share=_unserved_share(balance),
        energy=energy,
        light_steps=light_to_panel(robot, chain.lights(robot), chain.harvest_yield(robot), panel_wh=energy.panel),
        survival_coated=float(dimmed[2]) if dimmed.size > 2 else None,
        cautions=check_cautions(chain, robot, balance, verdict, survival_coarse=float(dimmed[1])),
        lanes=lanes,
        balance=balance,
        trace=balance.trace,
        plane_w_m2=plane_w_m2 if trace else None,
        cell_temp_c=mean_cell_temp_c(chain.lights(robot)[0], chain.weather_at(robot), robot) if trace else None,
    )


def _outages(balance: Balance, lanes: Lanes, weather: Weather, *, cause: OutageCause | None) -> Outages:
    if balance.outages is None or balance.longest_out_h is None or balance.first_out is None:
        raise RuntimeError("the balance kept no outages")
    began = balance.first_out[:, :, 0]
    month, year = np.nonzero(began >= 0)
    # The last energy year runs on into the head of the weather: the first step of all is the first outage.
    first = None if not year.size else weather.times[int(lanes.row[began[month, year], year].min())].tz_convert("UTC")
    n_years = began.shape[1]
    hours, count = float(balance.hours_out[:, :, 0].sum()), float(balance.outages[:, 0].sum())
    return Outages(
        hours_per_year=hours / n_years,
        count_per_year=count / n_years,
        longest_h=float(balance.longest_out_h[:, 0].max()),
        first=first,
        until_restart_h=hours / count if count > 0 else None,
        cause=cause,
    )


def _unserved_share(balance: Balance) -> float:
    if balance.demand_wh is None:
        raise RuntimeError("the balance kept no demand")
    asked = float((balance.demand_wh - balance.work_asked_wh)[:, :, 0].sum())
    return float(balance.unserved_wh[:, :, 0].sum()) / asked if asked > 0 else 0.0
