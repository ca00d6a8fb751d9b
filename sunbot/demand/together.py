"""Which loads ever run at the same time."""

from __future__ import annotations

from math import gcd

import numpy as np
import pandas as pd

from ..inputs.robot import Robot
from ..types import BoolArray, FloatArray, IntArray
from .duty import running_share, step_of_h

PART_S = 180
"""Steps within which hours begin or end are looked at in such parts, so that loads that follow each other in one step
are not taken to run together."""

_NONE = 1e-9
"""Less of a step is the rounding of hours that touch."""


def groups_together(
    robot: Robot, times: pd.DatetimeIndex, worst: FloatArray, *, reference: bool
) -> tuple[BoolArray, FloatArray]:
    """Loads that run together at some time, (n_groups, n_loads), and the largest of ``worst`` then, (n_groups,).

    Parameters
    ----------
    robot : Robot
        Loads that are due together by hours, months and weekdays count as running together, whatever their on_fraction.
    times : (n_rows,)
        Middles of the steps, UTC.
    worst : (n_rows,)
        Anything that differs from step to step.
    reference : bool
        The times are of the 2001 calendar.
    """
    share = _shares(robot, times, reference=reference)
    running = share > _NONE
    whole = share >= np.array([load.on_fraction for load in robot.loads]) * (1.0 - 1e-9)
    mixed = np.flatnonzero((running & ~whole).any(axis=1) & (running.sum(axis=1) > 1))
    if mixed.size:
        parts = _parts(times, mixed)
        running = np.concatenate(
            [np.delete(running, mixed, axis=0), _shares(robot, parts, reference=reference) > _NONE]
        )
        worst = np.concatenate([np.delete(worst, mixed), np.repeat(worst[mixed], len(parts) // mixed.size)])
    groups, at = np.unique(running, axis=0, return_inverse=True)
    largest = np.full(len(groups), -np.inf)
    np.maximum.at(largest, at.ravel(), worst)
    return groups, largest


def _shares(robot: Robot, times: pd.DatetimeIndex, *, reference: bool) -> FloatArray:
    """Share of each step in which each load works; (n_times, n_loads)."""
    each = [running_share(load, times, site=robot.site, reference=reference) for load in robot.loads]
    return np.stack(each, axis=1)


def _parts(times: pd.DatetimeIndex, rows: IntArray) -> pd.DatetimeIndex:
    """Middles of the parts of some steps, in order."""
    step_s = round(step_of_h(times) * 3600.0)
    part_s = gcd(step_s, PART_S)
    middles = np.arange(step_s // part_s) * part_s + (part_s - step_s) // 2
    seconds = times.as_unit("s").asi8[rows][:, None] + middles
    return pd.DatetimeIndex(seconds.ravel().astype("datetime64[s]"), tz="UTC")
