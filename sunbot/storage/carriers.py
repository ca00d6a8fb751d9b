"""What goes into and comes out of the balance."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np

from ..types import BoolArray, FloatArray, IntArray


@dataclass(frozen=True, eq=False)
class Designs:
    """Variants of the robot computed side by side; each (n_designs,) unless said.

    watts_at : index into Supply.watts. battery_ah : capacity when new. light_x, essential_x : factors on harvest
    offered and on the essential loads. work_x : (12, n_levels, n_designs) factors on each skippable load by month.
    extra_w : constant essential load added at the battery.
    """

    watts_at: IntArray
    battery_ah: FloatArray
    light_x: FloatArray
    essential_x: FloatArray
    work_x: FloatArray
    extra_w: FloatArray


@dataclass(frozen=True, eq=False)
class Ledger:
    """Energy by fate [Wh], each (n_years, n_designs). panel = sum of all others + stored, to 1e-6 of panel."""

    panel: FloatArray
    panel_wire: FloatArray
    controller: FloatArray
    spilled: FloatArray
    battery_loss: FloatArray
    self_discharge: FloatArray
    heater: FloatArray
    boots: FloatArray
    off_draw: FloatArray
    rails: FloatArray
    rail_wire: FloatArray
    idle: FloatArray
    loads: FloatArray
    stored: FloatArray


@dataclass(frozen=True, eq=False)
class Trace:
    """The balance of the first design by step; each (n_steps, n_years), in lane order. Powers are step means [W]."""

    harvest_w: FloatArray
    spilled_w: FloatArray
    demand_w: FloatArray
    served_w: FloatArray
    soc: FloatArray
    box_temp_c: FloatArray
    on: FloatArray


@dataclass(frozen=True, eq=False)
class Balance:
    """Outcome of the balance. Monthly arrays are (12, n_years, n_designs), calendar month January first.

    harvest_wh offered; spilled_wh refused; demand_wh asked; unserved_wh essential not served; skipped_wh, work_asked_wh
    of skippable work; hours_out; lowest_soc.
    outages, longest_out_h, visits : (n_years, n_designs); an outage that runs over the seam counts where it began.
    first_out : (12, n_years, n_designs) step of the lane at which the month's first outage began, -1 = none.
    settled : (n_designs,) false where the ring still moved after 20 rounds (the worse of the last two is given).
    cannot_give : (n_designs,) some step asked for more than the pack can give.
    months other than these are None with keep = "verdict". ledger with keep = "months" or "trace"; trace with "trace".
    """

    unserved_wh: FloatArray
    skipped_wh: FloatArray
    work_asked_wh: FloatArray
    hours_out: FloatArray
    visits: FloatArray
    settled: BoolArray
    cannot_give: BoolArray
    harvest_wh: FloatArray | None = None
    spilled_wh: FloatArray | None = None
    demand_wh: FloatArray | None = None
    lowest_soc: FloatArray | None = None
    outages: FloatArray | None = None
    longest_out_h: FloatArray | None = None
    first_out: IntArray | None = None
    ledger: Ledger | None = None
    trace: Trace | None = None

    def of(self, design: int) -> Balance:
        """The balance of one design, as if it had been run alone; the trace stays that of the first."""
        return replace(self, **_columns(self, design))


def _columns(part: Balance | Ledger, design: int) -> dict[str, Any]:
    """Every field of ``part`` cut down to one design."""
    found: dict[str, Any] = {}
    for name in (field.name for field in fields(part)):
        value = getattr(part, name)
        if isinstance(value, Ledger):
            found[name] = Ledger(**_columns(value, design))
        elif isinstance(value, np.ndarray):
            found[name] = value[..., [design]]
    return found
