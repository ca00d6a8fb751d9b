"""What the cold had to do with outages: how empty a cold pack counts, and how much harvest frost kept out of it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..calendar import Lanes
from ..inputs.robot import Robot
from ..storage import Balance, usable_share
from ..types import FloatArray
from .chain import Chain
from .heating import box_of

BEFORE_H = 120.0
"""How long before an outage its harvest is looked at; common practice."""


COLD_NOTED = 0.1
"""Share of harvest blocked by frost, or of charge locked by cold, from which on it is worth a word. Ours."""


@dataclass(frozen=True)
class OutageCause:
    """Means over the first outages of each month and year.

    box_c : of the box when the loads are cut [°C]. empty_at_soc : charge at which a pack so cold is cut.
    frost_share : share of the harvest of the five days before that came while the box was too cold to be charged.
    """

    box_c: float
    empty_at_soc: float
    frost_share: float


def outage_cause(chain: Chain, robot: Robot, balance: Balance, lanes: Lanes) -> OutageCause | None:
    """What the cold had to do with the outages of the robot as filed; None where there are none."""
    if balance.first_out is None:
        raise RuntimeError("the balance kept no outages")
    began = balance.first_out[:, :, 0]
    month, year = np.nonzero(began >= 0)
    if not year.size:
        return None
    pack, step_h, box_c = chain.pack(robot), chain.weather.step_h, box_of(chain, robot).warm_c
    step, offer_w = began[month, year], chain.offer_w(robot)
    blocked = total = 0.0
    for back in range(round(BEFORE_H / step_h)):
        at = np.maximum(step - back, 0)
        rows = lanes.row[at, year][(step >= back) & (lanes.step_h[at, year] > 0)]
        total += float(offer_w[rows].sum())
        blocked += float(offer_w[rows][box_c[rows] < pack.charge_min_c].sum())
    cut_c: FloatArray = box_c[lanes.row[step, year]]
    usable = usable_share(pack, cut_c)
    return OutageCause(
        box_c=float(cut_c.mean()),
        empty_at_soc=float((1.0 - usable * (1.0 - pack.cutoff_soc)).mean()),
        frost_share=blocked / total if total > 0 else 0.0,
    )
