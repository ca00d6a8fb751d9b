"""Temperature of the box the battery sits in."""

from __future__ import annotations

from math import exp

import numpy as np

from ..types import FloatArray


def box_temp_c(air_temp_c: FloatArray, *, step_h: float, lag_h: float, rise_c: float) -> FloatArray:
    """Air through a first-order lag, plus a constant rise; the series is a ring, so its end warms its start.

    Parameters
    ----------
    air_temp_c : (n_times,)
        Air temperature of each step [°C], in time order.
    step_h : float
        Length of a step [h].
    lag_h : float
        Time constant [h]; 0 follows the air.
    rise_c : float
        How much warmer than the air the box is in the mean [K].

    Returns
    -------
    Box temperature [°C], (n_times,): the periodic solution of the exact exponential step.
    """
    air = np.asarray(air_temp_c, dtype=float)
    keep = exp(-step_h / lag_h) if lag_h > 0 else 0.0
    temp = (1.0 - keep) * air
    # The geometric sum over the past, doubled in reach each time: (1 + k S)(1 + k²S²)(1 + k⁴S⁴)...
    reach = 1
    while keep > 1e-18:
        temp = temp + keep * np.roll(temp, reach)
        keep, reach = keep * keep, reach * 2
    return temp + rise_c
