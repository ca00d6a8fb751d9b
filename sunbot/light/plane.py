"""The parts of the sky's light, which no panel changes, and how much of each a bare tilted plane takes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from pvlib import irradiance

from ..types import FloatArray
from .carriers import Sun

_COS_85 = float(
    np.cos(np.radians(85.0))
)  # Published: Perez et al., Solar Energy 44 (1990) 271: b = max(cos 85°, cos z)
_ROWS_AT_ONCE = 65536


@dataclass(frozen=True, eq=False)
class SkyParts:
    """Light outside in four parts, each (n_times,) in W/m², none of them NaN; what a plane takes is linear in them.

    direct : from the direction of the sun, on a plane that faces it: beam and circumsolar light.
    isotropic : on the level, from the sky evenly bright all over.
    brightening : of the band above the horizon, on a vertical plane; below 0 under overcast skies.
    ground : thrown back by the ground, on a plane that sees nothing else.
    """

    direct: FloatArray
    isotropic: FloatArray
    brightening: FloatArray
    ground: FloatArray


def sky_parts(
    ghi: FloatArray,
    dni: FloatArray,
    *,
    dhi: FloatArray,
    sun: Sun,
    albedo: FloatArray,
) -> SkyParts:
    """Split sky light by the continuous Perez model; a level plane gets all of it back.

    Parameters
    ----------
    ghi, dni, dhi : (n_times,)
        On the level, direct normal and diffuse [W/m²], at least 0. While the sun is down all of ghi is diffuse.
    sun : Sun
        Over the same steps, each of its arrays (n_times,).
    albedo : (n_times,)
        Share of light the ground throws back.

    Source
    ------
    Published: Driesse, Jensen & Perez, Solar Energy 267 (2024) 112093, by pvlib, after Perez et al., Solar Energy 44
    (1990) 271.
    """
    up = sun.lit > 0.0
    height = np.cos(np.radians(sun.zenith_deg))
    diffuse = np.where(up, dhi, ghi)
    direct = np.where(up, dni, 0.0)
    isotropic = diffuse.copy()
    brightening = np.zeros_like(diffuse)
    rows = np.flatnonzero(up & (dhi > 0.0))
    for first in range(0, rows.size, _ROWS_AT_ONCE):
        at = rows[first : first + _ROWS_AT_ONCE]
        # upright, the plane takes half of the isotropic part and all of the brightening: both can be read off
        upright = irradiance.perez_driesse(
            90.0,
            0.0,
            dhi[at],
            direct[at],
            sun.extra_w_m2[at],
            sun.zenith_deg[at],
            0.0,
            sun.airmass[at],
            return_components=True,
        )
        circumsolar = (dhi[at] - 2.0 * upright["poa_isotropic"]) / np.maximum(height[at], _COS_85)
        direct[at] += circumsolar
        # what the model drops within 5 deg of the horizon is light too
        isotropic[at] -= circumsolar * height[at]
        brightening[at] = upright["poa_horizon"]
    return SkyParts(direct, isotropic, brightening, albedo * ghi)


def direction(azimuth_deg: FloatArray | float, elevation_deg: FloatArray | float) -> FloatArray:
    """Unit vectors (3, ...) east, north, up for azimuths from north, clockwise, and elevations [deg]."""
    azimuth, elevation = np.broadcast_arrays(np.radians(azimuth_deg), np.radians(elevation_deg))
    level = np.cos(elevation)
    return np.stack([level * np.sin(azimuth), level * np.cos(azimuth), np.sin(elevation)])


def normal(tilt_deg: FloatArray | float, azimuth_deg: FloatArray | float) -> FloatArray:
    """Unit normals (3, ...) of planes that lean ``tilt_deg`` from flat towards ``azimuth_deg``."""
    return direction(azimuth_deg, 90.0 - np.asarray(tilt_deg))


def on_slope(vectors: FloatArray, slope_deg: float, *, aspect_deg: float) -> FloatArray:
    """Vectors (3, ...) fixed to level ground, after that ground is tilted by ``slope_deg`` down towards ``aspect_deg``.

    A negative slope turns them back.
    """
    slope = np.radians(slope_deg)
    down = direction(aspect_deg, 0.0)
    along = down[0] * vectors[0] + down[1] * vectors[1]
    change = along * np.cos(slope) + vectors[2] * np.sin(slope) - along
    height = vectors[2] * np.cos(slope) - along * np.sin(slope)
    return np.stack([vectors[0] + change * down[0], vectors[1] + change * down[1], height])


def angles_of(vectors: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Azimuth from north, clockwise, and elevation [deg] of unit vectors (3, ...)."""
    azimuth_deg = np.degrees(np.arctan2(vectors[0], vectors[1])) % 360.0
    return azimuth_deg, np.degrees(np.arcsin(np.clip(vectors[2], -1.0, 1.0)))


def cos_incidence(sun: FloatArray, face: FloatArray) -> FloatArray:
    """Cosine of the angle between sun and plane normal, 0 behind the plane; unit vectors (3, ...) that broadcast."""
    cosine: FloatArray = sun[0] * face[0]
    cosine += sun[1] * face[1]
    cosine += sun[2] * face[2]
    np.maximum(cosine, 0.0, out=cosine)
    return cosine
