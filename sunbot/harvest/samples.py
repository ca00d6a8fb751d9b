"""The lit moments of all panels, flat: only steps and headings in which there is light and time is spent."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from ..light.carriers import Light
from ..sky.weather import Weather
from ..types import AnyArray, FloatArray, IntArray
from .cells import cell_temp_c
from .panels import Array
from .tables import Spots, spots

_AT_ONCE = 16_384
"""Samples worked on together: a dozen arrays of them stay in a core's own cache."""


@dataclass(frozen=True, eq=False)
class Samples:
    """Lit moments within a stretch of steps, in the order of time.

    rows : (n_lit,) steps with any light. starts : (n_lit,) where each begins among the samples; None if one heading.
    weight : (n_samples,) share of the step spent so. cells_w_m2, temp_c, at : per panel, (n_samples,): light on the
    cells, cell temperature, place on the grid of the tables.
    """

    rows: IntArray
    starts: IntArray | None
    weight: FloatArray
    cells_w_m2: tuple[FloatArray, ...]
    temp_c: tuple[FloatArray, ...]
    at: tuple[Spots, ...]

    def mean(self, values: FloatArray) -> FloatArray:
        """Mean over the headings of each lit step, (n_lit,)."""
        return values if self.starts is None else np.add.reduceat(values * self.weight, self.starts)

    def spread(self, by_row: AnyArray) -> AnyArray:
        """What belongs to each lit step, (n_lit,), for each sample in it."""
        return by_row if self.starts is None else np.repeat(by_row, np.diff(self.starts, append=len(self.weight)))


def stretches(lights: Sequence[Light], n_times: int) -> list[slice]:
    """Stretches of steps that fit the cache, half of them being night."""
    step = max(1, 2 * _AT_ONCE // max(light.cells_w_m2.shape[1] for light in lights))
    return [slice(first, min(first + step, n_times)) for first in range(0, n_times, step)]


def samples(lights: Sequence[Light], weather: Weather, arrays: Sequence[Array], *, within: slice) -> Samples | None:
    """The lit moments within a stretch, None if it is all dark."""
    widest = max(lights, key=lambda light: light.cells_w_m2.shape[1])
    n_headings = widest.cells_w_m2.shape[1]
    cells = [light.cells_w_m2[within] for light in lights]
    weight = widest.weight if len(widest.weight) == 1 else widest.weight[within]
    lit = np.zeros((len(cells[0]), n_headings), dtype=bool)
    for one in cells:
        lit |= one > 0.0
    lit &= weight > 0.0
    flat = np.flatnonzero(lit)
    if not len(flat):
        return None
    row = flat if n_headings == 1 else flat // n_headings
    heading = flat - row * n_headings
    starts = None if n_headings == 1 else np.flatnonzero(np.diff(row, prepend=-1))
    air_c, wind = (weather.table[name].to_numpy()[within][row] for name in ("temp_air", "wind_speed"))
    light_k, temp_k = [], []
    for one, light, array in zip(cells, lights, arrays, strict=True):
        u0, u1 = array.heat_loss
        light_k.append(_at(one, row, heading))
        temp_k.append(cell_temp_c(_at(light.plane_w_m2[within], row, heading), air_c, wind, u0=u0, u1=u1))
    return Samples(
        rows=within.start + (row if starts is None else row[starts]),
        starts=starts,
        weight=_at(np.broadcast_to(weight, (len(weight), n_headings)), row if len(weight) > 1 else 0 * row, heading),
        cells_w_m2=tuple(light_k),
        temp_c=tuple(temp_k),
        at=tuple(spots(g, t) for g, t in zip(light_k, temp_k, strict=True)),
    )


def _at(values: FloatArray, row: IntArray, heading: IntArray) -> FloatArray:
    """Values (n_steps, 1 or n_headings) of the samples."""
    found = values[row, 0] if values.shape[1] == 1 else values[row, heading]
    return found.astype(np.float64, copy=False)


def all_samples(lights: Sequence[Light], weather: Weather, arrays: Sequence[Array]) -> Iterator[Samples]:
    """All lit moments, stretch by stretch."""
    for within in stretches(lights, len(weather.table)):
        part = samples(lights, weather, arrays, within=within)
        if part is not None:
            yield part
