"""From a balance to met or not met, for many designs at once."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from ..inputs.robot import Target
from ..storage import Balance
from ..types import BoolArray, FloatArray, IntArray

LOST_ABOVE_WH = 1e-3
"""Unserved essential energy above which a year counts as lost; ours: far above rounding, far below any load."""


@dataclass(frozen=True, eq=False)
class Verdict:
    """Met or not met; arrays are (n_designs,) unless said.

    lost : (n_years, n_designs). work_done : share of the skippable work done in the worst month; NaN: none asked.
    month_work_done : (12, n_designs), NaN where none is asked.
    """

    years: int
    lost: BoolArray
    years_survived: IntArray
    survival: FloatArray
    work_done: FloatArray
    month_work_done: FloatArray
    survival_met: BoolArray
    work_met: BoolArray
    target_met: BoolArray


def years_needed(target: Target, years: int) -> int:
    """Years that must survive for the target."""
    return math.ceil(target.survival * years - 1e-9)


def lost_years(balance: Balance, target: Target) -> BoolArray:
    """Which years are lost; (n_years, n_designs)."""
    if target.hours_out > 0:
        return np.asarray(balance.hours_out.sum(axis=0) > target.hours_out)
    return np.asarray(balance.unserved_wh.sum(axis=0) > LOST_ABOVE_WH)


def verdict_on(balance: Balance, target: Target) -> Verdict:
    """Hold every design of ``balance`` against the target: survival, and work done in the worst month."""
    lost = lost_years(balance, target)
    years = lost.shape[0]
    survived = (~lost).sum(axis=0).astype(np.int64)
    asked, skipped = balance.work_asked_wh.sum(axis=1), balance.skipped_wh.sum(axis=1)
    with np.errstate(invalid="ignore", divide="ignore"):
        month_work = np.where(asked > 0, 1.0 - skipped / asked, np.nan)
    any_asked = (asked > 0).any(axis=0)
    work_done = np.where(any_asked, np.where(np.isnan(month_work), np.inf, month_work).min(axis=0), np.nan)
    survival_met = survived >= years_needed(target, years)
    work_met = ~any_asked | (work_done >= target.work_done - 1e-9)
    return Verdict(
        years=years,
        lost=lost,
        years_survived=survived,
        survival=survived / years,
        work_done=work_done,
        month_work_done=month_work,
        survival_met=survival_met,
        work_met=work_met,
        target_met=survival_met & work_met,
    )
