"""Temperature of the box the battery sits in, by itself and with its heater on."""

from __future__ import annotations

from math import exp

import numpy as np

from ..types import FloatArray
from .pack import Pack


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


def heated_box_c(pack: Pack, box_c: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Box temperature with the heater on, never above what it is to hold, and the share of its watts it draws.

    Parameters
    ----------
    pack : Pack
        Whose heater it is. With the loss of its box the heater lifts it by at most heater_w / box_loss_w_per_k and
        draws what that lift loses; without, it holds whatever the cold, at full power.
    box_c : (...,)
        Box temperature without a heater [°C].

    Returns
    -------
    Temperature [°C] and share from 0 to 1, each as box_c: the steady state of every step, without heating up.
    """
    cold = box_c < pack.heater_on_below_c
    if pack.heater_w <= 0 or not cold.any():
        return box_c, np.zeros_like(box_c)
    if pack.box_loss_w_per_k is None:
        return np.maximum(box_c, pack.heater_on_below_c), cold.astype(float)
    most_k = pack.heater_w / pack.box_loss_w_per_k
    lift_k = np.clip(pack.heater_on_below_c - box_c, 0.0, most_k)
    # One that is strong enough holds its temperature to the last digit: limits of the charge may lie right there.
    warm_c = np.where(lift_k < most_k, np.maximum(box_c, pack.heater_on_below_c), box_c + most_k)
    return warm_c, lift_k / most_k
