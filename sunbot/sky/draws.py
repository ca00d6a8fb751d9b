"""Chance, year by year: every year of a seed has its own stream, whatever the number of years asked for."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..types import FloatArray

DAYS, HOURS = 365, 24


@dataclass(frozen=True, eq=False)
class Draws:
    """Standard normal, independent draws of n years and of the year before the first.

    months : (n + 1, 12). light, warmth, snow : (n + 1, 365), one a day. hours : (n, 365, 24).
    """

    months: FloatArray
    light: FloatArray
    warmth: FloatArray
    snow: FloatArray
    hours: FloatArray


def draw_years(seed: int, *, first: int, years: int) -> Draws:
    """Draws of years ``first`` to ``first + years - 1`` (counted from 1) of a seed."""
    daily = np.empty((years + 1, 12 + 3 * DAYS))
    hours = np.empty((years, DAYS, HOURS))
    for i in range(years + 1):
        stream = np.random.Generator(np.random.PCG64(np.random.SeedSequence((seed, first - 1 + i))))
        daily[i] = stream.standard_normal(daily.shape[1])
        if i > 0:
            stream.standard_normal(out=hours[i - 1])
    light, warmth, snow = np.split(daily[:, 12:], 3, axis=1)
    return Draws(daily[:, :12], light, warmth, snow, hours)


def persistent(noise: FloatArray, keep: FloatArray) -> FloatArray:
    """Each year's steps as a first-order autoregression of unit variance that comes out of the year before.

    noise : (n + 1, n_steps) independent standard normal, the year before the first at the head.
    keep : (n_steps,) correlation with the step before. Result (n, n_steps).
    The year before runs in from its own first draw, so that no year depends on how many were asked for.
    """
    two_years = np.concatenate([noise[:-1], noise[1:]], axis=1).T.copy()
    for step in range(1, len(two_years)):
        rho = keep[step % len(keep)]
        two_years[step] = rho * two_years[step - 1] + np.sqrt(1.0 - rho**2) * two_years[step]
    return np.ascontiguousarray(two_years[noise.shape[1] :].T)
