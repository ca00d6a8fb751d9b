"""The patch a panel takes up in a room, as points: its size is estimated from its wattage."""

from __future__ import annotations

import numpy as np

from ..types import FloatArray

CELLS_W_M2 = 180.0
"""Name-plate watts of a small panel per square metre of it. Common practice: 20 % cells, a tenth of it frame."""
_ROOM_LEFT = 0.9
_GAUSS_2 = 1.0 / np.sqrt(3.0)


def patch_side_m(watts: float) -> float:
    """Side of the square that panels of ``watts`` (all of one kind) take up [m]."""
    return float(np.sqrt(watts / CELLS_W_M2))


def patch_axes(face: FloatArray, *, side_m: float, distance_m: float) -> FloatArray:
    """Half edges of a square patch with normal ``face``, in the frame of the wall [m]; (2, 3).

    One edge lies level. A patch that would reach through the glass is drawn in until it does not.
    """
    level = np.array([face[2], 0.0, -face[0]])
    length = float(np.hypot(face[0], face[2]))
    level = level / length if length > 1e-9 else np.array([1.0, 0.0, 0.0])
    axes = np.stack([level, np.cross(face, level)]) * (side_m / 2.0)
    reach = float(np.abs(axes[:, 2]).sum())
    return np.asarray(axes * min(1.0, _ROOM_LEFT * distance_m / reach) if reach > 0.0 else axes)


def patch_nodes(axes: FloatArray) -> FloatArray:
    """Four points whose mean stands for what varies smoothly over the patch, around its middle; (4, 3).

    Source
    ------
    Published: Gauss-Legendre, two points each way, exact up to the third power.
    """
    first, second = (part.ravel() for part in np.meshgrid([-_GAUSS_2, _GAUSS_2], [-_GAUSS_2, _GAUSS_2]))
    return np.asarray(first[:, None] * axes[0] + second[:, None] * axes[1])
