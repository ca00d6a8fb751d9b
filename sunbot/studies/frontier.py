"""Pairs of panel and battery held against one weather, and the smallest battery for each panel."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..inputs.robot import Robot
from ..types import BoolArray, FloatArray, IntArray
from .chain import Chain
from .deficit import deficit_to_cover_wh, largest_deficit_wh, yearly_wh
from .designs import design_grid
from .effort import Effort, balance_cost
from .pick_result import Shortfall
from .search import DIGITS, smallest
from .verdict import Verdict, verdict_on, years_needed

RESOLUTION = 0.01
BRACKET_BELOW, BRACKET_ABOVE = 0.5, 2.5
"""The search starts between these multiples of what the running deficit of all that is asked needs; it widens where
that is wrong: upwards for losses and frost, downwards where skippable work may give way."""
LEAST_H, MOST_H = 0.5, 60 * 24.0
"""Batteries that hold from half an hour to sixty days of the mean need are tried when no range is given."""
WIDTH = 14
"""Batteries tried at once for each panel."""


@dataclass(frozen=True)
class Judged:
    """What one pair comes to; work_done NaN: none asked."""

    survival: float
    work_done: float
    met: bool


class Frontier:
    """Wattages with their supply; a pair is judged in the energy years its own robot would have."""

    def __init__(self, chain: Chain, robot: Robot, sizes: FloatArray, *, effort: Effort) -> None:
        self.chain, self.robot, self.sizes, self.effort = chain, robot, sizes, effort
        self.n_levels = len(chain.demand(robot).level_loads)
        self.supply = chain.supply(robot, watts=sizes, accounts=False)
        self.first_months = chain.first_months(robot, self.supply)
        self._judged: dict[tuple[int, float], Judged] = {}

    def judge(self, watts_at: IntArray, battery_ah: FloatArray) -> list[Judged]:
        """What pairs come to; both arrays (n_pairs,). Nothing is run twice."""
        keys = [(int(at), float(ah)) for at, ah in zip(watts_at, battery_ah, strict=True)]
        fresh = sorted({key for key in keys if key not in self._judged})
        at, ah = np.array([key[0] for key in fresh], dtype=np.int64), np.array([key[1] for key in fresh])
        for these, verdict in self._verdicts(self.chain, at, ah):
            for row, pair in enumerate(these):
                self._judged[fresh[pair]] = Judged(
                    float(verdict.survival[row]), float(verdict.work_done[row]), bool(verdict.target_met[row])
                )
        return [self._judged[key] for key in keys]

    def smallest_batteries(self, given: tuple[float, float] | None) -> FloatArray:
        """The smallest capacity that meets the target, for each wattage; NaN where none in range does."""
        answer = np.full(self.sizes.size, np.nan)
        cases = np.flatnonzero(~self._hopeless())
        if not cases.size:
            return answer
        if given is None:
            floor, cap = self._widest_range()
            low, high = (np.clip(end, floor, cap)[cases] for end in self._bracket())
        else:
            (floor, cap), (low, high) = given, (np.full(cases.size, end) for end in given)
        answer[cases] = self._search(cases, low, high)
        for again, below, above in (
            (np.isnan(answer[cases]) & (high < cap), high, np.full(cases.size, cap)),
            ((answer[cases] <= low * 1.001) & (low > floor), np.full(cases.size, floor), low),
        ):
            if again.any():
                answer[cases[again]] = self._search(cases[again], below[again], above[again])
        return answer

    def battery_range_ah(self, given: tuple[float, float] | None) -> tuple[float, float]:
        """Capacities between which an answer is looked for [Ah], to the digits of what is tried."""
        low, high = self._widest_range() if given is None else given
        return float(f"{low:.{DIGITS}g}"), float(f"{high:.{DIGITS}g}")

    def shortfalls(self, capacity_ah: FloatArray, *, most_ah: float) -> tuple[Shortfall, ...]:
        """Why the wattages without a battery (NaN) have none: what they come to with the largest one tried."""
        none = np.flatnonzero(np.isnan(capacity_ah))
        if not none.size:
            return ()
        dark = self._hopeless()
        tried = none[~dark[none]]
        judged = dict(zip(tried, self.judge(tried, np.full(tried.size, most_ah)), strict=True))
        found = []
        for at in none:
            watts = float(self.sizes[at])
            if dark[at]:
                found.append(Shortfall(watts))
                continue
            here = judged[at]
            work = None if np.isnan(here.work_done) else here.work_done
            found.append(Shortfall(watts, most_ah, here.survival, work))
        return tuple(found)

    def _search(self, cases: IntArray, low: FloatArray, high: FloatArray) -> FloatArray:
        """The smallest capacity between two ends that meets the target, for some wattages."""

        def meets(some: IntArray, grid: FloatArray) -> BoolArray:
            judged = self.judge(np.repeat(cases[some], grid.shape[1]), grid.ravel())
            return np.array([pair.met for pair in judged]).reshape(grid.shape)

        return smallest(meets, low, high, rel=RESOLUTION, width=WIDTH)

    def _verdicts(self, chain: Chain, watts_at: IntArray, battery_ah: FloatArray) -> list[tuple[IntArray, Verdict]]:
        """Verdicts on pairs, those with one first month together, and which pairs they are."""
        out = []
        for month in np.unique(self.first_months[watts_at]) if watts_at.size else ():
            these = np.flatnonzero(self.first_months[watts_at] == month)
            designs = design_grid(
                self.robot, n_levels=self.n_levels, watts_at=watts_at[these], battery_ah=battery_ah[these]
            )
            lanes = chain.lanes(self.robot, first_month=int(month))
            balance = chain.run(self.robot, designs, watts=self.sizes, lanes=lanes, keep="verdict")
            self.effort.did(balance_cost(len(lanes.row), lanes.row.shape[1] * these.size))
            out.append((these, verdict_on(balance, self.robot.target)))
        return out

    def _hopeless(self) -> BoolArray:
        """Wattages that over all years give less than the target asks for, whatever the battery; (n_watts,).

        Not where each deployment starts charged: a battery may then carry all of it.
        """
        chain, target = self.chain, self.robot.target
        lanes = chain.lanes(self.robot, first_month=int(self.first_months[0]))
        if (lanes.before < 0).any():
            return np.zeros(self.sizes.size, dtype=bool)
        asked, row = chain.demand(self.robot), chain.weather.row
        essential_wh = np.sort(yearly_wh(asked.essential.total_w.min(axis=-1)[row], lanes))
        work_wh = float(yearly_wh(asked.work.total_w.min(axis=-1).sum(axis=1)[row], lanes).sum())
        own_wh = float(lanes.step_h.sum()) * self.supply.own_use_w
        least_wh = essential_wh[: years_needed(target, essential_wh.size)].sum() + target.work_done * work_wh + own_wh
        return np.asarray(yearly_wh(self.supply.offer_w.max(axis=-1), lanes).sum(axis=0) < least_wh)

    def _asked_w(self) -> FloatArray:
        """All that is asked, own use included, by weather step; (n_times,)."""
        return np.asarray(self.chain.asked_w(self.robot) + self.supply.own_use_w)

    def _per_wh(self) -> float:
        """Capacity when new that holds a watt-hour down to cut-off when worn [Ah/Wh]."""
        battery = self.robot.battery
        pack = self.chain.pack(self.robot)
        return 1.0 / (pack.curve.full_wh_ah * pack.capacity_share * (1.0 - (battery.cutoff_soc or 0.0)))

    def _widest_range(self) -> tuple[float, float]:
        """Capacities between which an answer is looked for [Ah]."""
        hour_ah = max(float(self._asked_w().mean()) * self._per_wh(), 1e-6)
        return LEAST_H * hour_ah, MOST_H * hour_ah

    def _bracket(self) -> tuple[FloatArray, FloatArray]:
        """Where to look first: around what the running deficit asks for, for each wattage [Ah]."""
        lanes = self.chain.lanes(self.robot, first_month=int(self.first_months[0]))
        needed = years_needed(self.robot.target, lanes.row.shape[1])
        deficit_wh = largest_deficit_wh(self.chain.offers_w(self.robot, self.supply), self._asked_w(), lanes)
        need_ah = deficit_to_cover_wh(deficit_wh, needed) * self._per_wh()
        return BRACKET_BELOW * need_ah, BRACKET_ABOVE * need_ah
