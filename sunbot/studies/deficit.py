"""How much store the dark asks for: the running deficit of demand over harvest, a bracket for the search."""

from __future__ import annotations

import numpy as np

from ..calendar import Lanes
from ..types import FloatArray


def largest_deficit_wh(offer_w: FloatArray, asked_w: FloatArray, lanes: Lanes) -> FloatArray:
    """Largest running deficit of each energy year, each starting with what the year before left.

    Parameters
    ----------
    offer_w : (n_times, n_sizes)
        Harvest offered at the battery [W].
    asked_w : (n_times,)
        Asked from the battery [W].

    Returns
    -------
    (n_years, n_sizes) [Wh]: what a lossless store must hold so that it never runs empty.
    """
    sizes = range(offer_w.shape[1])
    return np.stack([_of_one_size(asked_w - offer_w[:, size], lanes) for size in sizes], axis=1)


def _of_one_size(short_w: FloatArray, lanes: Lanes) -> FloatArray:
    """Largest running deficit of each year, (n_years,)."""
    run_wh = np.cumsum(short_w[lanes.row] * lanes.step_h, axis=0)
    # A store that is full cannot be filled further: the deficit never falls below 0.
    low_wh = np.minimum.accumulate(np.minimum(run_wh, 0.0), axis=0)
    end_wh = run_wh[-1] - low_wh[-1]
    start_wh = np.where(lanes.before >= 0, end_wh[lanes.before], 0.0)
    return np.asarray((run_wh - np.minimum(low_wh, -start_wh)).max(axis=0))


def deficit_to_cover_wh(yearly_wh: FloatArray, needed: int) -> FloatArray:
    """The deficit that ``needed`` of the years stay within; (n_sizes,)."""
    ordered = np.sort(yearly_wh, axis=0)
    return np.asarray(ordered[needed - 1])


def yearly_wh(power_w: FloatArray, lanes: Lanes) -> FloatArray:
    """Energy of each year; (n_times, ...) -> (n_years, ...)."""
    return np.asarray([np.tensordot(lanes.step_h[:, y], power_w[lanes.row[:, y]], axes=(0, 0)) for y in _years(lanes)])


def _years(lanes: Lanes) -> range:
    return range(lanes.row.shape[1])
