"""A panel's power and current on a grid of light and cell temperature, looked up linearly between its points."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from ..types import FloatArray, IntArray
from .cells import STC_W_M2, OneDiode, current_a, peak

# The grid is even in the root of the light: dim light, where the curve bends, gets points every 0.1 W/m2,
# full light every 20. 2 K because the current near open circuit doubles every 10 K. Both set by the error tests.
TOP_W_M2, N_LIGHT = 1600.0, 128
LOW_C, STEP_C, N_TEMP = -60.0, 2.0, 86
_PER_ROOT = N_LIGHT / TOP_W_M2**0.5
_DARKEST_W_M2 = 1e-4


class Spots(NamedTuple):
    """Where samples lie on the grid: number of the mesh, and how far across it, each (n_samples,)."""

    mesh: IntArray
    across_light: FloatArray
    across_temp: FloatArray


def spots(cells_w_m2: FloatArray, temp_c: FloatArray) -> Spots:
    """Where light [W/m², at least 0] and cell temperature [°C] lie; the rim meshes go on beyond it."""
    light = np.sqrt(cells_w_m2)
    light *= _PER_ROOT
    mesh = light.astype(np.intp)
    np.minimum(mesh, N_LIGHT - 1, out=mesh)
    light -= mesh
    temp = temp_c - LOW_C
    temp *= 1.0 / STEP_C
    row = temp.astype(np.intp)
    np.clip(row, 0, N_TEMP - 2, out=row)
    temp -= row
    mesh *= N_TEMP - 1
    mesh += row
    return Spots(mesh, light, temp)


def look_up(table: FloatArray, at: Spots) -> list[FloatArray]:
    """Quantities of a table at some spots: one (n_samples,) array for each, bilinear within a mesh."""
    rows = table.take(at.mesh, axis=0, mode="clip")
    found = []
    for first in range(0, table.shape[1], 4):
        base, by_light, by_temp, by_both = (rows[:, first + k] for k in range(4))
        value = by_both * at.across_light
        value += by_temp
        value *= at.across_temp
        value += by_light * at.across_light
        value += base
        found.append(value)
    return found


def peak_table(cell: OneDiode) -> FloatArray:
    """Table of two quantities: maximum power over light at full sun [W], and the voltage at it [V].

    The power at some light is the first times light / 1000 W/m²: so dim light keeps its relative accuracy.
    """
    light, temp = _points()
    power_w, peak_v = peak(cell, light, temp)
    return np.hstack([_meshes(power_w * STC_W_M2 / light), _meshes(peak_v)])


def current_table(cell: OneDiode, *, volts: float, extra_ohm: float) -> FloatArray:
    """Table of one quantity: current [A] at a voltage held behind a resistance, not yet kept from going negative."""
    light, temp = _points()
    return _meshes(current_a(cell, light, temp, volts=volts, extra_ohm=extra_ohm))


def _points() -> tuple[FloatArray, FloatArray]:
    """Light and temperature at the points of the grid, each (N_LIGHT + 1, N_TEMP)."""
    light = (np.arange(N_LIGHT + 1) / _PER_ROOT) ** 2
    light[0] = _DARKEST_W_M2
    grid = np.meshgrid(light, LOW_C + STEP_C * np.arange(N_TEMP), indexing="ij")
    return grid[0], grid[1]


def _meshes(at_points: FloatArray) -> FloatArray:
    """Bilinear coefficients of each mesh, (n_meshes, 4), from values at the points."""
    here, there = at_points[:-1, :-1], at_points[1:, :-1]
    by_light = there - here
    by_temp = at_points[:-1, 1:] - here
    by_both = at_points[1:, 1:] - there - by_temp
    return np.stack([here, by_light, by_temp, by_both], axis=-1).reshape(-1, 4)
