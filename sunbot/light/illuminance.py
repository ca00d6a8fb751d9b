"""Lux from W/m²: what a light meter would show beside what the cells get."""

from __future__ import annotations

import numpy as np

from ..types import FloatArray

OVERCAST_LM_W = 112.5
"""Published: Littlefair, Lighting Research & Technology 17 (1985) 162: overcast skies 110-115 lm/W."""
CLEAR_DIFFUSE_LM_W = 137.0
"""Published: the same, clear skies without the sun 130-144 lm/W."""
DIRECT_LM_W = 100.0
"""From memory: the same, the sun higher than 20 deg 90-105 lm/W; with it clear global light comes to 105-109."""
_CLEAR_BELOW = 0.2  # share of ghi that is diffuse under a clear sky: common practice


def illuminance_lux(direct_w_m2: FloatArray, diffuse_w_m2: FloatArray, *, diffuse_share: FloatArray) -> FloatArray:
    """Illuminance of a plane [lx] from light that was direct and light that was diffuse outside; of any shape.

    Parameters
    ----------
    direct_w_m2, diffuse_w_m2 : broadcastable
        On the plane [W/m²], at least 0.
    diffuse_share : broadcastable
        Diffuse over all light on the level outside, 0 to 1: 1 under an overcast sky.

    Source
    ------
    Published: Littlefair 1985, means of many sites; the efficacy of diffuse light is taken to fall evenly from clear
    to overcast.
    """
    cloudy = np.clip((diffuse_share - _CLEAR_BELOW) / (1.0 - _CLEAR_BELOW), 0.0, 1.0)
    efficacy = CLEAR_DIFFUSE_LM_W + cloudy * (OVERCAST_LM_W - CLEAR_DIFFUSE_LM_W)
    return np.asarray(direct_w_m2 * DIRECT_LM_W + diffuse_w_m2 * efficacy)
