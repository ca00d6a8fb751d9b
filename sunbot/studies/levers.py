"""How much the answer moves when one thing is otherwise: light, load, panel, battery, dirt, cold."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict, dataclass, replace
from typing import Any

import numpy as np

from ..inputs.robot import Robot
from ..storage import Balance, Designs, as_filed
from ..types import FloatArray
from .chain import Chain
from .designs import repeated
from .verdict import verdict_on

SHARES = (-0.20, -0.10, 0.10, 0.20)
"""Changes of light, load, panel and battery; common practice."""

DIRT_POINTS = (0.10, 0.20)
COLDER_K = -10.0
"""Dirt on top of the filed one, and a winter of the hard kind all year; ours, round."""

_FACTORS = ("light", "load", "panel", "battery")


@dataclass(frozen=True)
class Lever:
    """One thing changed: what, by how much, and what becomes of survival, hours out, and work done in the worst month.

    work_done : None where no skippable work is asked.
    """

    what: str
    change: str
    survival: float
    hours_out_per_year: float
    work_done: float | None

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        return asdict(self)


def levers(chain: Chain, robot: Robot) -> tuple[Lever, ...]:
    """The answer with one thing changed at a time, the things that move it most first.

    Light, load, panel and battery by 10 and 20 % either way; panels clean, and 10 and 20 points of light more lost to
    dirt; the air 10 K colder throughout. Dirt counts as a factor on the harvest, the year's mean of all panels.
    Things are ranked by how far they move survival, then hours out, then work done.
    """
    labels, changed = _changes(robot)
    filed = as_filed(robot, n_levels=len(chain.demand(robot).level_loads))
    designs = changed(repeated(filed, len(labels)))
    watts = robot.watts * np.array([1.0, *(1.0 + share for share in SHARES)])
    balance = chain.run(robot, designs, watts=watts, lanes=chain.lanes(robot), keep="verdict")
    base, *found = _judged(balance, robot, labels)
    cold = chain.in_other_air(COLDER_K)
    found += _judged(
        cold.run(robot, lanes=chain.lanes(robot), keep="verdict"), robot, [("air", f"{-COLDER_K:g} K colder")]
    )
    return _ranked(found, base)


def _changes(robot: Robot) -> tuple[list[tuple[str, str]], Callable[[Designs], Designs]]:
    """What is changed and by how much, the robot as filed first; and the designs to match."""
    factors = [(what, share) for what in _FACTORS for share in SHARES]
    weights = [panel.total_watts for panel in robot.panels]
    loss = float(np.average([np.mean(panel.dirt_loss) for panel in robot.panels], weights=weights))
    dirt = {"clean": 0.0} | {f"{points * 100:.0f} points more": min(loss + points, 1.0) for points in DIRT_POINTS}
    labels = [
        ("as filed", ""),
        *((what, f"{share:+.0%}") for what, share in factors),
        *(("dirt", change) for change in dirt),
    ]
    passed = [(1.0 - value) / (1.0 - loss) if loss < 1.0 else 1.0 for value in dirt.values()]
    x = np.array([1.0, *(1.0 + share for _, share in factors), *passed])
    whats = np.array([what for what, _ in labels])

    def changed(many: Designs) -> Designs:
        load_x = np.where(whats == "load", x, 1.0)
        sizes = np.zeros(len(labels), dtype=np.int64)
        sizes[whats == "panel"] = 1 + np.arange(len(SHARES))
        return replace(
            many,
            watts_at=sizes,
            light_x=np.where((whats == "light") | (whats == "dirt"), x, 1.0),
            essential_x=load_x,
            work_x=many.work_x * load_x,
            battery_ah=many.battery_ah * np.where(whats == "battery", x, 1.0),
        )

    return labels, changed


def _judged(balance: Balance, robot: Robot, labels: list[tuple[str, str]]) -> list[Lever]:
    """One lever for each design of a balance."""
    verdict = verdict_on(balance, robot.target)
    hours: FloatArray = balance.hours_out.sum(axis=0).mean(axis=0)
    return [
        Lever(
            what,
            change,
            survival=float(verdict.survival[at]),
            hours_out_per_year=float(hours[at]),
            work_done=None if np.isnan(verdict.work_done[at]) else float(verdict.work_done[at]),
        )
        for at, (what, change) in enumerate(labels)
    ]


def _ranked(found: list[Lever], base: Lever) -> tuple[Lever, ...]:
    """The things that move the answer most first; the changes of one thing stay together, in their order."""

    def moved(lever: Lever) -> tuple[float, float, float]:
        work = abs((lever.work_done or 0.0) - (base.work_done or 0.0))
        return abs(lever.survival - base.survival), abs(lever.hours_out_per_year - base.hours_out_per_year), work

    whats = list(dict.fromkeys(lever.what for lever in found))
    whats.sort(key=lambda what: max(moved(lever) for lever in found if lever.what == what), reverse=True)
    return tuple(lever for what in whats for lever in found if lever.what == what)
