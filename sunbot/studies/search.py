"""One search for every "smallest that does": many cases at once, each on its own range."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np

from ..types import BoolArray, FloatArray, IntArray

Meets = Callable[[IntArray, FloatArray], BoolArray]
"""Which candidates meet the target: (cases (m,), candidates (m, k)) -> (m, k)."""

DIGITS = 4
"""Significant digits of a candidate, so that what is reported is what was tried."""

WIDEST = 24
"""Most candidates of a case in one round: a wide round costs little more than a narrow one, one more round much."""


def smallest(meets: Meets, low: FloatArray, high: FloatArray, *, rel: float = 0.01, width: int = 14) -> FloatArray:
    """The smallest candidate, to ``rel``, from which on every larger one that was tried meets the target.

    Parameters
    ----------
    meets : callable
        Tries some candidates of some cases at once.
    low, high : (n_cases,)
        Range of each case, above 0, both ends tried.
    rel : float
        Largest ratio less one between the answer and the next smaller candidate, which fails; at least 0.002.
    width : int
        Candidates of each case in the first round, at least 2.

    Returns
    -------
    (n_cases,): the answer; ``low`` where even that meets the target, NaN where ``high`` does not.
    """
    fails, passes = np.array(low, dtype=float), np.array(high, dtype=float)
    answer = np.full(fails.shape, np.nan)
    cases = np.arange(fails.size)
    grid = _spread(fails, passes, np.linspace(0.0, 1.0, width))
    first = _first_of_passing(meets(cases, grid))
    answer[first == 0] = grid[first == 0, 0]
    cases = np.flatnonzero((first > 0) & (first < width))
    while True:
        fails[cases], passes[cases] = _around(grid, first, fails=fails, passes=passes, cases=cases)
        close = passes[cases] <= fails[cases] * (1.0 + rel)
        answer[cases[close]] = passes[cases[close]]
        cases = cases[~close]
        if not cases.size:
            return answer
        inner = _between(fails[cases], passes[cases], rel=rel)
        first = np.zeros(fails.size, dtype=np.int64)
        first[cases] = _first_of_passing(meets(cases, inner))
        grid = np.full((fails.size, inner.shape[1]), np.nan)
        grid[cases] = inner


def _first_of_passing(met: BoolArray) -> IntArray:
    """From which candidate on all pass, by row; the number of candidates where the last one fails."""
    return np.asarray(met.shape[1] - np.cumprod(met[:, ::-1], axis=1).sum(axis=1), dtype=np.int64)


def _around(
    grid: FloatArray, first: IntArray, *, fails: FloatArray, passes: FloatArray, cases: IntArray
) -> tuple[FloatArray, FloatArray]:
    """The failing candidate below the first passing one and that one; a bound where the grid has none."""
    at, width = first[cases], grid.shape[1]
    below = np.where(at > 0, grid[cases, np.maximum(at - 1, 0)], fails[cases])
    above = np.where(at < width, grid[cases, np.minimum(at, width - 1)], passes[cases])
    return below, above


def _between(low: FloatArray, high: FloatArray, *, rel: float) -> FloatArray:
    """Candidates strictly between, as many as end the search in this round if `WIDEST` allows."""
    # A tenth of the step is left for the rounding of the candidates.
    enough = math.ceil(math.log(float((high / low).max())) / math.log1p(0.9 * rel)) - 1
    width = min(max(enough, 1), WIDEST)
    return _spread(low, high, np.linspace(0.0, 1.0, width + 2)[1:-1])


def _spread(low: FloatArray, high: FloatArray, share: FloatArray) -> FloatArray:
    """Candidates between low and high in even ratios, (n_cases, width), to DIGITS significant digits."""
    grid = low[:, None] * (high / low)[:, None] ** share[None, :]
    scale = 10.0 ** (DIGITS - 1 - np.floor(np.log10(grid)))
    return np.asarray(np.round(grid * scale) / scale)
