"""What would become of the robot in less light, or parked the wrong way."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from ..harvest import Supply
from ..inputs.robot import Robot
from ..light.window_light import COATED_FACTOR as COATED_FACTOR
from ..storage import Balance, as_filed
from ..types import FloatArray
from .chain import Chain
from .designs import repeated
from .verdict import verdict_on

DIM_LIGHT_X = 0.9
"""The light of the second opinion: everything 10 % darker."""
COARSE_LIGHT_X = 0.85
"""A climate read off the world table may be so much too bright."""


def filed_and_dimmed(
    chain: Chain, robot: Robot, *, keep: Literal["months", "trace"] = "months"
) -> tuple[Balance, FloatArray]:
    """The balance of the robot as filed, and the shares of years alive in light 10 and 15 % dimmer.

    A third share, behind coated glass, is that in as much less light as such glass may pass.
    A run costs by its steps more than by its lanes: all together take little longer than the first alone.
    """
    coated = robot.window is not None and robot.window.clear_share < 1.0
    light_x = np.array([1.0, DIM_LIGHT_X, COARSE_LIGHT_X, *([1.0 / COATED_FACTOR] if coated else [])])
    filed = as_filed(robot, n_levels=len(chain.demand(robot).level_loads))
    designs = replace(repeated(filed, light_x.size), light_x=light_x)
    balance = chain.run(robot, designs, keep=keep)
    return balance.of(0), verdict_on(balance, robot.target).survival[1:]


@dataclass(frozen=True)
class Parked:
    """Whether the robot as filed meets its target, and the share of years alive if it always parks the wrong way:
    None where it does not roam, or parks so anyway.
    """

    met_as_filed: bool
    survival_worst: float | None


def parked_wrong(chain: Chain, robot: Robot) -> Parked:
    """What parking the wrong way costs, beside the robot as filed."""
    offers = [chain.supply(robot)]
    if robot.roams and robot.parked != "worst":
        offers.append(chain.supply(robot.model_copy(update={"parked": "worst"}), accounts=False))
    filed = as_filed(robot, n_levels=len(chain.demand(robot).level_loads))
    designs = replace(repeated(filed, len(offers)), watts_at=np.arange(len(offers)))
    verdict = verdict_on(chain.run(robot, designs, supply=_beside(offers), keep="verdict"), robot.target)
    return Parked(bool(verdict.target_met[0]), float(verdict.survival[1]) if len(offers) > 1 else None)


def _beside(offers: list[Supply]) -> Supply:
    """Several supplies of the same robot as columns of one, without accounts."""
    return replace(
        offers[0],
        watts=np.concatenate([offer.watts for offer in offers]),
        offer_w=np.concatenate([offer.offer_w for offer in offers], axis=1),
        panel_w=None,
        wire_w=None,
    )
