"""A rectangular opening in a wall as a point in the room sees it: directions that pass, and how much the sun lights.

Vectors are in the frame of the wall: right (seen looking out), up, out.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from ..types import FloatArray
from .plane import direction

_N_ACROSS, _N_UP = 16, 8
_LINES = 8  # over a patch, to find how much of it is lit
_GAUSS_ACROSS = np.polynomial.legendre.leggauss(_N_ACROSS)
_GAUSS_UP = np.polynomial.legendre.leggauss(_N_UP)

Edges = Callable[[FloatArray], FloatArray]
"""From angles right of straight out [rad], (n,), to elevations [rad], (k, n), at which what is seen changes."""


class Opening(NamedTuple):
    """Edges of the opening relative to a point, right and up, and how far in front of it the wall stands [m]."""

    left_m: float
    right_m: float
    low_m: float
    high_m: float
    distance_m: float

    def seen_from(self, point: FloatArray) -> Opening:
        """The same opening from a point (right, up, out) [m] away from here."""
        right, up, out = (float(part) for part in point)
        return Opening(
            self.left_m - right, self.right_m - right, self.low_m - up, self.high_m - up, self.distance_m - out
        )


ALL_AROUND = Opening(-np.inf, np.inf, -np.inf, np.inf, 1.0)
"""An opening without end: half of all directions."""


@dataclass(frozen=True, eq=False)
class Directions:
    """Directions spread over an opening, for integrals; arrays are (n_across, n_up).

    across : (n_across, 1) and up : angles right of straight out, and elevations [rad]. solid_sr : what each stands for.
    across_rad : (n_across,) width each column stands for. low, high : (n_across,) elevations of the opening's edges.
    """

    across: FloatArray
    up: FloatArray
    solid_sr: FloatArray
    across_rad: FloatArray
    low: FloatArray
    high: FloatArray

    def cos_at(self, face: FloatArray) -> FloatArray:
        """Cosine of incidence on a plane with normal ``face`` (3,), 0 behind it."""
        level = np.cos(self.up)
        cosine = level * (face[0] * np.sin(self.across) + face[2] * np.cos(self.across)) + face[1] * np.sin(self.up)
        return np.asarray(np.maximum(cosine, 0.0))

    def cos_of_level(self, face: FloatArray) -> FloatArray:
        """The same of light that comes level, in the direction of each column; (n_across,)."""
        across = self.across[:, 0]
        return np.asarray(np.maximum(face[0] * np.sin(across) + face[2] * np.cos(across), 0.0))

    @property
    def cos_at_wall(self) -> FloatArray:
        """Cosine of incidence on the glass."""
        return np.asarray(np.cos(self.up) * np.cos(self.across))


def wall_frame(vectors: FloatArray, azimuth_deg: float) -> FloatArray:
    """Vectors (3, ...) east, north, up as right, up, out of a wall that faces ``azimuth_deg``."""
    right, out = direction(azimuth_deg + 90.0, 0.0), direction(azimuth_deg, 0.0)
    return np.stack(
        [right[0] * vectors[0] + right[1] * vectors[1], vectors[2], out[0] * vectors[0] + out[1] * vectors[1]]
    )


def directions_through(opening: Opening, face: FloatArray, *, edges: Edges | None = None) -> Directions:
    """Directions from a point through the opening, dense enough for integrals within 0.1 %.

    Gauss-Legendre nodes over the angle across, then over elevation, cut where the plane with normal ``face`` (3,)
    begins to see, and at ``edges``.
    """
    first, last = np.arctan2(opening.left_m, opening.distance_m), np.arctan2(opening.right_m, opening.distance_m)
    turn = -np.arctan2(face[2], face[0]) if face[0] >= 0.0 else -np.arctan2(-face[2], -face[0])
    cuts = np.array([first, np.clip(turn, first, last), last])
    across, across_rad = _nodes(cuts[:, None], _GAUSS_ACROSS)
    across, across_rad = across.ravel(), across_rad.ravel()
    reach = np.cos(across) / opening.distance_m
    low, high = np.arctan(opening.low_m * reach), np.arctan(opening.high_m * reach)
    facing = face[0] * np.sin(across) + face[2] * np.cos(across)
    begins = np.arctan2(-facing, np.full_like(facing, max(face[1], 0.0)))
    between = [begins] if edges is None else [begins, *edges(across)]
    up, up_rad = _nodes(np.sort([low, *(np.clip(cut, low, high) for cut in between), high], axis=0), _GAUSS_UP)
    up, up_rad = up.T, up_rad.T
    return Directions(across[:, None], up, across_rad[:, None] * up_rad * np.cos(up), across_rad, low, high)


def configuration_factor(opening: Opening, face: FloatArray) -> float:
    """Share of the light that leaves a small plane, by the cosine law, that passes the opening.

    The check formula of this module: through the directions that all light through a window takes, it is held against
    the closed forms of radiative transfer.
    """
    seen = directions_through(opening, face)
    return float((seen.cos_at(face) * seen.solid_sr).sum() / np.pi)


def share_lit(opening: Opening, axes: FloatArray, *, rays: FloatArray) -> FloatArray:
    """Share of a flat patch whose rays to the sun pass the opening.

    Parameters
    ----------
    axes : (2, 3)
        Half edges of the patch around the point the opening is given for: right, up, out [m].
    rays : (3, n_rays)
        Towards the sun, with an outward part above 0.

    Returns
    -------
    (n_rays,), 0 to 1: the mean over lines across the patch of the exact length that is lit on each.
    """
    slope = rays[:2] / rays[2]
    middle = opening.distance_m * slope
    # where the half edges fall on the wall, along the rays
    first, second = (axis[:2, None] - axis[2] * slope for axis in axes)
    second = np.where(np.abs(second) < 1e-12, 1e-12, second)
    edges = np.array([[opening.left_m, opening.right_m], [opening.low_m, opening.high_m]])
    lit = np.zeros(rays.shape[1])
    for at in (np.arange(_LINES) + 0.5) * (2.0 / _LINES) - 1.0:
        ends = (edges[:, :, None] - (middle + at * first)[:, None]) / second[:, None]
        begins, stops = ends.min(axis=1).max(axis=0), ends.max(axis=1).min(axis=0)
        lit += np.maximum(np.minimum(stops, 1.0) - np.maximum(begins, -1.0), 0.0)
    return np.asarray(lit / (2.0 * _LINES))


def _nodes(cuts: FloatArray, rule: tuple[FloatArray, FloatArray]) -> tuple[FloatArray, FloatArray]:
    """Nodes and weights of a rule on every piece between ascending cuts (n_cuts, n); (n_pieces x n_rule, n)."""
    nodes, weights = rule
    middle, half = (cuts[1:] + cuts[:-1]) / 2.0, (cuts[1:] - cuts[:-1]) / 2.0
    at = middle[:, None] + half[:, None] * nodes[:, None]
    return at.reshape(-1, cuts.shape[1]), (half[:, None] * weights[:, None]).reshape(-1, cuts.shape[1])
