"""What a way to hold the nose, and what stands on the robot, cost in harvest by month."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..inputs.robot import Robot
from ..light import heading_matters
from ..types import FloatArray
from .chain import Chain
from .tilts import LOOK_YEARS, few_years, month_harvest_wh

_NOSES_DEG = np.arange(0.0, 360.0, 22.5)


@dataclass(frozen=True, eq=False)
class HeadingCost:
    """Harvest offered under one way to hold the nose, everything else as filed.

    policy : "as filed", "best fixed", "turns to sun", "worst parked" or "as filed, nothing in the way".
    harvest_wh_day : (12,), NaN in months the robot is not out. heading_deg : of the nose, where it is fixed.
    """

    policy: str
    harvest_wh_day: FloatArray
    heading_deg: float | None = None

    def to_dict(self) -> dict[str, Any]:
        """As in the JSON."""
        nose = {} if self.heading_deg is None else {"heading_deg": self.heading_deg}
        return {"policy": self.policy, **nose, "harvest_wh_day": self.harvest_wh_day}


def heading_costs(chain: Chain, robot: Robot, *, years: int = LOOK_YEARS) -> tuple[HeadingCost, ...]:
    """Harvest by month as filed, and under the best fixed heading, turning to the sun, and parking the wrong way.

    The best fixed heading is that of 16 with the most harvest in its worst month of harvest. Worked out on a few years.
    Empty where neither heading nor the robot's own parts matter: flat panels with nothing in the way, or a window.
    """
    if robot.window is not None:
        return ()
    if not any(heading_matters(panel) for panel in robot.panels):
        return ()
    few = few_years(chain, years)
    found = [HeadingCost("as filed", month_harvest_wh(few, robot))]
    if any(panel.obstructions for panel in robot.panels):
        found.append(HeadingCost("as filed, nothing in the way", month_harvest_wh(few, _cleared(robot))))
    fixed = [(nose, month_harvest_wh(few, _holding(robot, heading="fixed", heading_deg=nose))) for nose in _NOSES_DEG]
    nose, harvest = max(fixed, key=lambda entry: float(np.nanmin(entry[1])))
    found.append(HeadingCost("best fixed", harvest, float(nose)))
    found.append(HeadingCost("turns to sun", month_harvest_wh(few, _holding(robot, heading="turns-to-sun"))))
    worst = _holding(robot, heading="roams", parked="worst")
    found.append(HeadingCost("worst parked", month_harvest_wh(few, worst)))
    return tuple(found)


def _holding(robot: Robot, **update: Any) -> Robot:
    """The robot with another way to hold its nose."""
    return robot.model_copy(update={"headings": ()} | update)


def _cleared(robot: Robot) -> Robot:
    """The robot without masts and arms."""
    panels = tuple(panel.model_copy(update={"obstructions": ()}) for panel in robot.panels)
    return robot.model_copy(update={"panels": panels})
