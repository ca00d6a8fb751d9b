"""What would become of the robot in less light, or parked the wrong way."""

from __future__ import annotations

from dataclasses import replace
from typing import Literal

import numpy as np

from ..harvest import Supply
from ..inputs.robot import Robot
from ..light import heading_matters
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


def offers_by_parking(chain: Chain, robot: Robot) -> Supply:
    """What its panels offer as filed and, in a second column, always parked the wrong way; without accounts.

    One column where no way is wrong: it does not roam, parks so anyway, or heading does not matter to its panels.
    """
    offers = [chain.supply(robot)]
    if robot.roams and robot.parked != "worst" and any(heading_matters(panel) for panel in robot.panels):
        offers.append(chain.supply(robot.model_copy(update={"parked": "worst"}), accounts=False))
    return replace(
        offers[0],
        watts=np.concatenate([offer.watts for offer in offers]),
        offer_w=np.concatenate([offer.offer_w for offer in offers], axis=1) if len(offers) > 1 else offers[0].offer_w,
        panel_w=None,
        wire_w=None,
    )
