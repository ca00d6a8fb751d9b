"""What stands between the panel and the sky: the site's horizon, and masts and arms of the robot itself."""

from __future__ import annotations

import numpy as np

from ..types import BoolArray, FloatArray
from .plane import angles_of

Skyline = tuple[tuple[float, float], ...]
"""(azimuth from north, elevation) pairs in degrees, joined linearly and closed at 360."""
Obstructions = tuple[tuple[float, float, float], ...]
"""(from, to, elevation) in degrees, clockwise from the nose, from the horizon up to elevation."""

_N_AZIMUTHS = 720
AZIMUTHS_DEG: FloatArray = np.asarray((np.arange(_N_AZIMUTHS) + 0.5) * (360.0 / _N_AZIMUTHS), dtype=np.float64)
BAND_DEG = 6.5
"""Height of the band above the horizon. From memory: Perez et al., Solar Energy 39 (1987) 221, their first model."""
_WHOLE_PANEL_DEG = 90.0  # Common practice: what fills a quarter of the view shades every cell of a small panel


def horizon_at(horizon: Skyline, azimuth_deg: FloatArray) -> FloatArray:
    """Elevation of the horizon [deg] at azimuths of any shape; 0 without a horizon or where it dips below level."""
    if not horizon:
        return np.zeros_like(azimuth_deg)
    azimuths, elevations = zip(*horizon, strict=True)
    return np.asarray(np.maximum(np.interp(azimuth_deg, azimuths, elevations, period=360.0), 0.0))


def obstruction_at(obstructions: Obstructions, from_nose_deg: FloatArray) -> FloatArray:
    """Elevation up to which the robot itself hides the sky [deg], at angles clockwise from the nose."""
    highest = np.zeros_like(from_nose_deg)
    for first, last, elevation in obstructions:
        np.maximum(highest, np.where(_within(from_nose_deg, first, last=last), elevation, 0.0), out=highest)
    return highest


def beam_lost(
    obstructions: Obstructions, from_nose_deg: FloatArray, *, sun_elevation_deg: FloatArray, bypass_groups: int
) -> FloatArray:
    """Share of a panel's direct light lost to parts of the robot in front of the sun, in steps of 1/bypass_groups.

    One group: shade on a cell stops the whole string. With more, each obstruction takes as many groups as it fills of
    a quarter turn, one at least. The angles broadcast.

    Source
    ------
    Common practice.
    """
    lost = np.zeros(np.broadcast_shapes(from_nose_deg.shape, sun_elevation_deg.shape))
    for first, last, elevation in obstructions:
        share_of_panel = min(_width_deg(first, last) / _WHOLE_PANEL_DEG, 1.0)
        groups = max(int(np.ceil(bypass_groups * share_of_panel)), 1)
        lost += (groups / bypass_groups) * (_within(from_nose_deg, first, last=last) & (sun_elevation_deg < elevation))
    return np.minimum(lost, 1.0)


def sky_shares(face: FloatArray, hidden_deg: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Share of a plane's sky that is left above a skyline: of the evenly bright sky, and of the band at the horizon.

    Parameters
    ----------
    face : (3, n_planes)
        Unit normals, east, north, up.
    hidden_deg : (n_planes or 1, 720)
        Elevation up to which the sky is hidden, at ``AZIMUTHS_DEG``.

    Returns
    -------
    Two arrays (n_planes,), 0 to 1, both weighted by the cosine of incidence; the first by exact integrals over
    elevation at each azimuth. Where a plane sees no sky at all, 0.
    """
    azimuth_deg, elevation_deg = angles_of(face)
    facing = np.cos(np.radians(AZIMUTHS_DEG - azimuth_deg[:, None])) * np.cos(np.radians(elevation_deg))[:, None]
    height = np.broadcast_to(face[2][:, None], facing.shape)
    hidden = np.radians(np.clip(hidden_deg, 0.0, 90.0))
    all_of_it = _irradiance_above(np.zeros_like(facing), facing, height=height).sum(axis=1)
    left = _irradiance_above(np.broadcast_to(hidden, facing.shape), facing, height=height).sum(axis=1)
    band_weight = np.maximum(facing, 0.0) + 1e-12  # a flat plane faces every azimuth alike
    open_band = np.clip(1.0 - hidden_deg / BAND_DEG, 0.0, 1.0)
    band = (band_weight * open_band).sum(axis=1) / band_weight.sum(axis=1)
    return np.divide(left, all_of_it, out=np.zeros_like(left), where=all_of_it > 0.0), band


def _irradiance_above(lowest: FloatArray, facing: FloatArray, *, height: FloatArray) -> FloatArray:
    """Integral of cos(incidence) cos(e) over the elevations e from ``lowest`` [rad] to the zenith that the plane sees.

    Along one azimuth the cosine of incidence is height sin(e) + facing cos(e): it changes sign at most once.
    """
    turn = np.arctan2(-facing, height)  # where it crosses 0
    rising = height > 0.0
    first = np.where(rising, np.maximum(lowest, turn), lowest)
    last = np.where(rising, np.pi / 2, np.clip(np.arctan2(facing, -height), lowest, np.pi / 2))
    first = np.minimum(first, last)

    def up_to(e: FloatArray) -> FloatArray:
        return np.asarray(height * np.sin(e) ** 2 / 2 + facing * (e / 2 + np.sin(2 * e) / 4))

    return up_to(last) - up_to(first)


def _width_deg(first: float, last: float) -> float:
    """Width of a sector, clockwise from ``first`` to ``last`` [deg], 360 for a full turn."""
    return 360.0 if abs(last - first) >= 360.0 else (last - first) % 360.0


def _within(angle_deg: FloatArray, first: float, *, last: float) -> BoolArray:
    """Whether an angle lies in the sector clockwise from ``first`` to ``last``."""
    return np.asarray((angle_deg - first) % 360.0 <= _width_deg(first, last))
