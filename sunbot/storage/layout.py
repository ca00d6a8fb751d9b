"""How the lanes of a block lie in memory, and tables over battery voltage."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np

from ..types import AnyArray, FloatArray, IntArray


@dataclass(frozen=True)
class Layout:
    """Years times designs as one array whose longer axis is the last: numpy's inner loops run along it."""

    n_years: int
    n_designs: int
    years_last: bool

    @property
    def shape(self) -> tuple[int, int]:
        """Shape of everything that differs from lane to lane."""
        return (self.n_designs, self.n_years) if self.years_last else (self.n_years, self.n_designs)

    def over_years(self, values: AnyArray) -> AnyArray:
        """(..., n_years) made to broadcast against lanes."""
        return values[..., None, :] if self.years_last else values[..., :, None]

    def over_designs(self, values: AnyArray) -> AnyArray:
        """(..., n_designs) made to broadcast against lanes."""
        return values[..., :, None] if self.years_last else values[..., None, :]

    def turned(self, values: AnyArray) -> AnyArray:
        """(..., n_years, n_designs) to lanes and back."""
        return values.swapaxes(-1, -2) if self.years_last else values

    @cached_property
    def year_of(self) -> IntArray:
        """(n_lanes,) year of each lane in memory order."""
        return np.ascontiguousarray(np.broadcast_to(self.over_years(np.arange(self.n_years)), self.shape)).ravel()

    @cached_property
    def design_of(self) -> IntArray:
        """(n_lanes,) design of each lane in memory order."""
        return np.ascontiguousarray(np.broadcast_to(self.over_designs(np.arange(self.n_designs)), self.shape)).ravel()


@dataclass(frozen=True, eq=False)
class Volts:
    """Even voltage nodes: place = half_v * per_half_v - offset is the fractional node of twice a half voltage."""

    n: int
    per_half_v: float
    offset: float

    @classmethod
    def of(cls, nodes: FloatArray, *, low_v: float, high_v: float) -> Volts:
        """The nodes of a table; ValueError where they are uneven or miss a part of low_v..high_v."""
        if nodes.size == 1:
            return cls(1, 0.0, 0.0)
        width = (nodes[-1] - nodes[0]) / (nodes.size - 1)
        if width <= 0 or np.abs(np.diff(nodes) - width).max() > 1e-9 * width:
            raise ValueError("battery_v must be ascending and evenly spaced")
        if nodes[0] > low_v + 1e-9 or nodes[-1] < high_v - 1e-9:
            raise ValueError(f"battery_v must reach from {low_v:.3f} to {high_v:.3f} V, the pack's rest voltages")
        return cls(nodes.size, 2.0 / width, nodes[0] / width)


@dataclass(frozen=True, eq=False)
class OverVolts:
    """A quantity over (step, year, column, voltage), read at each lane's own voltage.

    base, slope : (n_steps, n_years * n_columns * n_volts); value = base[j] + slope[j] * place. With one node base is
    the value itself and slope is None. top : the largest value at a node.
    """

    base: FloatArray
    slope: FloatArray | None
    n_columns: int
    n_volts: int
    top: float

    @classmethod
    def through(cls, values: FloatArray) -> OverVolts:
        """The table through values (n_steps, n_years, n_columns, n_volts)."""
        steps, _, columns, volts = values.shape
        top = float(values.max()) if values.size else 0.0
        if volts == 1:
            return cls(np.ascontiguousarray(values).reshape(steps, -1), None, columns, 1, top)
        slope = np.empty(values.shape)
        np.subtract(values[..., 1:], values[..., :-1], out=slope[..., :-1])
        slope[..., -1] = slope[..., -2]
        base = slope * np.arange(volts)
        np.subtract(values, base, out=base)
        return cls(base.reshape(steps, -1), slope.reshape(steps, -1), columns, volts, top)

    def start(self, year: IntArray, column: IntArray | int) -> IntArray:
        """Where the nodes of a year and column begin in a step's row."""
        return (year * self.n_columns + column) * self.n_volts

    def at(self, step: int | slice, start: IntArray, *, place: FloatArray) -> FloatArray:
        """Values at fractional voltage nodes.

        start : (n_lanes,); place : (n_lanes,) for one step, (n_steps, n_lanes) for a slice of steps.
        """
        if self.slope is None:
            value: FloatArray = self.base[step][..., start]
            return value
        node = start + np.minimum(place.astype(np.intp), self.n_volts - 1)
        base, slope = self.base[step], self.slope[step]
        if base.ndim == 1:
            return np.asarray(base[node] + slope[node] * place)
        return np.asarray(np.take_along_axis(base, node, 1) + np.take_along_axis(slope, node, 1) * place)
