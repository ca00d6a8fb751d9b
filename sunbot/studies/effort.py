"""How far a long study is, told to whoever watches; studies themselves print nothing."""

from __future__ import annotations

from collections.abc import Callable

Watcher = Callable[[float], None]
"""Is told the share of the work that is done, 0 to 1, rising."""

STEP_COST, LANE_STEP_COST, SAMPLE_COST = 4e-5, 2e-8, 6e-8
"""Seconds, on one machine, of a step of a balance, of a lane in it, and of one size and heading of the supply; only
their ratios count."""


class Effort:
    """Work planned and done in one unit, the seconds one machine would take."""

    def __init__(self, watcher: Watcher | None, planned: float) -> None:
        self._watcher = watcher
        self._planned, self._done = planned, 0.0

    def did(self, cost: float) -> None:
        """Some work is done; where there was more of it than planned, at least as much again is taken to be left."""
        self._done += cost
        if self._done >= self._planned:
            self._planned = self._done + cost
        if self._watcher is not None:
            self._watcher(self._done / self._planned)


def balance_cost(steps: int, lanes: int) -> float:
    """Of one balance."""
    return steps * (STEP_COST + LANE_STEP_COST * lanes)


def supply_cost(n_times: int, sizes: int) -> float:
    """Of light and supply, for several sizes."""
    return SAMPLE_COST * n_times * (sizes + 10)
