"""What the light room hands on."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..types import FloatArray


@dataclass(frozen=True, eq=False)
class Sun:
    """The sun over the reference rows; each (n_rows,).

    zenith_deg : apparent (refracted) zenith angle; azimuth_deg : from north, clockwise; both are the mean over the lit
    part of the step where the sun rises or sets in it. lit : share of the step with the sun above the level horizon.
    extra_w_m2 : extraterrestrial normal irradiance. airmass : relative, NaN-free (capped near the horizon).
    """

    zenith_deg: FloatArray
    azimuth_deg: FloatArray
    lit: FloatArray
    extra_w_m2: FloatArray
    airmass: FloatArray


def number_kind(n_headings: int) -> type[np.floating[Any]]:
    """Of tables by step and heading: with many headings in single precision, which halves the largest arrays of a run.

    Its error of 6e-8 of a value lies far below that of any model here.
    """
    return np.float64 if n_headings == 1 else np.float32


@dataclass(frozen=True, eq=False)
class LightYield:
    """Irradiation of a plane after each step, mean over the weather's years and the headings [Wh/m2 per year].

    level : on the level, open sky. angle : on the tilted plane, open sky. horizon : after horizon, obstructions and
    window. glass : after reflection at the panel's own glass. dirt : after dirt. snow : after snow cover (the cells).
    """

    level: float
    angle: float
    horizon: float
    glass: float
    dirt: float
    snow: float


@dataclass(frozen=True, eq=False)
class Light:
    """Light on one panel.

    plane_w_m2 : (n_times, n_headings) on the plane, after horizon and shade, before glass reflection and dirt.
    cells_w_m2 : (n_times, n_headings) what the cells can use, after glass, dirt, snow, shade.
    weight : (n_times or 1, n_headings) share of the step spent under each heading; each row sums to 1.
        All panels of a robot share the same headings; a panel for which heading does not matter has n_headings = 1.
    yearly : irradiation after each step.
    """

    plane_w_m2: FloatArray
    cells_w_m2: FloatArray
    weight: FloatArray
    yearly: LightYield


def mean_plane_w_m2(light: Light) -> FloatArray:
    """Irradiance on the plane of a panel, mean over its headings [W/m2]; (n_times,)."""
    weight = np.broadcast_to(light.weight, light.plane_w_m2.shape)
    return np.asarray(np.einsum("th,th->t", light.plane_w_m2, weight))
